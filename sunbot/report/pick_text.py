"""The answer of `pick` on a terminal."""

from __future__ import annotations

from textwrap import fill
from typing import TYPE_CHECKING

from .text import WIDTH, cautions_text

if TYPE_CHECKING:
    from ..studies.pick_result import Pair, PickResult


def pick_text(result: PickResult) -> str:
    """The pair to take, its neighbours, the whole frontier, and the arithmetic beside it."""
    parts = [_headline(result), _neighbours(result), _frontier(result), _controllers(result), _by_autonomy(result)]
    return "\n\n".join(part for part in [*parts, cautions_text(result.cautions)] if part) + "\n"


def _headline(result: PickResult) -> str:
    robot, taken, target = result.robot, result.recommended, result.robot.target
    aim = f"{target.survival:.0%} of years alive"
    if any(load.skip_below_soc is not None for load in robot.loads):
        aim += f", {target.work_done:.0%} of the skippable work done in the worst month"
    worn = f"judged with a battery worn to {robot.battery.worn_capacity:.0%}"
    head = f"{robot.name} at {robot.site.name}, {worn}\n  target: {aim}"
    weather = f"  weather: {result.weather.origin}"
    if taken is None:
        return (
            f"{head}\n{weather}\n\n  NONE of the pairs in range meets the target. Try larger panels (--watts), a wider "
            "range of\n  batteries (--battery-ah), or less work."
        )
    confirmed = (
        "" if taken.confirmed is None else f"; {taken.confirmed:.0%} of as many other years, which it was not sized on"
    )
    return (
        f"{head}\n{weather}\n\n  take {taken.watts:.4g} W of panel and {taken.battery_ah:.4g} Ah (when new), "
        f"{robot.battery.cells_in_series} cells {robot.battery.chemistry}\n"
        f"  alive in {taken.survival:.0%} of the years{confirmed}\n"
        + fill(f"why: {taken.why}", WIDTH, initial_indent="  ", subsequent_indent="  ")
    )


def _neighbours(result: PickResult) -> str:
    if not result.neighbours:
        return ""
    rows = ["One step beside it"]
    for step in result.neighbours:
        work = "" if step.work_done is None else f", work {step.work_done:.0%}"
        rows.append(
            f"  {step.step:16}{step.watts:>7.4g} W{step.battery_ah:>9.4g} Ah   alive {step.survival:>4.0%}{work}"
            f"   {'meets the target' if step.target_met else 'misses it'}"
        )
    return "\n".join(rows)


def _frontier(result: PickResult) -> str:
    weighed = [name for name in ("mass_kg", "price") if any(getattr(pair, name) is not None for pair in result.pairs)]
    titles = {"mass_kg": "mass kg", "price": "price"}
    head = f"  {'panel W':>9}{'battery Ah':>12}{'alive':>8}{'other years':>13}{'work done':>11}"
    head += "".join(f"{titles[name]:>10}" for name in weighed)
    return "\n".join(
        ["The smallest battery for each panel", head, *(_pair_row(pair, weighed) for pair in result.pairs)]
    )


def _pair_row(pair: Pair, weighed: list[str]) -> str:
    if pair.battery_ah is None:
        return f"  {pair.watts:>9.4g}{'none in range':>16}"
    row = f"  {pair.watts:>9.4g}{pair.battery_ah:>12.4g}{_share(pair.survival):>8}{_share(pair.confirmed):>13}"
    row += f"{_share(pair.work_done):>11}"
    return row + "".join(f"{getattr(pair, name):>10.4g}" for name in weighed)


def _controllers(result: PickResult) -> str:
    if not result.controllers:
        return ""
    rows = ["The pair to take behind each kind of controller, all else as filed"]
    for option in result.controllers:
        if option.why_not is not None:
            rows.append(f"  {option.kind:8}cannot be built: {option.why_not}")
        elif option.recommended is None:
            rows.append(f"  {option.kind:8}none in range")
        else:
            taken = option.recommended
            rows.append(
                f"  {option.kind:8}{taken.watts:>7.4g} W{taken.battery_ah:>9.4g} Ah   alive {taken.survival:>4.0%}"
                f", other years {_share(taken.confirmed)}"
            )
    return "\n".join(rows)


def _share(value: float | None) -> str:
    return "-" if value is None else f"{value:.0%}"


def _by_autonomy(result: PickResult) -> str:
    sizing = result.by_autonomy
    watts = "no panel (its worst month gives nothing)" if sizing.watts is None else f"{sizing.watts:.3g} W"
    return (
        f"By the arithmetic of {sizing.days:g} autonomy days, as a cross-check: {watts}, {sizing.battery_ah:.3g} Ah\n"
        + fill(sizing.why_different, WIDTH, initial_indent="  ", subsequent_indent="  ")
    )
