"""What to know about the ground that lights a panel."""

from __future__ import annotations

from collections.abc import Iterator

from ..inputs.robot import Robot
from ..types import Caution
from .glass import SNOW_SLIDES_DEG

SNOWED_DAYS = 10.0
"""Days a month under snow from which the ground is white for much of it. Common practice."""
SNOWY_ALBEDO = 0.4
"""Published: the surface table of pvlib has snow 0.65, fresh snow 0.75; a month half under snow lies about here."""


def ground_cautions(robot: Robot) -> tuple[Caution, ...]:
    """Whether the albedo of snowy months is that of bare ground, where a steep panel sees much of it."""
    return tuple(_snow_albedo(robot))


def _snow_albedo(robot: Robot) -> Iterator[Caution]:
    site = robot.site
    if site.snow_days is None or robot.window is not None:
        return
    if max(panel.steepest_deg for panel in robot.panels) < SNOW_SLIDES_DEG:
        return
    pairs = enumerate(zip(site.snow_days, site.albedo, strict=True), start=1)
    bare = [month for month, (days, albedo) in pairs if days >= SNOWED_DAYS and albedo < SNOWY_ALBEDO]
    if bare:
        months = ", ".join(str(month) for month in bare)
        yield Caution(
            "snow-albedo",
            "site",
            f"Snow lies on {SNOWED_DAYS:.0f} days or more in months {months}, but albedo there is that of bare ground, "
            "below 0.4. A steep panel sees the ground: write the albedo of each month (snow 0.65), or take the answer "
            "as the safe side.",
        )
