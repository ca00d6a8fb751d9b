"""The answer of `season` on a terminal."""

from __future__ import annotations

import math
from collections.abc import Callable, Mapping
from typing import TYPE_CHECKING

from ..shares import exact_share, share_text
from .spells_text import spells_text
from .text import MONTH_NAMES, cautions_text, check_head, months_text
from .window_text import window_text
from .words import date_text, lifetime, printable

if TYPE_CHECKING:
    from ..inputs.robot import Target
    from ..studies.seasons import SeasonResult

_NAME_WIDTH = 16
"""Least width of a column headed by the name of a load."""


def season_text(result: SeasonResult) -> str:
    """Months, charge, dark spells, the worst fortnight, work, mount, headings, sun lost, and what moves the answer."""
    parts = [
        check_head(result.check),
        months_text(result.months, work_target=result.robot.target.work_done),
        _fan(result),
        spells_text(result.dark_spells, weather=result.check.weather, rated_w=result.robot.watts),
        _fortnight(result),
        _calendar(result),
        _mount(result),
        _headings(result),
        _sun(result),
        "" if result.window is None else window_text(result.window),
        _levers(result),
        cautions_text(result.cautions),
    ]
    return printable("\n\n".join(part for part in parts if part) + "\n")


def _by_month(columns: Mapping[str, tuple[list[float], Callable[[float], str]]], *, width: int = 12) -> list[str]:
    """Rows of a table by month: heads of up to two lines (parted by a line break), then values as they are told."""
    heads = [name.split("\n") for name in columns]
    lines = [
        f"  {'':5}" + "".join(f"{(head[line] if line < len(head) else ''):>{width}}" for head in heads)
        for line in range(max(map(len, heads)))
    ]
    for at, month in enumerate(MONTH_NAMES):
        cells = [(values[at], told) for values, told in columns.values()]
        if not all(math.isnan(value) for value, _ in cells):
            shown = ("-" if math.isnan(value) else told(value) for value, told in cells)
            lines.append(f"  {month:5}" + "".join(f"{cell:>{width}}" for cell in shown))
    return lines


def _fan(result: SeasonResult) -> str:
    if result.check.verdict.years == 1:
        return ""
    fan, noun = result.charge_fan, lifetime(result.robot)
    columns = {
        "1 in 10\nbelow": (fan["p10"].tolist(), _charge),
        "half of them\nbelow": (fan["p50"].tolist(), _charge),
        "9 in 10\nbelow": (fan["p90"].tolist(), _charge),
    }
    return "\n".join([f"Lowest charge of the month, over the {noun}s", *_by_month(columns, width=14)])


def _charge(soc: float) -> str:
    return share_text(soc, most=0)


def _tenth(value: float) -> str:
    return f"{value:.1f}"


def _fortnight(result: SeasonResult) -> str:
    worst, weather = result.worst, result.check.weather
    days = [date_text(time.date(), weather) for time in worst.steps.index]
    wide = max(12, *map(len, days))
    rows = [
        f"The worst fortnight, of the {lifetime(result.robot)} that goes worst (the one from "
        f"{date_text(worst.year_start, weather)}); step by step in --csv",
        f"  {'day':{wide}}{'harvest Wh':>11}{'asked Wh':>10}{'served Wh':>11}{'lowest charge':>15}{'coldest box':>13}",
    ]
    for day, steps in worst.steps.groupby(days, sort=False):
        energy = steps[["harvest_w", "demand_w", "served_w"]].sum() * weather.step_h
        rows.append(
            f"  {day:{wide}}{energy['harvest_w']:>11.1f}{energy['demand_w']:>10.1f}"
            f"{energy['served_w']:>11.1f}{_charge(steps['soc'].min()):>15}{steps['box_temp_c'].min():>11.0f} C"
        )
    return "\n".join(rows)


def _calendar(result: SeasonResult) -> str:
    calendar, target = result.calendar, result.robot.target
    if calendar is None:
        return "No load is skippable (skip_below_soc), so there is no work to spread over the year."
    if not calendar.possible:
        return (
            "Work calendar: the target is missed even without any skippable work. Shrink the essential loads, or see\n"
            "  sunbot pick for a larger panel or battery."
        )
    names = list(dict.fromkeys(entry.load for entry in calendar.entries))
    widths = [max(_NAME_WIDTH, len(name) + 2) for name in names]
    rows = [
        f"The work each month affords: minutes a day to ask for, {exact_share(target.work_done)} of which get done "
        f"(steps of {calendar.step_min:g} min)",
        f"  {'':5}" + "".join(f"{name:>{width}}" for name, width in zip(names, widths, strict=True)),
    ]
    out = months_out(result)
    for number, month in enumerate(MONTH_NAMES, start=1):
        minutes = {entry.load: entry.minutes_per_day for entry in calendar.entries if entry.month == number}
        if not out[number - 1]:
            rows.append(f"  {month:5}{'not out':>{widths[0]}}")
            continue
        cells = [f"{minutes[name]:.0f}" if name in minutes else "-" for name in names]
        why = "one step more would miss the target" if calendar.bound[number - 1] else "all of its hours"
        why = why if minutes else "no work in this month"
        told = "".join(f"{cell:>{width}}" for cell, width in zip(cells, widths, strict=True))
        rows.append(f"  {month:5}{told}   {why}")
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
        f"Best mount of {name} for the worst month, {looked_at(result)}:\n"
        f"  tilt {mount.tilt_deg:.0f} deg{lean}\n"
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
    columns = {heads[cost.policy]: (cost.harvest_wh_day.tolist(), _tenth) for cost in result.headings}
    best = next(cost for cost in result.headings if cost.policy == "best fixed")
    head = (
        f"Harvest by the way the nose is held, Wh/day, {looked_at(result)} (best fixed: nose to {best.heading_deg:g} "
        "deg from north)"
    )
    return "\n".join([head, *_by_month(columns)])


def _sun(result: SeasonResult) -> str:
    from ..studies.seasons import sun_hours

    if result.sun is None:
        return ""
    hours = sun_hours(result.sun)
    if not hours[["behind_horizon_h_day", "behind_robot_h_day"]].to_numpy().any():
        return ""
    columns = {
        "sun up\nh/day": (hours["up_h_day"].tolist(), _tenth),
        "behind the\nhorizon": (hours["behind_horizon_h_day"].tolist(), _tenth),
    }
    if result.robot.panels[0].obstructions:
        columns["behind own\nparts"] = (hours["behind_robot_h_day"].tolist(), _tenth)
    return "\n".join(["Hours of sun, whatever the weather, and what stands before it", *_by_month(columns)])


def months_out(result: SeasonResult) -> list[bool]:
    """Which calendar months the robot is out in."""
    return [not math.isnan(lowest) for lowest in result.months["lowest_soc"]]


def looked_at(result: SeasonResult) -> str:
    """The years on which mounts and headings are compared: fewer than those of the answer where they are generated."""
    from ..studies.tilts import LOOK_YEARS

    weather = result.check.weather
    if weather.kind == "generated" and weather.n_years > LOOK_YEARS:
        return f"means of the first {LOOK_YEARS} of {weather.n_years} years"
    return "of the one year" if weather.n_years == 1 else f"means of all {weather.n_years} years"


def _levers(result: SeasonResult) -> str:
    filed, target = result.check.verdict, result.robot.target
    rows = ["What moves the answer, one thing at a time, the strongest first (dirt: points of light lost)"]
    rows.append(
        _outcome("as filed", "", filed.survival[0], result.check.outages.hours_per_year, filed.work_done[0], target)
    )
    for lever in result.levers:
        work = math.nan if lever.work_done is None else lever.work_done
        rows.append(_outcome(lever.what, lever.change, lever.survival, lever.hours_out_per_year, work, target))
    return "\n".join(rows)


def _outcome(what: str, change: str, survival: float, hours: float, work: float, target: Target) -> str:
    done = "" if math.isnan(work) else f"   work done {share_text(work, target=target.work_done, most=2):>6}"
    alive = share_text(survival, target=target.survival, most=2)
    return f"  {what:10}{change:18}alive {alive:>6}{hours:>10.1f} h out a year{done}"
