"""Laws and limits of the step."""

import numpy as np
import pytest

from sunbot.storage import pack_of

CHEMISTRIES = ("lifepo4", "li-ion", "nimh", "lead-acid")


@pytest.mark.parametrize("chemistry", CHEMISTRIES)
def test_a_lossless_cycle_returns_what_it_took(chemistry, worlds):
    """Ten hours out and the same energy in, without losses, end where they began to 1e-9, with nothing spilled."""
    power_w = np.linspace(2, 11, 10)
    battery = worlds.ideal(
        chemistry, start_soc=0.85, cutoff_soc=0.01, capacity_ah=20.0 if chemistry == "nimh" else 10.0
    )
    world = worlds.plain_world(battery, load_w=np.r_[power_w, np.zeros(10)], offer_w=np.r_[np.zeros(10), power_w[::-1]])
    result = world.run("trace")
    assert 0.1 < result.trace.soc[9, 0] < 0.6
    assert result.trace.soc[-1, 0] == pytest.approx(0.85, abs=1e-6)
    assert result.ledger.stored[0, 0] == pytest.approx(0.0, abs=1e-9)
    assert result.ledger.spilled[0, 0] == pytest.approx(0.0, abs=1e-9)


def test_losses_of_resistance_are_current_squared_times_ohms(worlds):
    """A constant draw loses I²R, with the current that brings the power to the terminals."""
    battery = worlds.ideal("li-ion", resistance_mohm=400.0)
    result = worlds.plain_world(battery, offer_w=0.0, load_w=12.0 * np.ones(1)).run()
    rest_v, ohm = 3 * 4.2, 0.4
    amps = (rest_v - np.sqrt(rest_v**2 - 4 * ohm * 12.0)) / (2 * ohm)
    assert result.ledger.battery_loss[0, 0] == pytest.approx(ohm * amps**2, rel=1e-9)
    assert -result.ledger.stored[0, 0] == pytest.approx(rest_v * amps, rel=1e-9)


def test_an_idle_pack_loses_its_self_discharge_and_nothing_else(worlds):
    """A month at 20 °C without sun or load costs the share of energy that is written."""
    battery = worlds.ideal("nimh", self_discharge_pct_month=20.0)
    result = worlds.plain_world(battery, offer_w=np.zeros(2922), load_w=0.0, temp_c=20.0, step_h=0.25).run()
    full_wh = result.ledger.self_discharge[0, 0] / 0.2
    # Steps of 15 min against the continuous decay.
    assert full_wh == pytest.approx(10.0 * pack_of(battery).curve.full_wh_ah, rel=1e-4)
    assert -result.ledger.stored[0, 0] == pytest.approx(result.ledger.self_discharge[0, 0])
    assert result.hours_out.sum() == 0


def test_a_full_pack_spills_what_the_loads_leave(worlds):
    """At full charge harvest serves the loads and the rest is refused; charge stays at 1."""
    result = worlds.plain_world(worlds.ideal("lifepo4"), offer_w=np.full(48, 9.0), load_w=4.0).run("trace")
    assert result.ledger.spilled[0, 0] == pytest.approx(48 * 5.0)
    assert result.trace.soc == pytest.approx(np.ones((48, 1)))


def test_frost_blocks_the_battery_not_the_loads(worlds):
    """Below the charge window harvest still meets the loads; the surplus is spilled, the charge stays."""
    battery = worlds.ideal("lifepo4", start_soc=0.6)
    result = worlds.plain_world(battery, offer_w=np.full(24, 10.0), load_w=4.0, temp_c=-5.0).run()
    assert result.unserved_wh.sum() == 0
    assert result.ledger.spilled[0, 0] == pytest.approx(24 * 6.0)
    assert result.ledger.stored[0, 0] == pytest.approx(0.0, abs=1e-9)


def test_a_heater_opens_the_charge_window_and_is_paid_for(worlds):
    """With the box held above freezing the surplus less the heater goes in."""
    battery = worlds.ideal("lifepo4", start_soc=0.6, heater_w=1.5)
    result = worlds.plain_world(battery, offer_w=np.full(6, 7.5), load_w=4.0, temp_c=-5.0).run("trace")
    assert result.ledger.heater[0, 0] == pytest.approx(6 * 1.5)
    assert result.ledger.stored[0, 0] == pytest.approx(6 * 2.0, rel=1e-6)
    assert result.trace.box_temp_c == pytest.approx(np.ones((6, 1)))


@pytest.mark.parametrize(
    ("heater_w", "loss_w_per_k", "box_c", "drawn_w", "stored_w"),
    [(3.0, 0.2, 1.0, 1.2, 7.5 - 4.0 - 1.2), (0.5, 0.2, -2.5, 0.5, 0.0), (3.0, 1e-9, 1.0, 0.0, 7.5 - 4.0)],
)
def test_a_thermostat_draws_what_the_box_loses(worlds, heater_w, loss_w_per_k, box_c, drawn_w, stored_w):
    """Heat in = loss x lift: 6 K at 0.2 W/K take 1.2 W of 3; 0.5 W lift by 2.5 K only, and frost blocks the charge."""
    battery = worlds.ideal("lifepo4", start_soc=0.6, heater_w=heater_w, box_loss_w_per_k=loss_w_per_k)
    result = worlds.plain_world(battery, offer_w=np.full(6, 7.5), load_w=4.0, temp_c=-5.0).run("trace")
    assert result.trace.box_temp_c == pytest.approx(np.full((6, 1), box_c))
    assert result.ledger.heater[0, 0] == pytest.approx(6 * drawn_w, abs=1e-6)
    assert result.ledger.stored[0, 0] == pytest.approx(6 * stored_w, rel=1e-6, abs=1e-6)


def test_a_cut_robot_heats_only_in_the_share_of_the_step_before_the_cut(worlds):
    """What the pack held above cut-off went to loads and thermostat in the ratio of their watts."""
    battery = worlds.ideal("li-ion", start_soc=0.3, heater_w=3.0, box_loss_w_per_k=0.1)
    result = worlds.plain_world(battery, offer_w=0.0, load_w=np.full(40, 4.0), temp_c=-9.0).run()
    assert result.outages[0, 0] == 1
    assert result.ledger.heater[0, 0] == pytest.approx((40 - result.hours_out.sum()) * 1.0)
    assert result.ledger.loads[0, 0] == pytest.approx(4.0 * result.ledger.heater[0, 0])


def test_loads_are_cut_within_the_step_and_a_fine_step_agrees(worlds):
    """The hour in which the pack runs out counts in part; steps of 1 h and of 3 min give the same hours out."""
    battery = worlds.ideal("li-ion", capacity_ah=2.0, cutoff_soc=0.1)
    coarse = worlds.plain_world(battery, offer_w=0.0, load_w=np.full(10, 5.0)).run()
    fine = worlds.plain_world(battery, offer_w=0.0, load_w=np.full(200, 5.0), step_h=0.05).run()
    assert coarse.hours_out.sum() == pytest.approx(fine.hours_out.sum(), abs=1e-6)
    assert coarse.unserved_wh.sum() == pytest.approx(5.0 * coarse.hours_out.sum())
    assert coarse.hours_out.sum() % 1.0 > 0.05
    assert coarse.outages[0, 0] == 1
    assert coarse.longest_out_h[0, 0] == pytest.approx(coarse.hours_out.sum())


def test_skippable_work_stops_at_its_threshold_and_essential_loads_go_on(worlds):
    """Work runs for the share of the step that keeps the charge at its threshold."""
    battery = worlds.ideal("li-ion", cutoff_soc=0.1, start_soc=0.8)
    world = worlds.plain_world(battery, offer_w=np.zeros(12), load_w=0.0, work_w=10.0, skip=0.5)
    result = world.run("trace")
    assert result.trace.soc[-1, 0] == pytest.approx(0.5, abs=1e-6)
    curve_wh = 10.0 * 3 * (0.1 * (3.767 + 3.852) / 2 + 0.1 * (3.852 + 3.957) / 2 + 0.1 * (3.957 + 4.048) / 2)
    assert (result.work_asked_wh - result.skipped_wh).sum() == pytest.approx(curve_wh, rel=1e-6)
    assert result.hours_out.sum() == 0


def test_more_charge_before_a_step_never_means_less_after_it(worlds):
    """Over a fine ladder of start charges one step keeps their order: by day and night, with work, cut or not.

    Cut and lit at once a robot gains by dying early; so the lanes with harvest carry no load that could cut them.
    """
    ladder = np.linspace(0.02, 1.0, 50)
    for offer_w, load_w, work_w in (
        (0.0, 6.0, 0.0),
        (0.0, 2.0, 9.0),
        (9.0, 3.0, 12.0),
        (3.0, 3.0, 12.0),
        (30.0, 1.0, 0.0),
    ):
        ends = []
        for soc in ladder:
            battery = worlds.ideal(
                "li-ion", start_soc=soc, resistance_mohm=200.0, capacity_ah=2.0, cutoff_soc=0.1, off_draw_w=0.1
            )
            world = worlds.plain_world(battery, offer_w=np.full(1, offer_w), load_w=load_w, work_w=work_w, temp_c=15.0)
            result = world.run("trace")
            ends.append(result.trace.soc[0, 0])
        assert (np.diff(ends) >= -1e-9).all(), (offer_w, load_w, work_w)


def test_a_robot_comes_back_at_its_restart_charge_and_pays_for_the_boot(worlds):
    """Cut in the dark, charged by day: loads return once restart_soc is reached, each time for boot_wh."""
    battery = worlds.ideal("li-ion", capacity_ah=2.0, cutoff_soc=0.2, restart_soc=0.4, boot_wh=0.5)
    day = np.r_[np.zeros(14), np.full(10, 4.5)]
    result = worlds.plain_world(battery, offer_w=np.tile(day, 6), load_w=2.0).run("trace")
    on = result.trace.on[:, 0]
    back = np.flatnonzero((on[1:] == 1.0) & (on[:-1] < 1.0)) + 1
    assert back.size == result.ledger.boots[0, 0] / 0.5 > 2
    assert (result.trace.soc[back - 1, 0] >= 0.4 - 1e-9).all()
    assert (result.trace.soc[back - 2, 0] < 0.4).all()


def test_a_cut_robot_draws_until_empty_and_no_further(worlds):
    """Self-discharge and the draw while cut stop at an empty pack; what is not drawn breaks no account."""
    battery = worlds.ideal("lifepo4", capacity_ah=1.0, off_draw_w=2.0, cutoff_soc=0.3, restart_soc=0.9)
    result = worlds.plain_world(battery, offer_w=np.zeros(48), load_w=6.0).run("trace")
    ledger = result.ledger
    assert result.trace.soc[-1, 0] == pytest.approx(0.0, abs=1e-12)
    assert ledger.loads[0, 0] + ledger.off_draw[0, 0] == pytest.approx(-ledger.stored[0, 0], rel=1e-9)
    assert ledger.off_draw[0, 0] < 2.0 * 48


def test_a_load_the_pack_cannot_give_drops_and_is_told(worlds):
    """Past the power a resistance lets through the loads are cut, and the balance says so."""
    battery = worlds.ideal("li-ion", resistance_mohm=2000.0)
    result = worlds.plain_world(battery, offer_w=0.0, load_w=np.full(5, 30.0)).run()
    assert result.cannot_give.all()
    assert result.unserved_wh.sum() == pytest.approx(150.0)
    assert not worlds.plain_world(battery, offer_w=0.0, load_w=np.full(5, 5.0)).run().cannot_give.any()
