"""The lanes against the plain loop, and the laws of the balance."""

import numpy as np
import pytest

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


@pytest.mark.parametrize("seed", range(16))
def test_lanes_side_by_side_equal_the_plain_loop_gone_round_step_by_step(seed, scalar_loop, worlds):
    """Every sum, outage and end state of random designs of every kind equals the scalar loop's to 1e-9."""
    world = worlds.random_world(seed)
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
            assert ours.first_out[y, d] == year.first_out, at
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
