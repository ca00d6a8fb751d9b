"""The cost of one battery step of one design, against a compiled scalar loop of the same physics."""

import math
import time

import numpy as np
import pytest

from sunbot.calendar import Lanes
from sunbot.demand.carriers import Asked, Demand
from sunbot.harvest.carriers import Supply
from sunbot.inputs.robot import Battery
from sunbot.storage import Designs, balance, pack_of
from sunbot.storage.box import box_temp_c
from sunbot.storage.pack import conditions, filling_per_h

pytestmark = pytest.mark.bench
numba = pytest.importorskip("numba", reason="the compiled loop needs the bench extra")

N_YEARS, HOURS = 20, 8760
DAYS = (31, 28, 31, 30, 31, 30, 31, 31, 30, 31, 30, 31)


def scene(n_designs, *, n_years=N_YEARS):
    """An invented northern place: 20 years of hourly light and cold, loads by day and one skippable load."""
    rng = np.random.default_rng(5)
    n = n_years * HOURS
    hour, day = np.arange(n) % 24, np.arange(n) // 24 % 365
    season = np.cos(2 * np.pi * (day - 172) / 365)
    cloud = np.repeat(rng.beta(1.2, 1.2, n // 24 + 1), 24)[:n]
    sun = np.maximum(0.0, np.sin(np.pi * (hour - 12 + 6) / 12) - 0.35 * (1 - season)) * (0.1 + 0.9 * cloud)
    air = 9 + 9 * season + 4 * np.sin(2 * np.pi * (hour - 9) / 24) + np.repeat(rng.normal(0, 3, n // 24 + 1), 24)[:n]
    watts = np.linspace(10, 60, 12)
    supply = Supply(np.zeros(1), watts, 0.85 * sun[:, None, None] * watts[:, None], None, None, 0.05)
    essential = np.where((np.arange(HOURS) % 24 > 6) & (np.arange(HOURS) % 24 < 19), 1.6, 0.5)[:, None]
    work = np.where((np.arange(HOURS) % 24 > 9) & (np.arange(HOURS) % 24 < 15), 4.0, 0.0)[:, None, None]
    none, no_work = np.zeros_like(essential), np.zeros_like(work)
    demand = Demand(
        np.zeros(1),
        Asked(essential, essential, none, none, none),
        Asked(work, work, no_work, no_work, no_work),
        np.array([0.4]),
        ("drive",),
    )
    # Energy years from the first of July.
    step = (np.arange(HOURS)[:, None] + 181 * 24 + HOURS * np.arange(n_years)) % n
    month = np.repeat(np.arange(1, 13), np.array(DAYS) * 24)[(np.arange(HOURS) + 181 * 24) % HOURS]
    lanes = Lanes(step, np.ones(step.shape), month, (np.arange(n_years) - 1) % n_years, 7)
    designs = Designs(
        rng.integers(0, 12, n_designs),
        rng.uniform(4, 40, n_designs),
        np.ones(n_designs),
        np.ones(n_designs),
        np.ones((12, 1, n_designs)),
        np.zeros(n_designs),
    )
    return supply, demand, lanes, designs, air, np.arange(n) % HOURS


BATTERY = Battery(chemistry="lifepo4", cells_in_series=4, capacity_ah=12.0, boot_wh=0.1, off_draw_w=0.01)


@numba.njit(fastmath=False)
def compiled_year(u, rows, offer, ess, work, ah, own, off_draw, boot, c, tables):
    """One energy year of one design, step by step; returns its end, and what was not served."""
    r, keep, cutoff, restart, max_c, top_v, tail, skip, fade = c
    half_v, slope_v, per_place, full, eff = tables
    on, hours_out, unserved, served_wh = True, 0.0, 0.0, 0.0
    for s in range(rows.size):
        t = rows[s]
        if not on and u >= restart[t] and u - boot > cutoff[t]:
            u -= boot
            on = True
        place = u * per_place
        k = int(place)
        v = 2.0 * (half_v[k] + slope_v[k] * place)
        if on:
            power = offer[t] / ah - (ess[t] + own) / ah
            if work[t] > 0:
                spare = u * keep[t] - skip[t]
                if spare > 0:
                    spare -= r[t] / (v * v) * spare * spare
                served = min(work[t] / ah, max(0.0, power + spare))
                power -= served
            else:
                served = 0.0
        else:
            power = offer[t] / ah - (own + off_draw) / ah
            served = 0.0
        amps = 2.0 * power / (v + math.sqrt(max(v * v + 4.0 * r[t] * power, 0.0)))
        move = amps * v
        if amps > 0:
            most = min(max_c[t], (top_v[t] - v) / r[t], (full - u) * tail[t] / (v * eff))
            if amps > most:
                amps = most
            move = amps * v * eff
        end = u * keep[t] + move
        if on:
            if end < cutoff[t] and power < 0:
                share = min(1.0, max(0.0, (u - cutoff[t]) / (u - end)))
                on = False
                hours_out += 1.0 - share
                unserved += (1.0 - share) * ess[t]
                served *= share
                u = min(u, cutoff[t])
                place = u * per_place
                k = int(place)
                v = 2.0 * (half_v[k] + slope_v[k] * place)
                power = offer[t] / ah - (own + off_draw) / ah
                amps = 2.0 * power / (v + math.sqrt(max(v * v + 4.0 * r[t] * power, 0.0)))
                if amps > 0:
                    most = min(max_c[t], (top_v[t] - v) / r[t], (full - u) * tail[t] / (v * eff))
                    amps = min(amps, most) * eff
                end = u * (1.0 - fade[t] * (1.0 - share)) + amps * v * (1.0 - share)
            served_wh += served * ah
        else:
            hours_out += 1.0
            unserved += ess[t]
        u = max(end, 0.0)
    return u, on, hours_out, unserved, served_wh


@numba.njit
def compiled_round(start, lane_rows, offer, watts_at, ess, work, ah, own, off_draw, boot_wh, c, tables, out):
    """Every design through every energy year once, each year from the given start."""
    for d in range(ah.size):
        for y in range(lane_rows.shape[0]):
            u, on, hours_out, unserved, served = compiled_year(
                start[y, d],
                lane_rows[y],
                offer[watts_at[d]],
                ess,
                work,
                ah[d],
                own,
                off_draw,
                boot_wh / ah[d],
                c,
                tables,
            )
            out[0, y, d], out[1, y, d], out[2, y, d], out[3, y, d], out[4, y, d] = u, on, hours_out, unserved, served


def compiled(scene_of, pack):
    """The compiled loop made ready: a function of start states, filling ``out``."""
    supply, demand, lanes, designs, air, row = scene_of
    box = box_temp_c(air, step_h=1.0, lag_h=pack.box_lag_h, rise_c=pack.box_rise_c)
    of = conditions(pack, box, skip_below_soc=demand.skip_below_soc)
    c = (
        0.25 * of.r4,
        1.0 - of.fade,
        of.cutoff,
        of.restart,
        of.max_c,
        of.top_v,
        filling_per_h(of.tail_h, 1.0),
        of.skip[0],
        of.fade,
    )
    tables = (
        0.5 * pack.rest_v.base,
        0.5 * pack.rest_v.slope,
        pack.places_per_wh_ah,
        pack.curve.full_wh_ah,
        pack.even_efficiency,
    )
    offer = np.ascontiguousarray(supply.offer_w[:, :, 0].T)
    ess, work = demand.essential.total_w[row, 0], demand.work.total_w[row, 0, 0]
    rows = np.ascontiguousarray(lanes.row.T)
    ah = designs.battery_ah * pack.capacity_share
    out = np.zeros((5, rows.shape[0], ah.size))

    def go(start):
        compiled_round(
            start, rows, offer, designs.watts_at, ess, work, ah, 0.05, pack.off_draw_w, pack.boot_wh, c, tables, out
        )
        return out

    return go


def one_round(scene_of, pack, *, keep="verdict"):
    """The package over the same lanes, once: deployments start full and are not gone round."""
    supply, demand, lanes, designs, air, row = scene_of
    once = Lanes(lanes.row, lanes.step_h, lanes.month, -np.ones_like(lanes.before), lanes.first_month)
    return balance(supply, demand, pack, once, designs, air_temp_c=air, row=row, keep=keep)


def best_s(call, times=3):
    """The shortest of some runs [s]."""
    took = []
    for _ in range(times):
        begin = time.perf_counter()
        call()
        took.append(time.perf_counter() - begin)
    return min(took)


@pytest.mark.parametrize("n_lanes", [4000, 20000])
def test_a_lane_step_costs_at_most_one_and_a_half_of_a_compiled_loop(n_lanes, capsys):
    """One battery step of one design, with all its rules, at 4,000 lanes and up; one thread against one thread."""
    scene_of, pack = scene(n_lanes // N_YEARS), pack_of(BATTERY)
    go, n = compiled(scene_of, pack), n_lanes // N_YEARS
    start = np.full((N_YEARS, n), pack.curve.full_wh_ah)
    out = go(start)
    ours = one_round(scene_of, pack)
    assert ours.hours_out.sum(axis=0) == pytest.approx(out[2], rel=1e-9, abs=1e-7)
    assert ours.unserved_wh.sum(axis=0) == pytest.approx(out[3], rel=1e-9, abs=1e-7)
    served = (ours.work_asked_wh - ours.skipped_wh).sum(axis=0)
    assert served == pytest.approx(out[4], rel=1e-9, abs=1e-6)
    theirs_s, ours_s = best_s(lambda: go(start)), best_s(lambda: one_round(scene_of, pack))
    ns = 1e9 / (n_lanes * HOURS)
    with capsys.disabled():
        print(f"\n{n_lanes} lanes: {ours_s * ns:.1f} ns a lane-step, compiled {theirs_s * ns:.1f} ns")
    assert ours_s <= 1.5 * theirs_s


def test_a_year_of_few_lanes_takes_well_under_a_second(capsys):
    """One to fifty lanes with all monthly figures: the calls themselves are the cost."""
    for n_years in (1, 50):
        scene_of = scene(1, n_years=n_years)
        took = best_s(lambda scene_of=scene_of: one_round(scene_of, pack_of(BATTERY), keep="months"), times=2)
        with capsys.disabled():
            print(f"\n{n_years} lanes: {took:.2f} s")
        assert took < 1.2
