"""Plots of a check: each draws on the Axes it is given."""

from __future__ import annotations

from collections.abc import Sequence
from typing import TYPE_CHECKING, Any

import numpy as np

from ..shares import exact_share
from .text import MONTH_NAMES, OUT_NAMES
from .words import counted, drawable, lifetime

if TYPE_CHECKING:
    from matplotlib.axes import Axes
    from matplotlib.figure import Figure

    from ..studies.checking import CheckResult
    from ..types import FloatArray

# Colours that stay apart for colour-blind readers and in grey (Okabe & Ito's set, published 2008).
LIGHT, ASKED, SERVED, LOST, MUTED = "#E69F00", "#0072B2", "#009E73", "#D55E00", "#8C8C8C"
FAN_PERCENT = (10, 50, 90)
LEGEND_ROW_PT = 12.5
"""Height of a row of a legend."""


def check_figure(result: CheckResult) -> Figure:
    """Harvest against demand, charge through the year, and where the energy goes, on one sheet."""
    from matplotlib.figure import Figure

    figure = Figure(figsize=(10.5, 11.5), layout="constrained")
    months, charge, flows = figure.subplots(3, 1, height_ratios=(1.0, 1.0, 1.15))
    plot_months(months, result)
    plot_charge(charge, result)
    plot_flows(flows, result)
    figure.suptitle(sheet_title(result), fontsize=11)
    return figure


def sheet_title(result: CheckResult) -> str:
    """Who, where, the answer, and the weather it stands on."""
    robot, verdict = result.robot, result.verdict
    alive = f"alive in {int(verdict.years_survived[0])} of {counted(verdict.years, lifetime(robot))}"
    return drawable(
        f"{robot.name} at {robot.site.name}: {alive}, target {'met' if result.met else 'not met'}\n"
        f"{result.weather.origin}"
    )


def headed(ax: Axes, title: str, *, handles: Sequence[Any] | None = None, ncols: int = 4) -> None:
    """A title, and the legend in a row between it and the axes, where it covers nothing that is drawn."""
    handles = ax.get_legend_handles_labels()[0] if handles is None else handles
    rows = -(-len(handles) // ncols)
    ax.set_title(drawable(title), loc="left", fontsize=10, pad=6.0 + LEGEND_ROW_PT * rows)
    if handles:
        ax.legend(
            handles=handles,
            loc="lower left",
            bbox_to_anchor=(0.0, 1.0),
            ncols=ncols,
            fontsize=8,
            frameon=False,
            borderpad=0.2,
            borderaxespad=0.2,
            handlelength=1.6,
            columnspacing=1.0,
        )


def plot_months(ax: Axes, result: CheckResult) -> Axes:
    """Monthly harvest offered against demand asked [Wh/day]."""
    months, at = result.months, np.arange(12)
    ax.bar(at - 0.2, months["harvest_wh_day"], 0.4, color=LIGHT, label="harvest offered")
    ax.bar(at + 0.2, months["demand_wh_day"], 0.4, color=ASKED, label="demand asked")
    short = months["unserved_wh_day"] > 0
    if short.any():
        ax.plot(
            at[short] + 0.2,
            months["demand_wh_day"][short],
            linestyle="none",
            marker="v",
            color=LOST,
            label="months with an outage",
        )
    ax.set_xticks(at, MONTH_NAMES)
    ax.set_xlim(-0.6, 11.6)
    ax.set_ylabel("energy at the battery [Wh/day]")
    headed(ax, "Harvest and demand, mean day of each month")
    return ax


def plot_charge(ax: Axes, result: CheckResult) -> Axes:
    """Lowest charge of each day through the energy year: the band and median over years, and the worst year."""
    (lowest, ticks), noun = daily_lowest_charge(result), lifetime(result.robot)
    at = np.arange(len(lowest))
    if lowest.shape[1] > 1:
        low, middle, high = np.nanpercentile(lowest, FAN_PERCENT, axis=1)
        ax.fill_between(at, low, high, color=ASKED, alpha=0.25, linewidth=0, label=f"80 % of {noun}s")
        ax.plot(at, middle, color=ASKED, linewidth=1.2, label=f"median {noun}")
        ax.plot(at, np.nanmin(lowest, axis=1), color=LOST, linewidth=0.8, label=f"lowest of all {noun}s")
    else:
        ax.plot(at, lowest[:, 0], color=ASKED, linewidth=1.0, label="lowest of each day")
    cutoff = result.robot.battery.cutoff_soc
    ax.axhline(
        cutoff or 0.0,
        color=MUTED,
        linestyle="--",
        linewidth=0.8,
        label=f"cut-off at {exact_share(cutoff or 0.0)}, warm",
    )
    ax.set_xticks([day for day, _ in ticks], [name for _, name in ticks])
    ax.set_xlim(0, max(len(lowest) - 1, 1))
    ax.set_ylim(0, 1.02)
    ax.set_ylabel("charge of the worn battery [share]")
    headed(ax, "Lowest charge of each day, through the energy year")
    return ax


def plot_flows(ax: Axes, result: CheckResult) -> Axes:
    """Where the panel's energy goes, plain horizontal bars [Wh/day]."""
    energy = result.energy
    per_day = 24.0 * result.lanes.step_h.shape[1] / float(result.lanes.step_h.sum())
    shown = [(OUT_NAMES[key], wh * per_day) for key, wh in energy.out.items() if wh * per_day >= 0.005]
    shown.sort(key=lambda entry: entry[1])
    useful = {OUT_NAMES["loads"]}
    ax.barh(
        [name for name, _ in shown],
        [wh for _, wh in shown],
        color=[SERVED if name in useful else MUTED for name, _ in shown],
    )
    for at, (_, wh) in enumerate(shown):
        ax.text(wh, at, f" {wh:.3g}", va="center", fontsize=8)
    ax.margins(x=0.1)
    ax.set_xlabel("energy [Wh/day]")
    ax.set_title(f"Where the panel's {energy.panel * per_day:.1f} Wh a day go", loc="left", fontsize=10)
    return ax


def daily_lowest_charge(result: CheckResult) -> tuple[FloatArray, list[tuple[float, str]]]:
    """Lowest charge of each day, (n_days, n_years), and where each month begins with its name."""
    if result.trace is None:
        raise ValueError("the charge through the year needs a check with trace=True")
    per_day = max(1, round(24.0 / result.weather.step_h))
    soc = np.where(result.lanes.step_h > 0, result.trace.soc, np.nan)
    n_days = len(soc) // per_day
    days = soc[: n_days * per_day].reshape(n_days, per_day, -1)
    padded = np.isnan(days).all(axis=1)
    lowest = np.where(padded, np.nan, np.where(np.isnan(days), np.inf, days).min(axis=1))
    month = result.lanes.month[: n_days * per_day : per_day]
    starts = [at for at in range(n_days) if at == 0 or month[at] != month[at - 1]]
    return lowest, [(float(at), MONTH_NAMES[int(month[at]) - 1]) for at in starts]


def save_figure(figure: Any, path: Any) -> None:
    """Write a figure in the format its path names, reproducibly (no creation date)."""
    from pathlib import Path

    from ..writing import write_whole

    formats: dict[str, dict[str, Any]] = {
        ".png": {"dpi": 120},
        ".pdf": {"metadata": {"CreationDate": None}},
        ".svg": {"metadata": {"Date": None}},
    }
    suffix = Path(path).suffix.lower()
    write_whole(Path(path), lambda temporary: figure.savefig(temporary, format=suffix[1:], **formats[suffix]))
