"""The assembler against one-by-one calls of the reference library, and its laws."""

import numpy as np
import pytest
from pvlib import pvsystem

from sunbot.harvest import follows_battery, harvest_yield, supply
from sunbot.harvest.panels import arrays_of

WIRE = {"length_m": 3.0, "area_mm2": 0.75}
KINDS = [
    {"kind": "mppt"},
    {"kind": "mppt", "trackers": "per-panel", "efficiency_curve": [[0.02, 0.7], [0.2, 0.93], [1, 0.96]], "rated_w": 60},
    {"kind": "mppt", "headroom_v": 3.5, "max_charge_a": 1.8, "start_up_w": 2.0},
    {"kind": "pwm", "max_charge_a": 2.0},
    {"kind": "direct", "start_up_w": 1.0},
]


def _one_by_one(robot, light, air_c, *, scale, volts):
    """Offer, panel and wire power of a single panel at single moments, from the reference library's own solvers."""
    (array,) = arrays_of(robot)
    own, (u0, u1) = robot.controller, array.heat_loss
    temp_c = air_c + light / 0.95 / (u0 + u1)
    photo, dark, series, shunt, slope = array.cell.at(light, temp_c)
    bigger = (photo * scale, dark * scale, series / scale, shunt / scale, slope)
    ohm = array.wire_ohm
    behind = (*bigger[:2], bigger[2] + ohm, *bigger[3:])
    drop_v = {"mppt": own.headroom_v, "pwm": 0.0, "direct": own.diode_drop_v}[own.kind]
    floor_a = np.maximum(pvsystem.i_from_v(volts + drop_v, *behind), 0.0)
    if own.kind == "mppt":
        best = pvsystem.max_power_point(*bigger, method="brentq")
        dragged = best["v_mp"] - best["i_mp"] * ohm < volts + drop_v
        amps = np.where(dragged, floor_a, best["i_mp"])
        panel_w = amps * np.where(dragged, volts + drop_v + floor_a * ohm, best["v_mp"])
        feed_w = panel_w - amps**2 * ohm
        curve = own.efficiency_curve
        rate = own.efficiency if curve is None else np.interp(feed_w / own.rated_w, *zip(*curve, strict=True))
        offer_w = feed_w * rate
    else:
        amps, panel_w = floor_a, floor_a * (volts + drop_v + floor_a * ohm)
        offer_w = floor_a * volts
    wire_w = np.where(panel_w < own.start_up_w, 0.0, amps**2 * ohm)
    offer_w = np.where(panel_w < own.start_up_w, 0.0, offer_w)
    throttle = np.minimum(1.0, (own.max_charge_a or np.inf) * volts / np.maximum(offer_w, 1e-12))
    return offer_w * throttle, panel_w * throttle, wire_w * throttle


@pytest.mark.parametrize("controller", KINDS, ids=["shared", "curve", "held", "pwm", "direct"])
def test_a_panel_agrees_with_the_reference_library_moment_by_moment(make_robot, make_weather, make_light, controller):
    """Offer, panel and wire at sizes and voltages on both sides of every limit: 0.1 % of name-plate."""
    rng = np.random.default_rng(5)
    light, air_c = 10 ** rng.uniform(0.5, 3.1, 300), rng.uniform(-20.0, 40.0, 300)
    robot = make_robot({"wire": WIRE}, **controller)
    watts, volts = np.array([15.0, 40.0, 90.0]), np.array([10.5, 13.0, 14.4])
    made = supply((make_light(light),), make_weather(air_c), robot, watts=watts, battery_v=volts)
    for i, size in enumerate(watts):
        for j, at_v in enumerate(volts):
            right = _one_by_one(robot, light, air_c, scale=size / 40.0, volts=at_v)
            for name, here in zip(("offer_w", "panel_w", "wire_w"), right, strict=True):
                found = getattr(made, name)[:, i, j]
                # A moment right at the start-up threshold may fall on either side of it.
                unsure = np.abs(right[1] - robot.controller.start_up_w) < 0.01
                assert np.abs(found - here)[~unsure].max() < 0.001 * size, (name, size, at_v)


@pytest.mark.parametrize("controller", KINDS, ids=["shared", "curve", "held", "pwm", "direct"])
def test_power_is_never_made(make_robot, make_weather, make_light, controller):
    """Panel, wire, offer and what is left for the controller are at least 0, for two panels under unlike light."""
    rng = np.random.default_rng(11)
    lights = (make_light(10 ** rng.uniform(-1, 3.1, (200, 4))), make_light(10 ** rng.uniform(-1, 3.1, (200, 4))))
    robot = make_robot({"wire": WIRE}, {"watts": 20, "imp_a": 1.11, "isc_a": 1.175}, **controller)
    made = supply(
        lights, make_weather(rng.uniform(-20, 40, 200)), robot, watts=[0.0, 60.0, 900.0], battery_v=[11.0, 13.0, 15.0]
    )
    assert (made.offer_w >= 0).all()
    assert (made.wire_w >= 0).all()
    assert (made.panel_w - made.wire_w - made.offer_w >= -1e-9).all()
    assert (made.offer_w[:, 0] == 0).all()


@pytest.mark.parametrize("controller", KINDS, ids=["shared", "curve", "held", "pwm", "direct"])
def test_more_panel_and_more_light_never_harm(make_robot, make_weather, make_light, controller):
    """Behind one and the same thin wire a larger panel offers at least as much; so does a brighter moment."""
    light = np.linspace(5.0, 1100.0, 150)
    robot = make_robot({"wire": {"length_m": 8.0, "area_mm2": 0.75}}, **controller)
    # Wind strong enough that light does not heat: a hotter panel may truly give less.
    weather = make_weather(np.full(150, 15.0), wind_m_s=1e6)
    made = supply((make_light(light),), weather, robot, watts=np.linspace(5, 400, 40), battery_v=[13.0])
    assert (np.diff(made.offer_w, axis=1) >= -1e-3).all()
    assert (np.diff(made.offer_w, axis=0) >= -1e-3).all()


def test_night_and_snow_offer_nothing(make_robot, make_weather, make_light):
    """No light on the cells, nothing at the battery, exactly."""
    light = np.array([0.0, 500.0, 0.0])
    made = supply((make_light(light),), make_weather(np.zeros(3)), make_robot(), watts=[40.0], battery_v=[13.0])
    assert made.offer_w[[0, 2]].tolist() == [[[0.0]], [[0.0]]]
    assert made.panel_w[1, 0, 0] > 15.0


def test_without_wire_or_limit_power_goes_with_watts(make_robot, make_weather, make_light):
    """Twice the panel, twice the offer, to rounding."""
    light = (make_light(np.linspace(1.0, 1200.0, 50)),)
    made = supply(light, make_weather(np.full(50, 5.0)), make_robot(), watts=[20.0, 40.0], battery_v=[13.0])
    assert made.offer_w[:, 1] == pytest.approx(2.0 * made.offer_w[:, 0], rel=1e-12)


def test_the_mean_over_headings_is_of_the_harvest(make_robot, make_weather, make_light):
    """Half the time below the start-up power gives half the harvest, not that of the mean light."""
    robot = make_robot(start_up_w=4.0)
    both = supply((make_light([[20.0, 800.0]]),), make_weather([10.0]), robot, watts=[40.0], battery_v=[13.0])
    bright = supply((make_light([800.0]),), make_weather([10.0]), robot, watts=[40.0], battery_v=[13.0])
    assert both.offer_w[0, 0, 0] == pytest.approx(0.5 * bright.offer_w[0, 0, 0], rel=1e-9)


def test_headings_weigh_by_the_time_spent_there(make_robot, make_weather, make_light):
    """Weights by step pick and mix the headings; many headings equal one at a time."""
    rng = np.random.default_rng(2)
    cells = rng.uniform(0.0, 1000.0, (60, 5)) * (rng.random((60, 1)) > 0.3)
    weight = rng.random((60, 5)) * (rng.random((60, 5)) > 0.5) + 1e-12
    weight /= weight.sum(axis=1, keepdims=True)
    flat = rng.uniform(0.0, 900.0, 60)
    robot, weather = make_robot({}, {"name": "flat", "tilt_deg": 0}, kind="pwm"), make_weather(np.full(60, 12.0))
    made = supply((make_light(cells, weight), make_light(flat)), weather, robot, watts=[80.0], battery_v=[13.0])
    singly = sum(
        weight[:, [h], None]
        * supply((make_light(cells[:, h]), make_light(flat)), weather, robot, watts=[80.0], battery_v=[13.0]).offer_w
        for h in range(5)
    )
    assert made.offer_w == pytest.approx(singly, rel=1e-9)


def test_many_steps_equal_few(make_robot, make_weather, make_light):
    """Long weather, worked on in stretches and threads, gives to the last digit what its parts give."""
    rng = np.random.default_rng(4)
    light, air_c = rng.uniform(-0.5, 1.0, 70_000).clip(0) * 1000, rng.uniform(-10, 30, 70_000)
    robot = make_robot({"wire": WIRE})
    whole = supply((make_light(light),), make_weather(air_c), robot, watts=[40.0], battery_v=[13.0]).offer_w
    for part in (slice(0, 41_234), slice(41_234, 70_000)):
        alone = supply((make_light(light[part]),), make_weather(air_c[part]), robot, watts=[40.0], battery_v=[13.0])
        assert np.array_equal(whole[part], alone.offer_w)


def test_own_trackers_beat_a_shared_one(make_robot, make_weather, make_light):
    """Panels under unlike light give a little less on one tracker than on one each, never more."""
    rng = np.random.default_rng(8)
    lights, weather = [make_light(10 ** rng.uniform(0.5, 3, 400)) for _ in range(2)], make_weather(np.full(400, 20.0))
    one, each = (
        supply(lights, weather, make_robot({}, {}, trackers=kind), watts=[80.0], battery_v=[12.0]).offer_w
        for kind in ("shared", "per-panel")
    )
    assert (one <= each * (1 + 1e-6) + 1e-4).all()
    assert 0.95 * each.sum() < one.sum() < each.sum()


def test_accounts_may_be_left_out(make_robot, make_weather, make_light):
    """Without accounts the offer is the same, and the rest is absent."""
    light, weather = (make_light([300.0, 700.0]),), make_weather([0.0, 20.0])
    full = supply(light, weather, make_robot(), watts=[40.0], battery_v=[13.0])
    bare = supply(light, weather, make_robot(), watts=[40.0], battery_v=[13.0], accounts=False)
    assert np.array_equal(full.offer_w, bare.offer_w)
    assert bare.panel_w is None
    assert bare.wire_w is None


def test_a_callers_mistakes_are_named(make_robot, make_weather, make_light):
    """Too few lights, light of another length, NaN and negative sizes are refused."""
    weather, good = make_weather([0.0, 20.0]), make_light([1.0, 2.0])
    for lights, watts, words in (
        ((), [40.0], "0 lights for 1"),
        ((make_light([1.0]),), [40.0], "1 steps under weather of 2"),
        ((make_light([1.0, np.nan]),), [40.0], "not finite"),
        ((good,), [-1.0], "at least 0"),
    ):
        with pytest.raises(ValueError, match=words):
            supply(lights, weather, make_robot(), watts=watts, battery_v=[13.0])


def test_the_battery_matters_to_those_that_hang_on_it(make_robot):
    """One voltage will do for a tracker whose hot panels clear the battery, not for any other."""
    assert not follows_battery(make_robot({}))
    assert not follows_battery(make_robot({"vmp_v": 12.0, "imp_a": 40 / 12, "voc_v": 15.0, "isc_a": 3.6}, step_up=True))
    assert follows_battery(make_robot({}, headroom_v=3.0))
    assert follows_battery(make_robot({}, max_charge_a=5.0))
    assert follows_battery(make_robot({}, kind="pwm"))
    assert follows_battery(make_robot({}, kind="direct"))


def test_yield_goes_down_step_by_step(make_robot, make_weather, make_light):
    """Nominal is light times watts; heat, dim light and the battery's voltage take their parts of it."""
    rng = np.random.default_rng(9)
    n = 8760
    cells = rng.uniform(0, 900, (n, 3))
    weather, lights = make_weather(np.full(n, 35.0)), (make_light(cells),)
    for controller in ({"kind": "mppt"}, {"kind": "pwm"}):
        robot = make_robot({}, **controller)
        panel_w = supply(lights, weather, robot, watts=[40.0], battery_v=[13.0]).panel_w.sum()
        found = harvest_yield(lights, weather, robot)
        assert found.nominal == pytest.approx(40.0 * cells.mean(axis=1).sum() / 1000.0, rel=1e-9)
        assert found.nominal > found.heat > found.low_light >= panel_w * (1 - 1e-9)
        if controller["kind"] == "mppt":
            assert panel_w == pytest.approx(found.low_light, rel=1e-4)
        else:
            assert panel_w < 0.95 * found.low_light


def test_yield_of_the_steps_that_count(make_robot, make_weather, make_light):
    """What two halves of a year give adds up to the whole, under several headings and with dark steps among them."""
    rng = np.random.default_rng(10)
    n = 8760
    cells = rng.uniform(-400, 900, (n, 3)).clip(0.0)
    weather, lights = make_weather(rng.uniform(-10, 35, n)), (make_light(cells),)
    out = rng.random(n) < 0.3
    whole, part, rest = (harvest_yield(lights, weather, make_robot({}), within=within) for within in (None, out, ~out))
    for name in ("nominal", "heat", "low_light"):
        assert getattr(part, name) + getattr(rest, name) == pytest.approx(getattr(whole, name), rel=1e-9)
    assert part.nominal == pytest.approx(40.0 * cells[out].mean(axis=1).sum() / 1000.0, rel=1e-9)
