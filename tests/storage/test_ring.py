"""The lanes against the plain loop, and the laws of the balance."""

from dataclasses import replace

import numpy as np
import pytest

from sunbot.inputs.robot import Battery
from sunbot.storage import ring

MONTHLY = {
    "unserved_wh": "unserved",
    "skipped_wh": "skipped",
    "work_asked_wh": "work_asked",
    "hours_out": "hours_out",
    "harvest_wh": "harvest",
    "demand_wh": "demand",
}


def close(ours, theirs, scale):
    return np.abs(np.asarray(ours) - np.asarray(theirs)).max() <= 1e-9 * max(scale, 1.0)


HEATED = [(seed, {"heater_w": 1.0, "box_loss": loss}) for seed in (40, 41, 42) for loss in (0.03, 0.25)]


@pytest.mark.parametrize(("seed", "force"), [*((seed, {}) for seed in range(16)), *HEATED])
def test_lanes_side_by_side_equal_the_plain_loop_gone_round_step_by_step(seed, force, scalar_loop, worlds):
    """Every sum, outage and end state of random designs of every kind equals the scalar loop's to 1e-9."""
    world = worlds.random_world(seed, **force)
    ours = world.run("months")
    for d in range(world.designs.battery_ah.size):
        years, settled = scalar_loop.go_round(worlds.scalar_case(scalar_loop, world, d))
        assert ours.settled[d] == settled
        if not settled:
            continue
        scale = sum(year.fates["panel"] for year in years)
        for y, year in enumerate(years):
            at = f"design {d}, year {y}"
            for name, theirs in MONTHLY.items():
                assert close(getattr(ours, name)[:, y, d], year.monthly[theirs], scale), (at, name)
            assert close(ours.spilled_wh[:, y, d], year.spilled, scale), at
            assert close(ours.lowest_soc[:, y, d], year.lowest, 1), at
            for fate, theirs in year.fates.items():
                assert close(getattr(ours.ledger, fate)[y, d], theirs, scale), (at, fate)
            assert ours.visits[y, d] == year.visits, at
            assert ours.outages[y, d] == year.outages, at
            assert ours.first_out[:, y, d].tolist() == year.first_out, at
            assert close(ours.longest_out_h[y, d], year.longest_h, 1), at
        assert ours.cannot_give[d] == any(year.cannot_give for year in years)


def test_every_watt_hour_of_the_panels_is_accounted_for(worlds):
    """Energy in = out + change of store to 1e-6 of in, in every year of every design, and no entry is negative."""
    for seed in (100, 101, 102):
        ledger = worlds.random_world(seed, n_designs=20).run("months").ledger
        out = sum(getattr(ledger, name) for name in vars(ledger) if name not in ("panel", "stored"))
        assert (np.abs(ledger.panel - out - ledger.stored) <= 1e-6 * ledger.panel).all()
        assert all((getattr(ledger, name) >= -1e-9).all() for name in vars(ledger) if name != "stored")


@pytest.mark.parametrize("keep", ["verdict", "months"])
def test_one_design_alone_equals_the_same_among_many(worlds, keep):
    """A design's outcome does not depend on which others are computed beside it, nor on how lanes lie in memory."""
    world = worlds.random_world(7, n_designs=9)
    many = world.run(keep)
    for d in (0, 4, 8):
        alone = worlds.one_design(world, d).run(keep)
        for name in ("unserved_wh", "skipped_wh", "work_asked_wh", "hours_out"):
            assert getattr(alone, name)[..., 0] == pytest.approx(getattr(many, name)[..., d], rel=1e-12, abs=1e-12)
        assert (alone.visits[:, 0] == many.visits[:, d]).all()


def test_the_verdict_is_the_same_whatever_is_kept(worlds):
    """What decides survival is computed in one way only, with or without the monthly figures."""
    for seed in (3, 8):
        world = worlds.random_world(seed, n_designs=12)
        short, long = world.run("verdict"), world.run("months")
        for name in ("unserved_wh", "skipped_wh", "work_asked_wh", "hours_out", "visits"):
            assert getattr(short, name) == pytest.approx(getattr(long, name), rel=1e-9, abs=1e-9)
        assert (short.cannot_give == long.cannot_give).all()


def test_a_trace_adds_up_to_the_months(worlds):
    """Step by step and month by month are the same harvest, spill, demand and time out."""
    world = worlds.one_design(worlds.random_world(12, ease=0.4), 0)
    result = world.run("trace")
    trace, hours = result.trace, world.lanes.step_h
    pairs = ((trace.harvest_w, result.harvest_wh), (trace.spilled_w, result.spilled_wh))
    for power_w, months in (*pairs, (trace.demand_w, result.demand_wh), (1.0 - trace.on, result.hours_out)):
        assert (power_w * hours).sum(axis=0) == pytest.approx(months.sum(axis=(0, 2)), rel=1e-9, abs=1e-9)
    missed = result.unserved_wh + result.skipped_wh
    assert ((trace.demand_w - trace.served_w) * hours).sum() == pytest.approx(missed.sum(), rel=1e-9, abs=1e-9)
    assert trace.soc.min() == pytest.approx(result.lowest_soc.min(), abs=0.2)
    assert ((trace.soc >= 0) & (trace.soc <= 1 + 1e-9)).all()


def test_halving_the_step_changes_the_unserved_energy_of_a_year_by_under_one_per_cent(worlds):
    """The same light and loads in steps of 1 h and of 30 min."""
    rng = np.random.default_rng(9)
    hour, day = np.arange(8760) % 24, np.arange(8760) // 24
    sun = np.maximum(0, np.sin(np.pi * (hour - 6) / 12)) * (1 - 0.85 * np.cos(2 * np.pi * day / 365))
    offer = 12.0 * sun * np.repeat(rng.uniform(0.05, 1.0, 365), 24)
    load = np.where((hour > 7) & (hour < 18), 3.0, 1.0)
    battery = Battery(chemistry="li-ion", cells_in_series=3, capacity_ah=5.0)
    unserved = []
    for parts in (1, 2):
        series = {"offer_w": np.repeat(offer, parts), "load_w": np.repeat(load, parts)}
        world = worlds.plain_world(battery, temp_c=12.0, step_h=1 / parts, ring=True, **series)
        unserved.append(world.run("verdict").unserved_wh.sum())
    assert unserved[0] > 100
    assert unserved[1] == pytest.approx(unserved[0], rel=0.01)


def test_more_light_and_more_capacity_never_harm_where_nothing_is_skippable(worlds):
    """Unserved energy falls with light and with Ah."""
    for seed in (31, 32, 33):
        calm = {"n_levels": 0, "explicit": False, "boot_wh": 0.0, "chemistry": "lifepo4", "heater_w": 0.0}
        world = worlds.random_world(seed, n_years=2, days=4, n_designs=15, ease=0.4, ring=False, **calm)
        x = world.designs
        even = replace(x, watts_at=0 * x.watts_at, essential_x=0 * x.extra_w + 1, extra_w=0 * x.extra_w)
        for vary in ("light_x", "battery_ah"):
            fixed = replace(even, light_x=np.full(15, 1.0), battery_ah=np.full(15, 6.0))
            steps = replace(fixed, **{vary: np.linspace(0.5, 2.0, 15) * getattr(fixed, vary)})
            lost = replace(world, designs=steps).run("verdict").unserved_wh.sum(axis=(0, 1))
            assert (np.diff(lost) <= 1e-9 * lost.max()).all(), (seed, vary)
            assert lost[0] > lost[-1]


def test_a_robot_that_ends_its_year_dead_is_visited(worlds):
    """No light at all: every year starts anew from start_soc, and every start is a visit."""
    world = worlds.random_world(5, ring=True, n_designs=2)
    dark = replace(world.supply, offer_w=0 * world.supply.offer_w, panel_w=0 * world.supply.panel_w)
    dark = replace(dark, wire_w=0 * world.supply.wire_w)
    result = replace(world, supply=dark).run()
    assert (result.visits == 1).all()
    assert result.settled.all()
    assert (result.outages >= 1).all()


def test_deployments_start_at_their_start_charge_and_are_not_gone_round(worlds):
    """With before = -1 a lane knows nothing of the year before it."""
    world = worlds.random_world(21, ring=False, n_years=3, n_designs=2, start_soc=0.9, ease=0.1)
    result = world.run()
    assert result.settled.all()
    assert (result.visits == 0).all()
    ring = replace(world, lanes=replace(world.lanes, before=np.array([2, 0, 1])))
    assert not np.array_equal(ring.run().lowest_soc, result.lowest_soc)


@pytest.mark.parametrize("lanes_per_block", [10, 32768])
def test_the_first_of_many_designs_is_what_it_is_alone(worlds, monkeypatch, lanes_per_block):
    """Trace, months and ledger of the first design do not depend on the designs beside it, in whatever blocks."""
    world = worlds.random_world(14, n_designs=7)
    alone = replace(world, designs=ring.subset(world.designs, np.array([0]))).run("trace")
    monkeypatch.setattr(ring, "LANES_PER_BLOCK", lanes_per_block)
    beside = world.run("trace").of(0)
    for name in ("soc", "served_w", "demand_w", "harvest_w", "on"):
        assert getattr(beside.trace, name) == pytest.approx(getattr(alone.trace, name), rel=1e-12, abs=1e-12), name
    for name in ("unserved_wh", "demand_wh", "lowest_soc", "outages", "first_out", "visits"):
        assert getattr(beside, name) == pytest.approx(getattr(alone, name), rel=1e-12, abs=1e-12), name
    assert beside.ledger.loads == pytest.approx(alone.ledger.loads, rel=1e-12)
    assert beside.settled.shape == alone.settled.shape == (1,)


def test_a_ring_that_never_settles_says_so_and_keeps_its_books(worlds):
    """A pack that loses a little of its charge every year, never full and never cut, is not periodic."""
    battery = worlds.ideal("li-ion", capacity_ah=10.0)
    load = np.full(720, 1e-3)
    result = worlds.plain_world(battery, offer_w=0.0, load_w=load, ring=True).run()
    assert not result.settled.any()
    assert -result.ledger.stored[0, 0] == pytest.approx(load.sum(), rel=1e-6)
    periodic = worlds.plain_world(
        battery, offer_w=np.tile(np.r_[np.zeros(12), np.ones(12)], 30), load_w=load, ring=True
    )
    assert periodic.run().settled.all()


def test_many_lanes_in_blocks_on_threads_equal_few(worlds, monkeypatch):
    """However the lanes are cut into blocks and windows, the outcome is the same."""
    world = worlds.random_world(14, n_designs=23)
    whole = world.run("months")
    monkeypatch.setattr(ring, "LANES_PER_BLOCK", 10)
    monkeypatch.setattr(ring, "ROWS_PER_WINDOW", 200)
    parts = world.run("months")
    for name in ("unserved_wh", "skipped_wh", "hours_out", "lowest_soc", "outages", "longest_out_h", "first_out"):
        assert getattr(parts, name) == pytest.approx(getattr(whole, name), rel=1e-12, abs=1e-12)
    assert parts.ledger.stored == pytest.approx(whole.ledger.stored, rel=1e-12, abs=1e-12)


def test_what_the_balance_refuses(worlds):
    """Voltages that miss the pack's, and numbers that are none, are a caller's mistakes."""
    world = worlds.random_world(2, supply_volts=True)
    short = replace(world.supply, battery_v=world.supply.battery_v * 0.9)
    with pytest.raises(ValueError, match="battery_v must reach"):
        replace(world, supply=short).run()
    holed = world.supply.offer_w.copy()
    holed[5] = np.nan
    with pytest.raises(ValueError, match="offer_w holds NaN"):
        replace(world, supply=replace(world.supply, offer_w=holed)).run()
