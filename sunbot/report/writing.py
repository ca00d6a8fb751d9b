"""Files written whole or not at all: on the ground floor, for the sky writes one too."""

from ..writing import write_text, write_whole

__all__ = ["write_text", "write_whole"]
