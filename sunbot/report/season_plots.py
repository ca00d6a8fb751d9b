"""What a season looks like: dark spells, the worst fortnight, the work each month affords, what moves the answer."""

from __future__ import annotations

from collections.abc import Callable
from typing import TYPE_CHECKING

import numpy as np

from .plots import ASKED, LIGHT, LOST, MUTED, SERVED, headed, plot_charge, plot_months, sheet_title
from .season_text import looked_at, months_out
from .text import MONTH_NAMES
from .words import counted, date_text, drawable, lifetime

if TYPE_CHECKING:
    from matplotlib.axes import Axes
    from matplotlib.figure import Figure

    from ..studies.levers import Lever
    from ..studies.seasons import SeasonResult

_SHADES = (ASKED, LIGHT, SERVED, LOST, MUTED, "#56B4E9", "#CC79A7")
_NIGHT, _SUN, _HIDDEN = "#F2F2F2", "#FBE3A6", "#5A5A5A"
_MARKS = ("o", "s", "^", "D", "v", "P")


def season_figure(result: SeasonResult) -> Figure:
    """The whole answer on one sheet; what does not apply to the robot is left out."""
    from matplotlib.figure import Figure

    plots: list[Callable[[Axes, SeasonResult], Axes]] = [
        lambda ax, of: plot_months(ax, of.check),
        lambda ax, of: plot_charge(ax, of.check),
        plot_spell_frequency,
        plot_fortnight,
        plot_levers,
    ]
    if result.calendar is not None:
        plots.append(plot_calendar)
    if result.headings:
        plots.append(plot_headings)
    count = len(plots) + (result.sun is not None)
    rows = -(-count // 2)
    figure = Figure(figsize=(14.0, 4.5 * rows), layout="constrained")
    grid = figure.add_gridspec(rows, 2)
    # The last one has the row to itself where their number is odd.
    cells = [grid[at // 2, :] if at == count - 1 and at % 2 == 0 else grid[at // 2, at % 2] for at in range(count)]
    for plot, cell in zip(plots, cells, strict=False):
        plot(figure.add_subplot(cell), result)
    if result.sun is not None:
        parts = cells[-1].subgridspec(1, 2, width_ratios=(3.0, 1.0), wspace=0.02)
        plot_sun_field(figure.add_subplot(parts[0]), result)
        plot_sun_lost(figure.add_subplot(parts[1]), result)
    figure.suptitle(sheet_title(result.check), fontsize=12)
    return figure


def plot_spell_frequency(ax: Axes, result: SeasonResult) -> Axes:
    """How little the darkest days in a row bring [Wh a day] against how often a year as dark comes back [years]."""
    from ..studies.dark_spells import FEWEST_YEARS, fitted_low, lowest_sums

    n_years = len(result.daily_harvest_wh)
    if n_years < FEWEST_YEARS:
        days = [spell.days for spell in result.dark_spells]
        ax.plot(days, [spell.wh / spell.days for spell in result.dark_spells], color=ASKED, marker="o")
        ax.set_xlabel("days in a row")
        ax.set_title("The darkest days in a row; too few years to say how often", loc="left", fontsize=10)
    else:
        periods = (n_years + 1) / np.arange(1.0, n_years + 1)
        at = np.geomspace(1.2, n_years + 1, 40)
        for spell, shade, mark in zip(result.dark_spells, _SHADES, _MARKS, strict=False):
            lows, _ = lowest_sums(result.daily_harvest_wh, spell.days, ring=result.robot.deployment is None)
            name = f"{counted(spell.days, 'day')} in a row"
            ax.plot(periods, np.sort(lows) / spell.days, color=shade, marker=mark, markersize=3, linestyle="none")
            ax.plot(at, [fitted_low(lows, years) / spell.days for years in at], color=shade, linewidth=1, label=name)
        ax.set_xscale("log")
        ticks = [years for years in (1, 2, 5, 10, 20, 50, 100, 200, 500) if years <= n_years + 1]
        ax.set_xticks(ticks, [str(years) for years in ticks])
        ax.minorticks_off()
        ax.set_xlabel("a year as dark comes once in [years]")
        headed(ax, "Dark spells: how dark, how long, how often", ncols=3)
    ax.set_ylim(0)
    ax.set_ylabel("harvest, mean of the spell [Wh/day]")
    return ax


def plot_fortnight(ax: Axes, result: SeasonResult) -> Axes:
    """The worst fortnight step by step: power [W], and the charge on an axis of its own."""
    steps = result.worst.steps
    days = np.arange(len(steps)) * result.check.weather.step_h / 24.0
    ax.fill_between(days, steps["harvest_w"], step="mid", color=LIGHT, alpha=0.8, linewidth=0, label="harvest offered")
    ax.step(days, steps["demand_w"], where="mid", color=ASKED, linewidth=0.8, label="asked")
    ax.step(days, steps["served_w"], where="mid", color=SERVED, linewidth=0.8, label="served")
    ax.set_ylabel("power at the battery [W]")
    ax.set_ylim(0)
    charge = ax.twinx()
    charge.plot(days, steps["soc"], color=LOST, linewidth=1.3, label="charge")
    charge.set_ylim(0, 1.02)
    charge.set_ylabel("charge of the worn battery [share]")
    ax.set_xlim(0, days[-1])
    ax.set_xlabel("days since its start")
    lines = [*ax.get_legend_handles_labels()[0], *charge.get_legend_handles_labels()[0]]
    headed(ax, f"The worst fortnight, from {date_text(result.worst.start, result.check.weather)}", handles=lines)
    return ax


def plot_calendar(ax: Axes, result: SeasonResult) -> Axes:
    """Minutes a day of each skippable load that every month affords; a mark where the target binds."""
    calendar = result.calendar
    if calendar is None:
        raise ValueError("a robot without skippable work has no work calendar")
    names = list(dict.fromkeys(entry.load for entry in calendar.entries))
    width = 0.8 / len(names)
    for place, name in enumerate(names):
        entries = [entry for entry in calendar.entries if entry.load == name]
        at = np.array([entry.month - 1 for entry in entries]) - 0.4 + width * (place + 0.5)
        minutes = np.array([entry.minutes_per_day for entry in entries])
        ax.bar(at, minutes, width * 0.95, color=_SHADES[place % len(_SHADES)], label=drawable(name))
        binds = np.array([calendar.bound[entry.month - 1] for entry in entries])
        ax.plot(at[binds], minutes[binds], linestyle="none", marker="v", color="black", markersize=5)
    ax.plot([], [], linestyle="none", marker="v", color="black", label="more would miss the target")
    ax.set_xticks(np.arange(12), MONTH_NAMES)
    ax.set_xlim(-0.6, 11.6)
    _mark_not_out(ax, result)
    ax.set_ylim(0, None if calendar.possible else 1)
    ax.set_ylabel("work asked [minutes a day]")
    none = "" if calendar.possible else ": none, the target is missed without any"
    headed(ax, f"The work each month affords{none}")
    return ax


def _mark_not_out(ax: Axes, result: SeasonResult) -> None:
    """Grey over the months in which the robot is not out: no bar there is not the same as no work."""
    for at in (month for month, out in enumerate(months_out(result)) if not out):
        ax.axvspan(at - 0.5, at + 0.5, color=_NIGHT, linewidth=0, zorder=0)
        ax.text(at, 0.5, "not out", transform=ax.get_xaxis_transform(), rotation=90, ha="center", va="center")


def plot_levers(ax: Axes, result: SeasonResult) -> Axes:
    """What moves the answer: a bar from the worst to the best outcome of each thing changed, the longest on top."""
    value, label = _moved(result)
    base = value(_filed(result))
    whats = list(dict.fromkeys(lever.what for lever in result.levers))
    for row, what in enumerate(reversed(whats)):
        these = [lever for lever in result.levers if lever.what == what]
        reach = [value(lever) for lever in these] + [base]
        ax.barh(row, max(reach) - min(reach), 0.5, left=min(reach), color=ASKED, alpha=0.35)
        for lever in these:
            worse = (value(lever) < base) == (label != _HOURS)
            ax.plot(value(lever), row, marker="|", markersize=14, color=LOST if worse else SERVED)
        for lever in (min(these, key=value), max(these, key=value)):
            if value(lever) != base:
                side = "left" if value(lever) > base else "right"
                shift = 4 if side == "left" else -4
                ax.annotate(
                    lever.change,
                    (value(lever), row),
                    xytext=(shift, 0),
                    textcoords="offset points",
                    ha=side,
                    va="center",
                    fontsize=8,
                )
    ax.axvline(base, color=MUTED, linestyle="--", linewidth=0.8)
    ax.set_yticks(np.arange(len(whats)), list(reversed(whats)))
    ax.use_sticky_edges = False
    ax.margins(x=0.2)
    ax.set_xlabel(label)
    ax.set_title("What moves the answer, one thing at a time (dashed: as filed)", loc="left", fontsize=10)
    return ax


def plot_headings(ax: Axes, result: SeasonResult) -> Axes:
    """Harvest by month under each way to hold the nose, over that of the best fixed heading."""
    best = next(cost for cost in result.headings if cost.policy == "best fixed")
    for cost, shade, mark in zip(result.headings, _SHADES, _MARKS, strict=False):
        with np.errstate(invalid="ignore", divide="ignore"):
            share = cost.harvest_wh_day / best.harvest_wh_day
        nose = "" if cost.heading_deg is None else f" (nose to {cost.heading_deg:g} deg)"
        ax.plot(np.arange(12), share, color=shade, marker=mark, markersize=4, linewidth=1.2, label=cost.policy + nose)
    ax.set_xticks(np.arange(12), MONTH_NAMES)
    ax.set_xlim(-0.6, 11.6)
    ax.set_ylim(0)
    ax.margins(y=0.15)
    ax.set_ylabel("harvest over that of the best fixed heading")
    headed(ax, f"What the heading costs, {looked_at(result)}", ncols=3)
    return ax


def plot_sun_field(ax: Axes, result: SeasonResult) -> Axes:
    """Every hour of every day of a year: sun up and clear, taken by the horizon, or taken by the robot itself."""
    from matplotlib.colors import to_rgb
    from matplotlib.patches import Patch

    sun = result.sun
    if sun is None:
        raise ValueError("behind a window there is no open sky to draw")
    night, clear, hidden, taken = (np.array(to_rgb(shade)) for shade in (_NIGHT, _SUN, _HIDDEN, LOST))
    colours = np.where(sun.up[:, :, None], clear, night)
    share = sun.behind_robot[:, :, None]
    colours = np.where(sun.behind_horizon[:, :, None], hidden, (1.0 - share) * colours + share * taken)
    ax.imshow(colours, aspect="auto", extent=(0.0, 24.0, 365.0, 0.0), interpolation="nearest")
    middles, starts = _month_days(result)
    ax.set_yticks(middles, MONTH_NAMES)
    ax.hlines(starts[1:], 0, 24, color="white", linewidth=0.5)
    ax.set_xticks(range(0, 25, 3))
    ax.set_xlabel("hour of the site's standard clock")
    shades = [Patch(color=_SUN, label="sun"), Patch(color=_HIDDEN, label="behind the horizon")]
    if result.robot.panels[0].obstructions:
        shades.append(Patch(color=LOST, label="behind the robot's own parts"))
    headed(ax, "When the sun reaches the robot", handles=shades)
    return ax


def plot_sun_lost(ax: Axes, result: SeasonResult) -> Axes:
    """Hours of sun lost by month [h/day], beside the days they belong to."""
    if result.sun is None:
        raise ValueError("behind a window there is no open sky to draw")
    middles, _ = _month_days(result)
    horizon = result.sun.hours_a_day(result.sun.behind_horizon)
    robot = result.sun.hours_a_day(result.sun.behind_robot)
    ax.barh(middles, horizon, 24, color=_HIDDEN)
    ax.barh(middles, robot, 24, left=horizon, color=LOST)
    ax.set_ylim(365, 0)
    ax.set_yticks([])
    ax.set_xlim(0, max(float((horizon + robot).max()) * 1.1, 0.5))
    ax.set_xlabel("sun lost [h/day]")
    return ax


_HOURS = "hours out a year"


def _filed(result: SeasonResult) -> Lever:
    """The robot as filed, in the words of a lever."""
    from ..studies.levers import Lever

    verdict = result.check.verdict
    work = float(verdict.work_done[0])
    hours = result.check.outages.hours_per_year
    return Lever("as filed", "", float(verdict.survival[0]), hours, None if np.isnan(work) else work)


def _moved(result: SeasonResult) -> tuple[Callable[[Lever], float], str]:
    """The first of survival, hours out and work done that any change moves, as a function of a lever, and its label."""
    base = _filed(result)
    if any(lever.survival != base.survival for lever in result.levers):
        return (lambda lever: lever.survival), f"share of {lifetime(result.robot)}s alive"
    if any(lever.hours_out_per_year != base.hours_out_per_year for lever in result.levers):
        return (lambda lever: lever.hours_out_per_year), _HOURS
    return (lambda lever: 1.0 if lever.work_done is None else lever.work_done), "work done in the worst month"


def _month_days(result: SeasonResult) -> tuple[list[float], list[int]]:
    """Middle and first day of each month, counted from the start of the year."""
    month = result.sun.month if result.sun is not None else np.arange(0)
    days = [np.flatnonzero(month == number) for number in range(1, 13)]
    return [float(these.mean()) + 0.5 for these in days], [int(these[0]) for these in days]
