"""The answer of `season` on a terminal."""

from __future__ import annotations

import math
from typing import TYPE_CHECKING

from .spells_text import spells_text
from .text import MONTH_NAMES, cautions_text, check_head, months_text
from .window_text import window_text

if TYPE_CHECKING:
    from ..studies.seasons import SeasonResult

_NAME_WIDTH = 16


def season_text(result: SeasonResult) -> str:
    """Months, charge, dark spells, the worst fortnight, work, mount, headings, sun lost, and what moves the answer."""
    parts = [
        check_head(result.check),
        months_text(result.months),
        _fan(result),
        spells_text(result.dark_spells, rated_w=result.robot.watts),
        _fortnight(result),
        _calendar(result),
        _mount(result),
        _headings(result),
        _sun(result),
        "" if result.window is None else window_text(result.window),
        _levers(result),
        cautions_text(result.cautions),
    ]
    return "\n\n".join(part for part in parts if part) + "\n"


def _by_month(columns: dict[str, tuple[list[float], str]], *, width: int = 12) -> list[str]:
    """Rows of a table by month: heads of up to two lines (parted by a line break), then values in their format."""
    heads = [name.split("\n") for name in columns]
    lines = [
        f"  {'':5}" + "".join(f"{(head[line] if line < len(head) else ''):>{width}}" for head in heads)
        for line in range(max(map(len, heads)))
    ]
    for at, month in enumerate(MONTH_NAMES):
        cells = [(values[at], form) for values, form in columns.values()]
        if not all(math.isnan(value) for value, _ in cells):
            shown = ("-" if math.isnan(value) else format(value, form) for value, form in cells)
            lines.append(f"  {month:5}" + "".join(f"{cell:>{width}}" for cell in shown))
    return lines


def _fan(result: SeasonResult) -> str:
    if result.check.verdict.years == 1:
        return ""
    fan = result.charge_fan
    columns = {
        "1 year in 10\nbelow": (fan["p10"].tolist(), ".0%"),
        "half the\nyears below": (fan["p50"].tolist(), ".0%"),
        "9 in 10\nbelow": (fan["p90"].tolist(), ".0%"),
    }
    return "\n".join(["Lowest charge of the month, over the years", *_by_month(columns, width=14)])


def _fortnight(result: SeasonResult) -> str:
    worst, step_h = result.worst, result.check.weather.step_h
    rows = [
        f"The worst fortnight, of the year that goes worst (the one from {worst.year_start}); step by step in --csv",
        f"  {'day':12}{'harvest Wh':>11}{'asked Wh':>10}{'served Wh':>11}{'lowest charge':>15}{'coldest box':>13}",
    ]
    days = [f"{time:%Y-%m-%d}" for time in worst.steps.index]
    for day, steps in worst.steps.groupby(days, sort=False):
        energy = steps[["harvest_w", "demand_w", "served_w"]].sum() * step_h
        rows.append(
            f"  {day:12}{energy['harvest_w']:>11.1f}{energy['demand_w']:>10.1f}"
            f"{energy['served_w']:>11.1f}{steps['soc'].min():>15.0%}{steps['box_temp_c'].min():>11.0f} C"
        )
    return "\n".join(rows)


def _calendar(result: SeasonResult) -> str:
    calendar, target = result.calendar, result.robot.target
    if calendar is None:
        return "No load is skippable (skip_below_soc), so there is no work to spread over the year."
    if not calendar.possible:
        return "Work calendar: the target is missed even without any skippable work; the essential loads must shrink."
    names = list(dict.fromkeys(entry.load for entry in calendar.entries))
    rows = [
        f"The work each month affords: minutes a day to ask for, {target.work_done:.0%} of which get done "
        f"(steps of {calendar.step_min:g} min)",
        f"  {'':5}" + "".join(f"{name[: _NAME_WIDTH - 2]:>{_NAME_WIDTH}}" for name in names),
    ]
    for number, month in enumerate(MONTH_NAMES, start=1):
        minutes = {entry.load: entry.minutes_per_day for entry in calendar.entries if entry.month == number}
        if minutes:
            cells = (f"{minutes[name]:.0f}" if name in minutes else "-" for name in names)
            why = "one step more would miss the target" if calendar.bound[number - 1] else "all of its hours"
            rows.append(f"  {month:5}" + "".join(f"{cell:>{_NAME_WIDTH}}" for cell in cells) + f"   {why}")
    if not calendar.confirmed:
        rows.append("  Written into a robot file it just misses the target: take a step less in the tightest month.")
    return "\n".join(rows)


def _mount(result: SeasonResult) -> str:
    mount = result.best_mount
    if mount is None:
        return ""
    robot, panel = result.robot, result.robot.panels[0]
    name = "the panel" if len(robot.panels) == 1 else f'panel "{panel.name}"'
    lean = ""
    if robot.heading == "fixed":
        north = (robot.heading_deg + mount.azimuth_deg) % 360.0
        lean = f", leaning {mount.azimuth_deg:.0f} deg clockwise from the nose ({north:.0f} from north)"
    elif robot.heading == "roams":
        lean = " (mean of all headings; parked the wrong way a tilted panel gets less)"
    gain = mount.worst_ratio / mount.worst_ratio_filed - 1 if mount.worst_ratio_filed > 0 else math.nan
    gained = "" if math.isnan(gain) else f" ({gain:+.0%})"
    filed = f"{panel.tilt_deg:.0f}" + (f" leaning {panel.azimuth_deg:.0f}" if robot.heading == "fixed" else "")
    return (
        f"Best mount of {name} for the worst month: tilt {mount.tilt_deg:.0f} deg{lean}\n"
        f"  filed: {filed}; harvest over demand in the worst month {mount.worst_ratio:.2f} instead of "
        f"{mount.worst_ratio_filed:.2f}{gained}"
    )


def _headings(result: SeasonResult) -> str:
    if not result.headings:
        return ""
    heads = {
        "as filed": "as filed",
        "as filed, nothing in the way": "nothing in\nthe way",
        "best fixed": "best fixed\nheading",
        "turns to sun": "turns to\nthe sun",
        "worst parked": "parks the\nwrong way",
    }
    columns = {heads[cost.policy]: (cost.harvest_wh_day.tolist(), ".1f") for cost in result.headings}
    best = next(cost for cost in result.headings if cost.policy == "best fixed")
    head = f"Harvest by the way the nose is held, Wh/day (best fixed: nose to {best.heading_deg:g} deg from north)"
    return "\n".join([head, *_by_month(columns)])


def _sun(result: SeasonResult) -> str:
    from ..studies.seasons import sun_hours

    if result.sun is None:
        return ""
    hours = sun_hours(result.sun)
    if not hours[["behind_horizon_h_day", "behind_robot_h_day"]].to_numpy().any():
        return ""
    columns = {
        "sun up\nh/day": (hours["up_h_day"].tolist(), ".1f"),
        "behind the\nhorizon": (hours["behind_horizon_h_day"].tolist(), ".1f"),
    }
    if result.robot.panels[0].obstructions:
        columns["behind own\nparts"] = (hours["behind_robot_h_day"].tolist(), ".1f")
    return "\n".join(["Hours of sun, whatever the weather, and what stands before it", *_by_month(columns)])


def _levers(result: SeasonResult) -> str:
    filed = result.check.verdict
    rows = ["What moves the answer, one thing at a time, the strongest first (dirt: points of light lost)"]
    rows.append(_outcome("as filed", "", filed.survival[0], result.check.outages.hours_per_year, filed.work_done[0]))
    for lever in result.levers:
        work = math.nan if lever.work_done is None else lever.work_done
        rows.append(_outcome(lever.what, lever.change, lever.survival, lever.hours_out_per_year, work))
    return "\n".join(rows)


def _outcome(what: str, change: str, survival: float, hours: float, work: float) -> str:
    done = "" if math.isnan(work) else f"   work done {work:>4.0%}"
    return f"  {what:10}{change:18}alive {survival:>4.0%}{hours:>10.1f} h out a year{done}"
