"""The answers as people read them: terminal text, plots, JSON and CSV, starter files."""

from .answers import deliver_check, deliver_pick, deliver_season, deliver_sky
from .delivery import Outputs
from .progress import Progress

__all__ = ["Outputs", "Progress", "deliver_check", "deliver_pick", "deliver_season", "deliver_sky"]
