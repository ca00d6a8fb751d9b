"""When loads run: shares of a step, the order of serving, hours of the clock."""

from __future__ import annotations

import pandas as pd
import pytest

from sunbot.demand.duty import running_share, serving_order, step_of_h
from sunbot.inputs.robot import Load


def load(name="a", **keys):
    return Load(**{"name": name, "rail": "main", "watts": 1.0, **keys})


def test_the_lowest_threshold_is_served_first_and_among_equals_the_later_in_the_file():
    """Essential loads stand apart; a at 0.4 gives way before c at 0.4, and d at 0.6 before both."""
    loads = [load("a", skip_below_soc=0.4), load("b"), load("c", skip_below_soc=0.4), load("d", skip_below_soc=0.6)]
    assert serving_order([*loads, load("e", skip_below_soc=0.0)]) == ([1], [4, 2, 0, 3])
    assert serving_order([load(), load("b")]) == ([0, 1], [])


def test_on_fraction_scales_the_share_and_days_of_the_week_are_those_of_2001(robot_of, hours_2001):
    """Five mornings a week at 0.6 of the time: 261 working days x 2.5 h x 0.6."""
    robot = robot_of([{"name": "main", "kind": "none"}], [{"name": "a", "rail": "main", "watts": 1.0}])
    work = load(hours=((9.0, 11.5),), on_fraction=0.6, weekdays=("mon", "tue", "wed", "thu", "fri"))
    share = running_share(work, hours_2001, site=robot.site, reference=True)
    # 2001 began and ended on a Monday: 52 weeks and one Monday
    assert share.sum() == pytest.approx(261 * 2.5 * 0.6, abs=1e-9)
    assert share.max() == pytest.approx(0.6)


def test_the_step_is_the_smallest_gap():
    """A left-out 29 February does not lengthen the step."""
    times = pd.DatetimeIndex(["2001-02-28 23:30", "2001-03-02 00:30", "2001-03-02 01:30"], tz="UTC")
    assert step_of_h(times) == 1.0
    assert step_of_h(pd.date_range("2019-01-01", periods=9, freq="5min", tz="UTC")) == pytest.approx(1 / 12)
