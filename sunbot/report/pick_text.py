"""The answer of `pick` on a terminal."""

from __future__ import annotations

from textwrap import fill
from typing import TYPE_CHECKING

from ..shares import EQUAL, exact_share, share_text
from .text import WIDTH, cautions_text
from .words import counted, lifetime, printable

if TYPE_CHECKING:
    from ..inputs.robot import Target
    from ..studies.pick_result import Pair, PickResult, Shortfall


def pick_text(result: PickResult) -> str:
    """The pair to take, its neighbours, the whole frontier, and the arithmetic beside it."""
    parts = [_headline(result), _neighbours(result), _frontier(result), _controllers(result), _by_autonomy(result)]
    return printable("\n\n".join(part for part in [*parts, cautions_text(result.cautions)] if part) + "\n")


def _headline(result: PickResult) -> str:
    robot, taken, target = result.robot, result.recommended, result.robot.target
    noun = lifetime(robot)
    aim = f"alive in {exact_share(target.survival)} of {noun}s"
    if any(load.skip_below_soc is not None for load in robot.loads):
        aim += f", {exact_share(target.work_done)} of the skippable work done in the worst month"
    worn = f"judged with a battery worn to {exact_share(robot.battery.worn_capacity)}"
    head = f"{robot.name} at {robot.site.name}, {worn}\n  target: {aim}"
    weather = f"  weather: {result.weather.origin}"
    if taken is None:
        return (
            f"{head}\n{weather}\n\n  NONE of the pairs in range meets the target: {range_text(result)}.\n"
            "  Try larger panels (--watts), a wider range of batteries (--battery-ah), or less work."
        )
    confirmed = ""
    if taken.confirmed is not None:
        there = share_text(taken.confirmed, target=target.survival)
        confirmed = f"; {there} of as many other {noun}s, which it was not sized on"
    return (
        f"{head}\n{weather}\n\n  take {taken.watts:.4g} W of panel and {taken.battery_ah:.4g} Ah (when new), "
        f"{counted(robot.battery.cells_in_series, 'cell')} {robot.battery.chemistry}\n"
        f"  alive in {share_text(taken.survival, target=target.survival)} of the {noun}s{confirmed}\n"
        + fill(f"why: {taken.why}", WIDTH, initial_indent="  ", subsequent_indent="  ")
    )


def _neighbours(result: PickResult) -> str:
    if not result.neighbours:
        return ""
    target = result.robot.target
    rows = ["One step beside it"]
    for step in result.neighbours:
        work = "" if step.work_done is None else f", work {share_text(step.work_done, target=target.work_done)}"
        rows.append(
            f"  {step.step:16}{step.watts:>7.4g} W{step.battery_ah:>9.4g} Ah   "
            f"alive {share_text(step.survival, target=target.survival):>5}{work}"
            f"   {'meets the target' if step.target_met else 'misses it'}"
        )
    return "\n".join(rows)


def _frontier(result: PickResult) -> str:
    weighed = [name for name in ("mass_kg", "price") if any(getattr(pair, name) is not None for pair in result.pairs)]
    titles = {"mass_kg": "mass kg", "price": "price"}
    others = "other years" if result.robot.deployment is None else "others"
    head = f"  {'panel W':>9}{'battery Ah':>12}{'alive':>8}{others:>12} {'work done':>11}"
    head += "".join(f"{titles[name]:>10}" for name in weighed)
    short, target = {shortfall.watts: shortfall for shortfall in result.shortfalls}, result.robot.target
    low, high = result.battery_range_ah
    rows = [f"The smallest battery for each panel, looked for between {low:.3g} and {high:.4g} Ah", head]
    for pair in result.pairs:
        rows.append(_pair_row(pair, weighed, target) if pair.battery_ah else _none_row(short[pair.watts], result))
    if any(pair.confirmed_met is False for pair in result.pairs):
        others = f"the other {lifetime(result.robot)}s"
        rows.append(f"  * misses the target in {others}, which it was not sized on: take a larger battery there")
    return "\n".join(rows)


def range_text(result: PickResult) -> str:
    """What was tried, in words."""
    low, high = result.battery_range_ah
    batteries = f"batteries from {low:.3g} to {high:.4g} Ah"
    least, most = result.pairs[0].watts, result.pairs[-1].watts
    tried = f"a panel of {least:.4g} W" if least == most else f"panels of {least:.4g} to {most:.4g} W"
    return f"{tried}, {batteries}"


def _pair_row(pair: Pair, weighed: list[str], target: Target) -> str:
    mark = "*" if pair.confirmed_met is False else " "
    row = f"  {pair.watts:>9.4g}{pair.battery_ah:>12.4g}{_share(pair.survival, target.survival):>8}"
    row += f"{_share(pair.confirmed, target.survival):>12}{mark}{_share(pair.work_done, target.work_done):>11}"
    return (row + "".join(f"{getattr(pair, name):>10.4g}" for name in weighed)).rstrip()


def _none_row(short: Shortfall, result: PickResult) -> str:
    """Why a panel has no battery."""
    row = f"  {short.watts:>9.4g}    "
    if short.battery_ah is None:
        return row + "none of any size: the panel gives less than the target asks for"
    target, found = result.robot.target, []
    if short.survival is not None and short.survival < target.survival - EQUAL:
        found.append(f"alive in {share_text(short.survival, target=target.survival)} of {lifetime(result.robot)}s")
    if short.work_done is not None and short.work_done < target.work_done - EQUAL:
        found.append(f"{share_text(short.work_done, target=target.work_done)} of the work done")
    return row + f"none up to {short.battery_ah:.4g} Ah: {', '.join(found)} with that"


def _controllers(result: PickResult) -> str:
    if not result.controllers:
        return ""
    target = result.robot.target
    rows = ["The pair to take behind each kind of controller, all else as filed"]
    for option in result.controllers:
        if option.why_not is not None:
            rows.append(f"  {option.kind:8}cannot be built: {option.why_not}")
        elif option.recommended is None:
            rows.append(f"  {option.kind:8}none of these panels meets the target, whatever battery in range")
        else:
            taken = option.recommended
            rows.append(
                f"  {option.kind:8}{taken.watts:>7.4g} W{taken.battery_ah:>9.4g} Ah   "
                f"alive {_share(taken.survival, target.survival):>5}"
                f", other {lifetime(result.robot)}s {_share(taken.confirmed, target.survival)}"
            )
    return "\n".join(rows)


def _share(value: float | None, target: float) -> str:
    return "-" if value is None else share_text(value, target=target, most=2)


def _by_autonomy(result: PickResult) -> str:
    sizing = result.by_autonomy
    watts = "no panel (its worst month gives nothing)" if sizing.watts is None else f"{sizing.watts:.3g} W"
    return (
        f"By the arithmetic of {sizing.days:g} autonomy days, as a cross-check: {watts}, {sizing.battery_ah:.3g} Ah\n"
        + fill(sizing.why_different, WIDTH, initial_indent="  ", subsequent_indent="  ")
    )
