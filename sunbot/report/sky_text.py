"""The answer of `sky` on a terminal."""

from __future__ import annotations

from typing import TYPE_CHECKING

from .spells_text import spells_text
from .text import MONTH_NAMES, cautions_text
from .words import printable

if TYPE_CHECKING:
    from ..studies import SurveyResult


def sky_text(result: SurveyResult) -> str:
    """What the place offers month by month, its darkest days, and whether the weather is believable."""
    site = result.site
    failed = [check for check in result.audit if not check.passed]
    if not result.audit:
        state = "not audited: a route has many places"
    elif failed:
        state = f"{len(failed)} of {len(result.audit)} checks FAILED"
    else:
        state = "every check passed"
    head = (
        f"{site.name} ({site.latitude:.3f}, {site.longitude:.3f}, {site.altitude_m:.0f} m): {state}\n"
        f"  weather: {result.weather.origin}"
    )
    parts = [
        head,
        _months(result),
        spells_text(result.dark_spells, weather=result.weather, rated_w=None, what="light on a flat panel, Wh/m2"),
        _audit(result),
        cautions_text(result.cautions),
    ]
    return printable("\n\n".join(part for part in parts if part) + "\n")


def _months(result: SurveyResult) -> str:
    rows = [
        "Month by month (means over all years)",
        f"  {'':5}{'light on':>10}{'flat panel,':>14}{'darkest':>12}{'brightest':>12}{'air':>7}{'night':>7}{'day':>7}"
        f"{'coldest':>9}{'warmest':>9}",
        f"  {'':5}{'the level':>10}{'this horizon':>14}{'such month':>12}{'such month':>12}{'mean':>7}{'low':>7}"
        f"{'high':>7}",
        f"  {'':5}{'Wh/m2/day':>10}{'Wh/m2/day':>14}{'Wh/m2/day':>12}{'Wh/m2/day':>12}{'C':>7}{'C':>7}{'C':>7}"
        f"{'C':>9}{'C':>9}",
    ]
    for name, (_, month) in zip(MONTH_NAMES, result.months.iterrows(), strict=True):
        rows.append(
            f"  {name:5}{month['ghi_wh_m2_day']:>10.0f}{month['plane_wh_m2_day']:>14.0f}"
            f"{month['ghi_lowest_wh_m2_day']:>12.0f}{month['ghi_highest_wh_m2_day']:>12.0f}{month['temp_mean_c']:>7.1f}"
            f"{month['temp_min_c']:>7.1f}{month['temp_max_c']:>7.1f}{month['temp_lowest_c']:>9.1f}"
            f"{month['temp_highest_c']:>9.1f}"
        )
    return "\n".join(rows)


def _audit(result: SurveyResult) -> str:
    import textwrap

    if not result.audit:
        return ""
    rows = ["Is it believable?"]
    for check in result.audit:
        mark = "ok" if check.passed else "FAIL"
        rows.append(
            textwrap.fill(check.text, 96, initial_indent=f"  {mark:5}{check.code}: ", subsequent_indent=" " * 7)
        )
    return "\n".join(rows)
