"""The answer of `check` as a person reads it on a terminal."""

from __future__ import annotations

import math
from collections.abc import Iterable
from datetime import timedelta
from textwrap import fill
from typing import TYPE_CHECKING

from ..calendar import standard_offset_h
from ..shares import exact_share, share_text
from ..studies.outage_cause import COLD_NOTED
from ..studies.what_ifs import COATED_FACTOR
from ..types import Caution
from .words import counted, date_text, lifetime, printable

if TYPE_CHECKING:
    import pandas as pd

    from ..studies.checking import CheckResult
    from ..studies.outage_cause import OutageCause

MONTH_NAMES = ("Jan", "Feb", "Mar", "Apr", "May", "Jun", "Jul", "Aug", "Sep", "Oct", "Nov", "Dec")
WIDTH = 96

OUT_NAMES = {
    "loads": "work of the loads",
    "idle": "idling (converters and loads that wait)",
    "rails": "rail conversion",
    "rail_wire": "rail wires",
    "controller": "controller, own use included",
    "panel_wire": "panel wires",
    "battery_loss": "battery, in and out",
    "self_discharge": "self-discharge",
    "heater": "battery heater",
    "boots": "restarts",
    "off_draw": "draw while cut off",
    "spilled": "not taken (battery full, frost, limits)",
}


def check_text(result: CheckResult) -> str:
    """All of the answer, most important first."""
    parts = [
        check_head(result),
        _nearness(result),
        months_text(result.months, work_target=result.robot.target.work_done),
        _autonomy(result),
        _outages(result),
        _flows(result),
        cautions_text(result.cautions),
    ]
    return printable("\n\n".join(part for part in parts if part) + "\n")


def check_head(result: CheckResult) -> str:
    """The verdict: met or not, how sure, with what."""
    robot, verdict, target = result.robot, result.verdict, result.robot.target
    battery = robot.battery
    survived, years = int(verdict.years_survived[0]), verdict.years
    lines = [
        f"{robot.name} at {robot.site.name}: {_headline(result)}, judged with the worn "
        f"battery ({battery.worn_capacity * battery.capacity_ah:.3g} of {battery.capacity_ah:.3g} Ah)",
        f"  panel {robot.watts:.4g} W, {robot.controller.kind}, battery {counted(battery.cells_in_series, 'cell')} "
        f"{battery.chemistry}",
        f"  weather: {result.weather.origin}",
        "",
    ]
    noun = lifetime(robot)
    share = f"  alive in {survived} of {years} {noun}s" if years > 1 else f"  {_one(survived)} in the one {noun} tried"
    if result.interval is not None:
        low, high = (share_text(end, target=target.survival, places=1) for end in result.interval)
        share += (
            f" = {share_text(verdict.survival[0], target=target.survival)}, 95 % interval {low} to {high}; "
            f"target {exact_share(target.survival)}"
        )
    lines.append(share + _mark(bool(verdict.survival_met[0])))
    lines += [f"  {change}: {_alive(survival, result)}" for change, survival in _second_opinions(result)]
    if not math.isnan(verdict.work_done[0]):
        lines.append(
            f"  skippable work done in the worst month: {share_text(verdict.work_done[0], target=target.work_done)}; "
            f"target {exact_share(target.work_done)}" + _mark(bool(verdict.work_met[0]))
        )
    if result.visits_per_year > 0:
        lines.append(f"  someone has to go there and restart it {_times(result.visits_per_year)} a year")
    return "\n".join(lines)


def _headline(result: CheckResult) -> str:
    if result.met:
        return "target met"
    if result.verdict.target_met[0]:
        return "NOT SHOWN to meet its target: a year without clouds proves nothing"
    return "TARGET NOT MET"


def _nearness(result: CheckResult) -> str:
    """How much more it would carry, or each single change that would do."""
    if result.extra_load_w is not None:
        if result.extra_load_w == 0:
            return "How close: next to nothing more would fit, not a thirtieth of its mean load."
        return (
            f"How close: {result.extra_load_w:.3g} W more, day and night at the battery, would still meet the target."
        )
    if result.verdict.target_met[0]:
        return ""
    if not result.ways_out:
        return (
            "Ways out: no single change meets the target, neither ten times the panel nor twenty times the battery;\n"
            "  sunbot pick looks for panel and battery together."
        )
    lines = [f"  - {way.change}" for way in result.ways_out]
    return "\n".join(["Ways out, each enough alone, the smallest change first", *lines])


def _times(count: float) -> str:
    """A mean count of events, in words people use."""
    if abs(count - 1.0) < 0.05:
        return "once"
    return f"{count:.2g} times" if count < 10 else f"{count:.0f} times"


def _one(survived: int) -> str:
    return "alive" if survived else "dies"


def _mark(met: bool) -> str:
    return " (met)" if met else " (NOT met)"


def _second_opinions(result: CheckResult) -> list[tuple[str, float]]:
    """What might be worse than filed, and the share alive then."""
    found = [("with all light 10 % lower", result.survival_light_minus_10)]
    if result.survival_worst_parked is not None:
        found.append(("parked the wrong way all the time", result.survival_worst_parked))
    if result.survival_coated is not None:
        found.append((f"should the coated glass pass {COATED_FACTOR:g} times less light", result.survival_coated))
    return found


def _alive(share: float, result: CheckResult) -> str:
    if result.verdict.years == 1:
        return "still alive" if share == 1 else "dies"
    return f"alive in {share_text(share, target=result.robot.target.survival)} of {lifetime(result.robot)}s"


def months_text(months: pd.DataFrame, *, work_target: float | None = None) -> str:
    """The table by month and the months in deficit."""
    head = (
        f"  {'':5}{'light on':>10}{'harvest':>9}{'demand':>9}{'harvest':>9}{'lowest':>8}{'hours':>8}{'work':>7}\n"
        f"  {'':5}{'panel':>10}{'offered':>9}{'asked':>9}{'over':>9}{'charge':>8}{'out':>8}{'done':>7}\n"
        f"  {'':5}{'Wh/m2/day':>10}{'Wh/day':>9}{'Wh/day':>9}{'demand':>9}{'':>8}{'a year':>8}"
    )
    rows = [head]
    for name, (_, row) in zip(MONTH_NAMES, months.iterrows(), strict=True):
        if math.isnan(row["lowest_soc"]):
            rows.append(f"  {name:5}{'not deployed':>19}")
            continue
        rows.append(
            f"  {name:5}{row['plane_wh_m2_day']:>10.0f}{row['harvest_wh_day']:>9.1f}{row['demand_wh_day']:>9.1f}"
            f"{_number(row['harvest_over_demand'], '.2f'):>9}{share_text(row['lowest_soc'], most=0):>8}"
            f"{row['hours_out_per_year']:>8.1f}{share_text(row['work_done'], target=work_target, most=1):>7}"
        )
    dark = [name for name, harvest in zip(MONTH_NAMES, months["harvest_wh_day"], strict=True) if harvest == 0]
    deficit = [
        name
        for name, ratio in zip(MONTH_NAMES, months["harvest_over_demand"], strict=True)
        if ratio < 1  # NaN compares false
    ]
    tails = [f"  The panel gives nothing at all in {_months(dark)}."] if dark else []
    tails += [f"  Harvest falls short of demand in {_months(deficit)}."] if deficit else []
    return "Month by month (means over all years; lowest charge of all years)\n" + "\n".join([*rows, *tails])


def _months(names: list[str]) -> str:
    return "every month" if len(names) == len(MONTH_NAMES) else ", ".join(names)


def _number(value: float, form: str) -> str:
    return "-" if math.isnan(value) else format(value, form)


def _autonomy(result: CheckResult) -> str:
    autonomy = result.autonomy
    month = MONTH_NAMES[autonomy.worst_month - 1]
    week = (
        "carried without end"
        if autonomy.darkest_week_worn_h is None
        else f"{_hours(autonomy.darkest_week_worn_h)} worn, {_hours(autonomy.darkest_week_new_h)} new"
    )
    return (
        f"From full to cut-off under the essential load of {month}\n"
        f"  no light at all: {_hours(autonomy.dark_worn_h)} worn, {_hours(autonomy.dark_new_h)} new\n"
        f"  in the light of the darkest week: {week}"
    )


def _hours(hours: float | None) -> str:
    if hours is None:
        return "without end"
    if hours < 1:
        return f"{60 * hours:.0f} min"
    if hours < 72:
        return f"{hours:.0f} h"
    return f"{hours:.0f} h ({hours / 24:.1f} days)"


def _outages(result: CheckResult) -> str:
    outages = result.outages
    if outages.first is None:
        return "Outages of essential loads: none."
    began = outages.first + timedelta(hours=standard_offset_h(result.weather.place.time_zone))
    first = f"{date_text(began.date(), result.weather)}, {began:%H:%M}"
    back = (
        "it does not always come back by itself"
        if result.visits_per_year > 0
        else f"it is back by itself after {_hours(outages.until_restart_h)} on average"
    )
    return (
        f"Outages of essential loads: {_times(outages.count_per_year)} and {_few(outages.hours_per_year)} h a year, "
        f"the longest {_hours(outages.longest_h)}\n"
        f"  the first begins about {first} standard time; {back}\n"
        f"  {share_text(result.unserved_share, places=2)} of the essential energy is not served"
        f"{_cold(outages.cause, cutoff_soc=result.robot.battery.cutoff_soc or 0.0)}"
    )


def _cold(cause: OutageCause | None, *, cutoff_soc: float) -> str:
    """What the cold had to do with outages, where that is worth a line."""
    if cause is None:
        return ""
    lines = []
    if cause.empty_at_soc - cutoff_soc >= COLD_NOTED:
        lines.append(
            f"  the box is at {cause.box_c:.0f} degC when they begin: so cold, a pack is cut off at "
            f"{share_text(cause.empty_at_soc)} of its charge"
        )
    if cause.frost_share >= COLD_NOTED:
        lines.append(
            f"  {share_text(cause.frost_share)} of the harvest of the five days before came with the box too cold to "
            "be charged"
        )
    return "".join(f"\n{line}" for line in lines)


def _signed(value: float) -> str:
    """With its sign, which a nought does not have."""
    return f"{value:+.1f}" if abs(value) >= 0.05 else "0.0"


def _few(value: float) -> str:
    """Three digits, and never a power of ten."""
    return f"{value:.3g}" if value < 1000 else f"{value:.0f}"


def _flows(result: CheckResult) -> str:
    energy, hours = result.energy, float(result.lanes.step_h.sum() / result.lanes.step_h.shape[1])
    per_day = 24.0 / hours
    lines = [f"Where the panel's {energy.panel * per_day:.1f} Wh a day go"]
    for key, name in sorted(OUT_NAMES.items(), key=lambda item: -energy.out[item[0]]):
        wh = energy.out[key] * per_day
        if wh >= 0.005:
            share = energy.out[key] / energy.panel if energy.panel > 0 else math.nan
            lines.append(f"  {wh:>8.2f} Wh  {share_text(share, places=1, most=1):>6}  {name}")
    if abs(energy.stored * per_day) >= 0.005:
        whence = "more in the battery at the end" if energy.stored > 0 else "out of the battery's first charge"
        lines.append(f"  {energy.stored * per_day:>8.2f} Wh  {'':>6}  {whence}")
    served = energy.out["loads"] + energy.out["idle"] + energy.out["rails"] + energy.out["rail_wire"]
    if served > 0:
        idling = share_text(energy.out["idle"] / served, most=1)
        lines.append(f"  Of what the rails draw, {idling} is idling.")
    steps = ", ".join(f"{step.step} {_signed(-step.wh_per_year * per_day)}" for step in result.light_steps)
    before = f"Before the panel, in Wh a day against level ground in the open: {steps}"
    lines.append(fill(before, WIDTH, initial_indent="  ", subsequent_indent="    ", break_on_hyphens=False))
    return "\n".join(lines)


def cautions_text(cautions: Iterable[Caution]) -> str:
    """The cautions, wrapped, one paragraph each; empty where there are none."""
    lines = [
        fill(
            f"{caution.where}: {caution.text} [{caution.code}]", WIDTH, initial_indent="  - ", subsequent_indent="    "
        )
        for caution in cautions
    ]
    return "\n".join(["Cautions", *lines]) if lines else ""
