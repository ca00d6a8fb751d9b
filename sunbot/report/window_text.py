"""What a window gives, on a terminal."""

from __future__ import annotations

from typing import TYPE_CHECKING

from ..shares import share_text
from ..studies.what_ifs import COATED_FACTOR
from .text import MONTH_NAMES
from .words import lifetime

if TYPE_CHECKING:
    from ..studies.behind_window import BehindWindow


def window_text(result: BehindWindow) -> str:
    """Sun and light on the panel by month, then how far from the glass the robot can live."""
    return f"{_months(result)}\n\n{_distances(result)}"


def _months(result: BehindWindow) -> str:
    rows = [
        "Behind the window: direct sun on the panel, its light, and what a light meter would show there",
        f"  {'':5}{'sun':>8}{'sun if all':>12}{'light':>11}{'of it':>9}{'light':>10}{'brightest':>11}",
        f"  {'':5}{'h/day':>8}{'were clear':>12}{'Wh/m2/day':>11}{'lamps':>9}{'klx h/day':>10}{'lx':>11}",
    ]
    for name, (_, month) in zip(MONTH_NAMES, result.months.iterrows(), strict=True):
        rows.append(
            f"  {name:5}{month['sun_h_day']:>8.1f}{month['sun_clear_sky_h_day']:>12.1f}"
            f"{month['light_wh_m2_day']:>11.0f}{month['lamp_wh_m2_day']:>9.0f}{month['klux_h_day']:>10.1f}{month['brightest_lux']:>11.0f}"
        )
    return "\n".join(rows)


def _distances(result: BehindWindow) -> str:
    rows = [
        "How far from the glass it can live (light and harvest in the worst month)",
        f"  {'distance m':>12}{'light Wh/m2/day':>17}{'harvest Wh/day':>16}{'alive':>8}",
    ]
    target = result.robot.target.survival
    for distance_m, at in result.distances.iterrows():
        rows.append(
            f"  {distance_m:>12.4g}{at['light_wh_m2_day']:>17.0f}{at['harvest_wh_day']:>16.2f}"
            f"{share_text(at['survival'], target=target, most=2):>8}"
            f"   {'meets the target' if at['target_met'] else 'misses it'}"
        )
    if result.survival_coated is not None:
        rows.append(
            f"  Coated glass may pass {COATED_FACTOR:g} times less than it says; then it is alive in "
            f"{share_text(result.survival_coated, target=target)} of {lifetime(result.robot)}s."
        )
    return "\n".join(rows)
