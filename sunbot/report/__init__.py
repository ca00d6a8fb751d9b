"""The answers as people read them: terminal text, plots, JSON and CSV, starter files."""

from .answers import deliver_check, deliver_sky
from .delivery import Outputs

__all__ = ["Outputs", "deliver_check", "deliver_sky"]
