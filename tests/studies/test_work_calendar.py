"""The work calendar: fed back as a robot it meets the target, and nothing more fits in."""

from dataclasses import dataclass

import numpy as np
import pytest

from sunbot.inputs.robot import Robot
from sunbot.studies.chain import Chain
from sunbot.studies.verdict import verdict_on
from sunbot.studies.work_calendar import _fill, calendar_robot, work_calendar

WORK = {"hours": [[9, 15]], "on_fraction": 0.5, "skip_below_soc": 0.4}


def met(chain, robot):
    """Whether a robot meets its target when run by itself."""
    return bool(verdict_on(chain.run(robot, keep="verdict"), robot.target).target_met[0])


def one_work(robots):
    return robots.robot(watts=40.0, load_w=0.3, work_w=12.0)


def two_works_on_one_wire(robots):
    """Loads that share a thin wire with a steady one, one of them waiting on its own draw, one not in all months."""
    return robots.robot(
        watts=80.0,
        rail=[
            {"name": "logic", "kind": "step-down", "volts": 5.0, "wire": {"length_m": 1.0, "area_mm2": 0.5}},
            {"name": "motors", "kind": "none", "wire": {"length_m": 2.0, "area_mm2": 0.5}},
        ],
        load=[
            {"name": "computer", "rail": "logic", "watts": 0.3},
            {"name": "lamp", "rail": "motors", "watts": 0.4, "on_fraction": 0.3},
            {"name": "drive", "rail": "motors", "watts": 20.0, "idle_watts": 0.05, **WORK},
            {"name": "arm", "rail": "logic", "amps": 1.2, "idle_watts": 0.04, **WORK, "months": [1, 2, 3, 11, 12]},
        ],
    )


def by_traction_in_a_deployment(robots):
    traction = {"mass_kg": 20.0, "speed_m_s": 0.5, "rolling_resistance": 0.06, "drivetrain_efficiency": 0.6}
    return robots.robot(
        watts=60.0,
        deployment={"from": "10-01", "to": "01-31"},
        load=[
            {"name": "computer", "rail": "logic", "watts": 0.3},
            {"name": "drive", "rail": "motors", "traction": traction, "idle_watts": 0.1, **WORK},
        ],
    )


def test_months_in_which_the_robot_is_not_out_promise_nothing(robots):
    """A deployment from October to January: no entry for the other months, no work in them."""
    robot = by_traction_in_a_deployment(robots)
    calendar = work_calendar(Chain(robots.quick_weather(robot.site, years=2)), robot)
    assert {entry.month for entry in calendar.entries} == {10, 11, 12, 1}
    assert not calendar.factors[1:9].any()
    assert not calendar.bound[1:9].any()


@pytest.mark.parametrize("make", [one_work, two_works_on_one_wire, by_traction_in_a_deployment])
def test_calendar_fed_back_meets_the_target_and_one_more_step_fails_it(robots, make):
    """The robot with the calendar written into it passes; one step more in the tightest month, and it fails."""
    robot = make(robots)
    chain = Chain(robots.quick_weather(robot.site, years=5))
    calendar = work_calendar(chain, robot)
    assert calendar.possible
    assert calendar.confirmed
    assert calendar.bound.any()
    assert met(chain, calendar_robot(robot, calendar.factors))
    more = calendar.factors.copy()
    more[np.argmin(np.where(calendar.bound, calendar.factors, np.inf))] += calendar.step
    assert not met(chain, calendar_robot(robot, more))
    # The months with work either bind or have used up all hours of the longest load.
    worked = sorted({entry.month for entry in calendar.entries})
    for month in worked:
        longest = max(e.minutes_per_day for e in calendar.entries if e.month == month)
        assert calendar.bound[month - 1] or longest == pytest.approx(360.0)


@pytest.mark.parametrize("make", [one_work, two_works_on_one_wire, by_traction_in_a_deployment])
def test_a_calendar_of_ones_is_the_robot_as_filed(robots, make):
    """Split into one load for each month, unchanged, the robot asks for and loses the same energy."""
    robot = make(robots)
    chain = Chain(robots.quick_weather(robot.site, years=2))
    filed, split = chain.run(robot), chain.run(calendar_robot(robot, np.ones(12)))
    # 1e-4: an amps load on the battery's own rail aside, only the order in which wire losses are shared differs.
    assert split.demand_wh == pytest.approx(filed.demand_wh, rel=1e-4)
    assert split.work_asked_wh.sum() == pytest.approx(filed.work_asked_wh.sum(), rel=1e-4)
    assert split.skipped_wh.sum() == pytest.approx(filed.skipped_wh.sum(), rel=1e-2, abs=1e-3)
    assert split.unserved_wh.sum() == pytest.approx(filed.unserved_wh.sum(), rel=1e-2, abs=1e-3)


def test_a_calendar_robot_is_a_robot_file_like_any_other(robots):
    """Names are unique, shares stay within 0 to 1, and the model accepts it anew."""
    robot = calendar_robot(two_works_on_one_wire(robots), np.full(12, 3.0))
    names = [load.name for load in robot.loads]
    assert len(set(names)) == len(names) == 2 + 12 + 5
    assert {load.on_fraction for load in robot.loads if load.skip_below_soc is not None} == {1.0}
    assert sum(load.idle_watts for load in robot.loads) == pytest.approx(0.09)
    assert Robot.model_validate(robot.model_dump(by_alias=True)).loads == robot.loads


def test_plenty_of_light_uses_up_all_hours(robots):
    """Limit: a panel far too large lets every load work all of its hours, and nothing binds."""
    robot = robots.robot(watts=500.0, battery_ah=200.0, work_w=10.0)
    calendar = work_calendar(Chain(robots.quick_weather(robot.site, years=2)), robot)
    assert {entry.minutes_per_day for entry in calendar.entries} == {360.0}
    assert not calendar.bound.any()


def test_a_robot_that_dies_without_work_has_no_calendar(robots):
    """Limit: where the essential loads alone miss the target, no work is granted and the result says so."""
    robot = robots.robot(watts=2.0, battery_ah=2.0, load_w=5.0, work_w=10.0)
    calendar = work_calendar(Chain(robots.quick_weather(robot.site, years=2)), robot)
    assert not calendar.possible
    assert not calendar.confirmed
    assert {entry.minutes_per_day for entry in calendar.entries} == {0.0}


def test_no_skippable_work_no_calendar(robots):
    """A robot whose loads are all essential has none to plan."""
    robot = robots.robot()
    assert work_calendar(Chain(robots.quick_weather(robot.site, years=1)), robot) is None


def test_a_load_due_all_day_is_raised_in_coarser_steps(robots):
    """24 hours in at most 60 steps, each a multiple of 5 minutes."""
    load = {"name": "pump", "rail": "logic", "watts": 1.0, "on_fraction": 0.1, "skip_below_soc": 0.5}
    robot = robots.robot(load=[{"name": "computer", "rail": "logic", "watts": 0.5}, load])
    calendar = work_calendar(Chain(robots.quick_weather(robot.site, years=1)), robot)
    assert calendar.step_min == 25.0
    assert all(
        e.minutes_per_day % 25.0 == pytest.approx(0.0, abs=1e-6) or e.minutes_per_day == 1440.0
        for e in calendar.entries
    )


@dataclass
class HandMade:
    """A target known by hand: each month holds its own share of work up to a limit, and all of them a sum."""

    limits: np.ndarray
    whole: float
    top: int = 20
    works: np.ndarray = None
    robot: object = None

    def __post_init__(self):
        self.works = np.ones(12, dtype=bool)
        self.robot = type("R", (), {"target": type("T", (), {"work_done": 0.9})()})()

    def verdict(self, steps):
        own = np.where(steps <= self.limits, 1.0, 0.5).T
        met = (own >= 0.9).all(axis=0) & (steps.sum(axis=1) <= self.whole)
        return type("V", (), {"target_met": met, "month_work_done": own})()


def test_months_fill_up_together_until_they_bind():
    """Worked by hand: limits 2, 5, 9 bind their own months, a sum of 100 is shared evenly by the rest."""
    limits = np.array([2, 5, 9] + [99] * 9)
    steps, bound, possible = _fill(HandMade(limits, whole=100))
    assert possible
    assert bound.all()
    # 2 + 5 + 9 = 16; 84 left for nine months: 9 each, and three of them one more.
    assert steps[:3].tolist() == [2, 5, 9]
    assert sorted(steps[3:].tolist()) == [9] * 6 + [10] * 3
    free, bound, _ = _fill(HandMade(limits, whole=1e9))
    assert free.tolist() == [2, 5, 9] + [20] * 9
    assert bound.tolist() == [True] * 3 + [False] * 9
