"""The sheet of check: labels and the data of lines and bars, not pixels."""

from __future__ import annotations

from dataclasses import replace

import numpy as np
import pytest
from matplotlib.figure import Figure

from sunbot.report.plots import (
    check_figure,
    daily_lowest_charge,
    plot_charge,
    plot_flows,
    plot_months,
    save_figure,
)
from sunbot.report.text import MONTH_NAMES, OUT_NAMES


def axes():
    return Figure().subplots()


def test_bars_hold_harvest_and_demand_by_month(dies):
    """Twenty-four bars with the numbers of the months, and a mark on each month with an outage."""
    ax = plot_months(axes(), dies)
    heights = [bar.get_height() for bar in ax.patches]
    assert heights[:12] == pytest.approx(dies.months["harvest_wh_day"].to_numpy())
    assert heights[12:] == pytest.approx(dies.months["demand_wh_day"].to_numpy())
    assert ax.get_ylabel() == "energy at the battery [Wh/day]"
    assert [label.get_text() for label in ax.get_xticklabels()] == list(MONTH_NAMES)
    (marks,) = ax.lines
    assert len(marks.get_xdata()) == (dies.months["unserved_wh_day"] > 0).sum() > 0


def test_a_robot_without_outages_has_no_marks(lives):
    """Nothing is marked where nothing went out."""
    assert not plot_months(axes(), lives).lines


def test_the_daily_lowest_charge_is_the_lowest_step_of_each_day(dies):
    """365 days by 3 years, each the minimum of its eight steps; the months begin in the order of the energy year."""
    lowest, ticks = daily_lowest_charge(dies)
    assert lowest.shape == (365, 3)
    assert lowest == pytest.approx(dies.trace.soc.reshape(365, 8, 3).min(axis=1))
    first = dies.lanes.first_month
    assert [name for _, name in ticks] == [MONTH_NAMES[(first - 1 + at) % 12] for at in range(12)]


def test_the_charge_plot_holds_median_and_lowest_of_all_years(dies):
    """The lines are the median and the minimum over years; the cut-off is marked."""
    ax = plot_charge(axes(), dies)
    lowest, _ = daily_lowest_charge(dies)
    lines = {line.get_label(): line for line in ax.lines}
    assert lines["median year"].get_ydata() == pytest.approx(np.median(lowest, axis=1))
    assert lines["lowest of all years"].get_ydata() == pytest.approx(lowest.min(axis=1))
    assert any("cut-off" in label for label in lines)
    assert "[share]" in ax.get_ylabel()


def test_the_flow_bars_add_up_to_the_panel(dies):
    """Watt-hours a day by fate, named in words; with the change of the battery they are the panel's energy."""
    ax = plot_flows(axes(), dies)
    shown = sum(bar.get_width() for bar in ax.patches)
    per_day = 1.0 / 365.0
    # fates below 0.005 Wh a day are left out
    assert shown + dies.energy.stored * per_day == pytest.approx(dies.energy.panel * per_day, abs=0.06)
    assert {label.get_text() for label in ax.get_yticklabels()} <= set(OUT_NAMES.values())
    assert ax.get_xlabel() == "energy [Wh/day]"


def test_the_sheet_says_the_verdict_and_draws_three_axes(lives, dies):
    """Its title is the answer."""
    assert len(check_figure(lives).axes) == 3
    assert "alive in 3 of 3 years, target met" in check_figure(lives).get_suptitle()
    assert "target not met" in check_figure(dies).get_suptitle()


def test_no_legend_covers_what_is_drawn(lives, dies):
    """Each legend of the sheet lies above its axes and below its title."""
    for result in (lives, dies):
        figure = check_figure(result)
        figure.draw_without_rendering()
        legends = [(ax, ax.get_legend()) for ax in figure.axes if ax.get_legend() is not None]
        assert len(legends) == 2
        for ax, legend in legends:
            box = legend.get_window_extent()
            assert box.y0 >= ax.get_window_extent().y1 - 0.5
            assert box.y1 <= ax._left_title.get_window_extent().y0 + 0.5
            assert box.x1 <= ax.get_window_extent().x1


@pytest.mark.parametrize("name", ["Post $\\frac{$", "果園 \x1b[31m"])
def test_a_sheet_is_drawn_whatever_the_name(lives, tmp_path, name):
    """No formula is read into a name and no letter is asked of a font that lacks it; warnings are errors here."""
    robot = lives.robot.model_copy(update={"name": name})
    save_figure(check_figure(replace(lives, robot=robot)), tmp_path / "sheet.png")
    assert (tmp_path / "sheet.png").stat().st_size > 10_000


def test_deployments_are_drawn_as_such(lives, robots):
    """Titles and lines speak of deployments."""
    found = replace(lives, robot=robots.robot(deployment={"from": "10-20", "to": "11-30"}))
    assert "alive in 3 of 3 deployments" in check_figure(found).get_suptitle()
    labels = [line.get_label() for line in plot_charge(axes(), found).lines]
    assert {"median deployment", "lowest of all deployments"} <= set(labels)


def test_the_charge_needs_the_steps(dies):
    """Asked of an answer without them, it says what to ask for."""
    with pytest.raises(ValueError, match="trace=True"):
        daily_lowest_charge(replace(dies, trace=None))


@pytest.mark.parametrize(("suffix", "head"), [(".png", b"\x89PNG"), (".svg", b"<?xml"), (".pdf", b"%PDF")])
def test_a_figure_is_saved_in_the_format_of_its_name(lives, tmp_path, suffix, head):
    """Whole, and twice the same bytes where the format has no random names in it."""
    paths = [tmp_path / f"{name}{suffix}" for name in "ab"]
    for path in paths:
        figure = Figure()
        plot_flows(figure.subplots(), lives)
        save_figure(figure, path)
        assert path.read_bytes().startswith(head)
    if suffix != ".svg":
        assert paths[0].read_bytes() == paths[1].read_bytes()
    assert sorted(tmp_path.iterdir()) == sorted(paths)
