"""The answers as people read them: terminal text, plots, JSON and CSV, starter files."""

from .answers import deliver_check
from .delivery import Outputs

__all__ = ["Outputs", "deliver_check"]
