"""Plots of a pick: each draws on the Axes it is given."""

from __future__ import annotations

from typing import TYPE_CHECKING

import numpy as np

from .plots import ASKED, LIGHT, LOST, MUTED, SERVED

if TYPE_CHECKING:
    from matplotlib.axes import Axes
    from matplotlib.figure import Figure

    from ..studies.pick_result import Pair, PickResult

KIND_STYLES = {"direct": (MUTED, ":"), "pwm": (LIGHT, "--"), "mppt": (ASKED, "-")}
SHARE_STEPS = (0.0, 0.2, 0.4, 0.6, 0.8, 0.9)


def pick_figure(result: PickResult) -> Figure:
    """The smallest battery for each panel, and the share of years survived over both, on one sheet."""
    from matplotlib.figure import Figure

    figure = Figure(figsize=(10.5, 10.5), layout="constrained")
    upper, lower = figure.subplots(2, 1)
    plot_frontier(upper, result)
    plot_survival(lower, result)
    taken = result.recommended
    answer = (
        "no pair in range meets the target"
        if taken is None
        else f"take {taken.watts:.4g} W of panel and {taken.battery_ah:.4g} Ah"
    )
    figure.suptitle(f"{result.robot.name} at {result.robot.site.name}: {answer}\n{result.weather.origin}", fontsize=11)
    return figure


def plot_frontier(ax: Axes, result: PickResult) -> Axes:
    """The smallest battery [Ah] for each panel [W], for each kind of controller compared; the pair to take marked."""
    kinds = [(option.kind, option.pairs) for option in result.controllers if option.pairs]
    for kind, pairs in kinds or [(result.robot.controller.kind, result.pairs)]:
        colour, line = KIND_STYLES[kind]
        watts, ah = _points(pairs)
        ax.plot(watts, ah, line, marker="o", color=colour, label=f"smallest battery, {kind}")
    _mark_taken(ax, result)
    none = [pair.watts for pair in result.pairs if pair.battery_ah is None]
    if none:
        ax.plot(
            none,
            np.full(len(none), 0.03),
            "x",
            color=LOST,
            transform=ax.get_xaxis_transform(),
            label="no battery in range",
        )
    sizing = result.by_autonomy
    if sizing.watts is not None:
        ax.plot(
            [sizing.watts], [sizing.battery_ah], "D", mfc="none", color=MUTED, label=f"by {sizing.days:g} autonomy days"
        )
    ax.set_xlabel("panel [W]")
    ax.set_ylabel("battery when new [Ah]")
    _, tallest = _points(result.pairs)
    if tallest and max(tallest) > 8 * min(tallest):
        ax.set_yscale("log")
        ax.yaxis.set_major_formatter("{x:g}")
        ax.yaxis.set_minor_formatter("{x:g}")
    else:
        ax.set_ylim(bottom=0)
    ax.set_title("The smallest battery that meets the target, for each panel", loc="left", fontsize=10)
    ax.legend(frameon=False)
    return ax


def plot_survival(ax: Axes, result: PickResult) -> Axes:
    """Share of years survived over panel [W] and battery [Ah], and the smallest batteries on top."""
    ax.set_xlabel("panel [W]")
    ax.set_ylabel("battery when new [Ah]")
    ax.set_title("Share of years alive", loc="left", fontsize=10)
    over = result.survival_map
    if over is None:
        ax.text(0.5, 0.5, "no pair in range meets the target", ha="center", transform=ax.transAxes)
        return ax
    from matplotlib.colors import BoundaryNorm

    # The target is an edge of the colours, so that what meets it stands out.
    edges = sorted({*SHARE_STEPS, result.robot.target.survival, 1.001})
    norm = BoundaryNorm([max(0.0, edge - 1e-9) for edge in edges], 256)
    at = np.arange(over.watts.size)
    field = ax.pcolormesh(at, over.battery_ah, over.survival, shading="nearest", cmap="cividis", norm=norm)
    ax.figure.colorbar(field, ax=ax, label="share of years alive", format="%.2g")
    place = {float(watts): k for k, watts in enumerate(over.watts)}
    watts, ah = _points(result.pairs)
    ax.plot([place[w] for w in watts], ah, "-o", color=LOST, markersize=4, label="smallest that meets the target")
    ax.set_xticks(at, [f"{w:.4g}" for w in over.watts])
    ax.set_yscale("log")
    ax.yaxis.set_major_formatter("{x:g}")
    ax.legend(frameon=True, loc="upper right")
    return ax


def _points(pairs: tuple[Pair, ...]) -> tuple[list[float], list[float]]:
    have = [(pair.watts, pair.battery_ah) for pair in pairs if pair.battery_ah is not None]
    return [watts for watts, _ in have], [ah for _, ah in have]


def _mark_taken(ax: Axes, result: PickResult) -> None:
    taken = result.recommended
    if taken is not None:
        ax.plot([taken.watts], [taken.battery_ah], "*", markersize=16, color=SERVED, label="the pair to take")
