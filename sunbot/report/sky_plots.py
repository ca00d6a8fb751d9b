"""What a place offers, drawn: months, days, and the darkest stretches."""

from __future__ import annotations

from typing import TYPE_CHECKING

import numpy as np

from .plots import ASKED, LIGHT, LOST, MUTED, headed
from .text import MONTH_NAMES
from .words import date_text, drawable

if TYPE_CHECKING:
    from matplotlib.axes import Axes
    from matplotlib.figure import Figure

    from ..studies import SurveyResult


def sky_figure(result: SurveyResult) -> Figure:
    """Light by month with its spread over years, every day of the year, and the darkest spells."""
    from matplotlib.figure import Figure

    figure = Figure(figsize=(10.5, 10.5), layout="constrained")
    months, days, spells = figure.subplots(3, 1)
    plot_month_light(months, result)
    plot_days(days, result)
    plot_spells(spells, result)
    figure.suptitle(drawable(f"{result.site.name}\n{result.weather.origin}"), fontsize=11)
    return figure


def plot_month_light(ax: Axes, result: SurveyResult) -> Axes:
    """Mean light on the level by month [kWh/m2 a day], with the darkest and brightest such month."""
    months, at = result.months / 1000.0, np.arange(12)
    mean = months["ghi_wh_m2_day"].to_numpy()
    ax.bar(at, mean, 0.6, color=LIGHT, label="mean")
    if result.weather.n_years > 1:
        reach = np.stack(
            [mean - months["ghi_lowest_wh_m2_day"].to_numpy(), months["ghi_highest_wh_m2_day"].to_numpy() - mean]
        )
        ax.errorbar(
            at,
            mean,
            yerr=np.maximum(reach, 0.0),
            fmt="none",
            ecolor=MUTED,
            capsize=3,
            label="darkest and brightest such month",
        )
    ax.set_xticks(at, MONTH_NAMES)
    ax.set_ylabel("light on the level\n[kWh/m2 a day]")
    headed(ax, "Light by month")
    return ax


def plot_days(ax: Axes, result: SurveyResult) -> Axes:
    """Light on a flat panel on every day of every energy year [kWh/m2]: the spread of days and their median."""
    daily = result.daily_wh_m2 / 1000.0
    at = np.arange(daily.shape[1])
    for row in daily[: min(len(daily), 20)]:
        ax.plot(at, row, linestyle="none", marker=".", markersize=1.5, color=MUTED, alpha=0.5)
    if len(daily) > 1:
        low, middle = np.nanpercentile(daily[:, ~np.isnan(daily).all(axis=0)], (5, 50), axis=0)
        ax.plot(at[: len(middle)], middle, color=LIGHT, linewidth=1.2, label="median day")
        ax.plot(at[: len(low)], low, color=LOST, linewidth=1.2, label="one day in twenty is darker")
    first = np.asarray(result.dates[0]).astype("datetime64[D]")
    months = first.astype("datetime64[M]").astype(int) % 12
    starts = [day for day in range(len(first)) if day == 0 or months[day] != months[day - 1]]
    ax.set_xticks(starts, [MONTH_NAMES[months[day]] for day in starts])
    ax.set_xlim(0, daily.shape[1] - 1)
    ax.set_ylim(0)
    ax.set_ylabel("light on a flat panel\n[kWh/m2 a day]")
    headed(ax, "Every day of up to twenty years")
    return ax


def plot_spells(ax: Axes, result: SurveyResult) -> Axes:
    """Mean light of the darkest stretches by their length [kWh/m2 a day]."""
    days = np.array([spell.days for spell in result.dark_spells])
    mean = np.array([spell.wh / spell.days for spell in result.dark_spells]) / 1000.0
    ax.plot(days, mean, color=ASKED, marker="o")
    for spell, level in zip(result.dark_spells, mean, strict=True):
        began = f"from {date_text(spell.start, result.weather)}"
        ax.annotate(began, (spell.days, level), xytext=(4, -12), textcoords="offset points", fontsize=8)
    ax.set_xlim(0, days.max() * 1.25)
    ax.set_ylim(0)
    ax.set_xlabel("days in a row")
    ax.set_ylabel("mean light\n[kWh/m2 a day]")
    ax.set_title("The darkest stretches", loc="left", fontsize=10)
    return ax
