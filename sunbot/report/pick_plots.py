"""Plots of a pick: each draws on the Axes it is given."""

from __future__ import annotations

from typing import TYPE_CHECKING

import numpy as np

from ..shares import exact_share
from .plots import ASKED, LIGHT, LOST, MUTED, SERVED, headed
from .words import drawable, lifetime

if TYPE_CHECKING:
    from matplotlib.axes import Axes
    from matplotlib.figure import Figure

    from ..studies.pick_result import Pair, PickResult

KIND_STYLES = {"direct": (MUTED, ":", "s", 9), "pwm": (LIGHT, "--", "^", 7), "mppt": (ASKED, "-", "o", 6)}
"""Colour, line, mark and its size: kinds that come to the same lie on each other, so the first are the largest."""
SHARE_STEPS = (0.0, 0.2, 0.4, 0.6, 0.8, 0.9)


def pick_figure(result: PickResult) -> Figure:
    """The smallest battery for each panel, and the share of years survived over both, on one sheet."""
    from matplotlib.figure import Figure

    taken = result.recommended
    if result.survival_map is None:
        figure = Figure(figsize=(10.5, 5.5), layout="constrained")
        plot_frontier(figure.subplots(), result)
    else:
        figure = Figure(figsize=(10.5, 10.5), layout="constrained")
        upper, lower = figure.subplots(2, 1)
        plot_frontier(upper, result)
        plot_survival(lower, result)
    answer = (
        "no pair in range meets the target"
        if taken is None
        else f"take {taken.watts:.4g} W of panel and {taken.battery_ah:.4g} Ah"
    )
    title = f"{result.robot.name} at {result.robot.site.name}: {answer}\n{result.weather.origin}"
    figure.suptitle(drawable(title), fontsize=11)
    return figure


def plot_frontier(ax: Axes, result: PickResult) -> Axes:
    """The smallest battery [Ah] for each panel [W], for each kind of controller compared; the pair to take marked."""
    kinds = [(option.kind, option.pairs) for option in result.controllers if option.pairs]
    for kind, pairs in kinds or [(result.robot.controller.kind, result.pairs)]:
        _plot_pairs(ax, result, kind, pairs)
    _mark_taken(ax, result)
    low, high = result.battery_range_ah
    none = [pair.watts for pair in result.pairs if pair.battery_ah is None]
    if none:
        floor = np.full(len(none), 0.03)
        whose = f"{result.robot.controller.kind}: " if result.controllers else ""
        label = f"{whose}no battery from {low:.3g} to {high:.4g} Ah does"
        ax.plot(none, floor, "x", color=LOST, transform=ax.get_xaxis_transform(), label=label)
    sizing = result.by_autonomy
    if sizing.watts is not None:
        ax.plot(
            [sizing.watts], [sizing.battery_ah], "D", mfc="none", color=MUTED, label=f"by {sizing.days:g} autonomy days"
        )
    ax.set_xlabel("panel [W]")
    ax.set_ylabel("battery when new [Ah]")
    drawn = [ah for _, pairs in kinds or [("", result.pairs)] for ah in _points(pairs)[1]]
    if drawn and max(drawn) > 8 * min(drawn):
        _plain_log(ax)
    else:
        ax.set_ylim(bottom=0)
    headed(ax, "The smallest battery that meets the target, for each panel", ncols=3)
    return ax


def plot_survival(ax: Axes, result: PickResult) -> Axes:
    """Share of years survived over panel [W] and battery [Ah], and the smallest batteries on top."""
    from matplotlib.colors import BoundaryNorm

    over, target, noun = result.survival_map, result.robot.target, lifetime(result.robot)
    if over is None:
        raise ValueError("there is no map where no pair meets the target, or none was asked for")
    # The target is an edge of the colours, so that what meets it stands out.
    edges = [*sorted({*SHARE_STEPS, target.survival}), 1.001]
    marked = edges if target.survival < 1.0 else edges[:-1]
    norm = BoundaryNorm([max(0.0, edge - 1e-9) for edge in edges], 256)
    at = np.arange(over.watts.size)
    edges_ah = over.battery_ah[0] * (over.battery_ah[1] / over.battery_ah[0]) ** (
        np.arange(over.battery_ah.size + 1) - 0.5
    )
    field = ax.pcolormesh(np.arange(at.size + 1) - 0.5, edges_ah, over.survival, cmap="cividis", norm=norm)
    bar = ax.figure.colorbar(field, ax=ax, label=f"share of {noun}s alive", ticks=marked)
    bar.ax.set_yticklabels([exact_share(min(edge, 1.0)) for edge in marked])
    place = {float(watts): k for k, watts in enumerate(over.watts)}
    watts, ah = _points(result.pairs)
    asked = any(load.skip_below_soc is not None for load in result.robot.loads)
    whole = "smallest battery that meets the target" + (", work included" if asked else "")
    ax.plot([place[w] for w in watts], ah, "-o", color=LOST, markersize=4, label=whole)
    ax.set_xticks(at, [f"{w:.4g}" for w in over.watts])
    _plain_log(ax)
    ax.set_xlabel("panel [W]")
    ax.set_ylabel("battery when new [Ah]")
    short = "; where it is alive, work may still fall short" if asked else ""
    headed(ax, f"Share of {noun}s alive over panel and battery{short}")
    return ax


def _plot_pairs(ax: Axes, result: PickResult, kind: str, pairs: tuple[Pair, ...]) -> None:
    """One frontier; hollow where other years do not bear a pair out."""
    colour, line, mark, size = KIND_STYLES[kind]
    watts, ah = _points(pairs)
    if not watts:
        return
    ax.plot(watts, ah, line, marker=mark, markersize=size, color=colour, label=f"smallest battery, {kind}")
    doubted = _points(tuple(pair for pair in pairs if pair.confirmed_met is False))
    if doubted[0]:
        label = f"{kind}: misses it in other {lifetime(result.robot)}s"
        ax.plot(*doubted, marker=mark, markersize=size, linestyle="none", color=colour, mfc="white", label=label)


def _plain_log(ax: Axes) -> None:
    """A logarithmic axis with plain numbers."""
    from matplotlib.ticker import LogLocator, NullLocator

    ax.set_yscale("log")
    low, high = ax.get_ylim()
    steps = (1.0, 2.0, 5.0) if high > 10.0 * low else (1.0, 1.5, 2.0, 3.0, 4.0, 5.0, 6.0, 8.0)
    ax.yaxis.set_major_locator(LogLocator(subs=steps))
    ax.yaxis.set_major_formatter("{x:g}")
    ax.yaxis.set_minor_locator(NullLocator())


def _points(pairs: tuple[Pair, ...]) -> tuple[list[float], list[float]]:
    have = [(pair.watts, pair.battery_ah) for pair in pairs if pair.battery_ah is not None]
    return [watts for watts, _ in have], [ah for _, ah in have]


def _mark_taken(ax: Axes, result: PickResult) -> None:
    taken = result.recommended
    if taken is not None:
        ax.plot([taken.watts], [taken.battery_ah], "*", markersize=12, color=SERVED, label="the pair to take")
