"""Dark spells as a table on a terminal."""

from __future__ import annotations

from collections.abc import Sequence
from typing import TYPE_CHECKING

from .words import counted, date_text

if TYPE_CHECKING:
    from ..sky import Weather
    from ..studies.dark_spells import DarkSpell


def spells_text(
    spells: Sequence[DarkSpell], *, weather: Weather, rated_w: float | None, what: str = "harvest, Wh"
) -> str:
    """The darkest spells with their dates and how often they come back."""
    per_watt = f"{'per rated W':>13}" if rated_w else ""
    dates = [date_text(spell.start, weather) for spell in spells]
    width = max(12, *map(len, dates))
    rows = [
        f"The darkest days in a row ({what} in all)",
        f"  {'days':>6}{'Wh':>10}{per_watt}   {'from':{width}}{'comes once in':>14}   95 % interval of that level",
    ]
    for spell, start in zip(spells, dates, strict=True):
        share = f"{spell.wh / rated_w:>13.3g}" if rated_w else ""
        once = "-" if spell.return_years is None else counted(round(spell.return_years), "year")
        interval = "" if spell.low is None or spell.high is None else f"   {_wh(spell.low)} to {_wh(spell.high)}"
        rows.append(f"  {spell.days:>6}{_wh(spell.wh):>10}{share}   {start:{width}}{once:>14}{interval}")
    return "\n".join(rows)


def _wh(energy: float) -> str:
    """Three digits, and never a power of ten."""
    return f"{energy:.3g}" if energy < 1000 else f"{energy:.0f}"
