"""``python -m sunbot``."""

from .cli import main

main()
