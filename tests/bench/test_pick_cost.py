"""What picking costs: against the plain scalar loop, with years and designs, and how often its laws are broken."""

import importlib.util
import sys
import time
from pathlib import Path

import numpy as np
import pytest

from sunbot.studies.chain import Chain
from sunbot.studies.effort import Effort
from sunbot.studies.frontier import Frontier

pytestmark = pytest.mark.bench
TESTS = Path(__file__).parents[1]
SIZES = 12


def load(name, *parts):
    """A helper module of another test folder."""
    spec = importlib.util.spec_from_file_location(name, TESTS.joinpath(*parts))
    module = importlib.util.module_from_spec(spec)
    sys.modules[name] = module
    spec.loader.exec_module(module)
    return module


@pytest.fixture(scope="module")
def robots():
    return load("bench_robots", "studies", "robots.py")


@pytest.fixture(scope="module")
def scalar_loop():
    return load("bench_scalar_loop", "storage", "scalar_loop.py")


def frontier_of(robots, filed, *, years, sizes=SIZES):
    """Light and harvest worked out, nothing judged yet."""
    from sunbot.sky import weather_for

    chain = Chain(weather_for(filed.site, years=years, seed=1))
    return Frontier(chain, filed, np.linspace(15.0, 120.0, sizes), effort=Effort(None, 1.0))


def case_of(scalar_loop, frontier, watts_at, battery_ah):
    """One pair as the scalar loop takes it: plain lists of floats."""
    chain, robot, supply = frontier.chain, frontier.robot, frontier.supply
    lanes, asked = chain.lanes(robot, first_month=int(frontier.first_months[watts_at])), chain.demand(robot)
    parts = ("loads_w", "rails_w", "wire_w", "idle_w")
    offer = supply.offer_w[:, watts_at, :].tolist()
    nothing = [[0.0] * supply.battery_v.size] * len(offer)
    return scalar_loop.Case(
        battery=robot.battery,
        worn=True,
        capacity_ah=battery_ah,
        step_h=chain.weather.step_h,
        air_c=chain.weather.table["temp_air"].tolist(),
        hours=lanes.step_h.T.tolist(),
        row=lanes.row.T.tolist(),
        month=lanes.month.tolist(),
        before=lanes.before.tolist(),
        demand_row=chain.weather.row.tolist(),
        supply_v=supply.battery_v.tolist(),
        offer=offer,
        panel=offer,
        wire=nothing,
        own_use_w=supply.own_use_w,
        demand_v=asked.battery_v.tolist(),
        essential=np.stack([getattr(asked.essential, part) for part in parts], axis=-1).tolist(),
        work=np.stack([getattr(asked.work, part) for part in parts], axis=-1).tolist(),
        skip_soc=asked.skip_below_soc.tolist(),
        work_x=np.ones((12, asked.skip_below_soc.size)).tolist(),
    )


def test_picking_is_fifty_times_faster_than_the_scalar_loop(robots, scalar_loop, capsys):
    """12 wattages, 20 years, the smallest battery of each to 1 %, over the very designs the search tried."""
    frontier = frontier_of(robots, robots.robot(work_w=4.0, survival=0.95), years=20)
    begin = time.perf_counter()
    capacity_ah = frontier.smallest_batteries(None)
    ours_s = time.perf_counter() - begin
    tried = list(frontier._judged)
    rng = np.random.default_rng(1)
    plain_s = []
    for at in rng.choice(len(tried), 6, replace=False):
        watts_at, battery_ah = tried[at]
        case = case_of(scalar_loop, frontier, watts_at, battery_ah)
        begin = time.perf_counter()
        years, _ = scalar_loop.go_round(case)
        plain_s.append(time.perf_counter() - begin)
        alive = np.mean([sum(year.monthly["unserved"]) <= 1e-3 for year in years])
        assert alive == frontier.judge(np.array([watts_at]), np.array([battery_ah]))[0].survival
    ratio = np.mean(plain_s) * len(tried) / ours_s
    with capsys.disabled():
        print(
            f"\npick, 12 wattages x 20 years: {len(tried)} designs in {ours_s:.2f} s, scalar loop "
            f"{np.mean(plain_s):.2f} s a design: {ratio:.0f} x faster; {np.round(capacity_ah, 1).tolist()}"
        )
    assert ratio >= 50


def test_twice_the_years_or_designs_cost_at_most_2_1_times(robots, capsys):
    """From 20 to 40 years, and from 12 to 24 wattages with as many batteries each."""

    def cost_s(years, sizes):
        frontier = frontier_of(robots, robots.robot(work_w=4.0), years=years, sizes=sizes)
        watts_at, battery_ah = np.meshgrid(np.arange(sizes), np.geomspace(8.0, 60.0, 16))
        best = np.inf
        for _ in range(3):
            frontier._judged.clear()
            begin = time.perf_counter()
            frontier.judge(watts_at.ravel(), battery_ah.ravel())
            best = min(best, time.perf_counter() - begin)
        return best

    base, years, designs = cost_s(20, 12), cost_s(40, 12), cost_s(20, 24)
    with capsys.disabled():
        print(f"\ntwice the years {years / base:.2f} x, twice the designs {designs / base:.2f} x the time")
    assert years <= 2.1 * base
    assert designs <= 2.1 * base


@pytest.mark.parametrize("kind", ["skippable work", "quick self-discharge"])
def test_elsewhere_the_laws_are_broken_by_under_three_per_cent_of_robots(robots, kind, capsys):
    """With skippable work or self-discharge from 3 % a month on, a robot can die of a little more: 150 at random."""
    place = robots.quick_weather(robots.hill(), years=5)
    count, broken = 150, []
    for seed in range(count):
        rng = np.random.default_rng(1000 + seed)
        chemistries = ("lead-acid", "nimh") if kind == "quick self-discharge" else ("lifepo4", "li-ion")
        filed = robots.random_robot(rng, skippable=kind == "skippable work", chemistries=chemistries)
        sizes = filed.watts * np.array([0.6, 1.0, 1.5, 2.5, 4.0])
        frontier = Frontier(Chain(place), filed, sizes, effort=Effort(None, 1.0))
        watts_at, battery_ah = np.meshgrid(np.arange(5), np.geomspace(1.0, 120.0, 32))
        judged = frontier.judge(watts_at.ravel(), battery_ah.ravel())
        survival = np.array([pair.survival for pair in judged]).reshape(watts_at.shape)
        met = np.array([pair.met for pair in judged]).reshape(watts_at.shape)
        smallest = np.where(met.any(axis=0), met.argmax(axis=0), len(met))
        if (np.diff(survival, axis=0) < 0).any() or (np.diff(smallest) > 0).any():
            broken.append(seed)
    with capsys.disabled():
        print(f"\nlaws broken, {kind}: {len(broken)} of {count} robots {broken}")
    assert len(broken) < 0.03 * count
