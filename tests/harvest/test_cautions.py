"""Cautions of the harvest side: each appears when it should and not otherwise."""

import numpy as np
import pytest

from sunbot.harvest import supply, supply_cautions

WIRE = {"length_m": 1.0, "area_mm2": 2.5}
SAFE = {"max_charge_a": 10.0, "max_input_v": 50.0}


def _codes(cautions):
    return [caution.code for caution in cautions]


def test_a_complete_file_draws_none(make_robot, make_weather):
    """Data sheet, wire and limits given: nothing to say."""
    assert supply_cautions(make_robot({"wire": WIRE}, **SAFE), make_weather([-10.0, 30.0])) == ()


@pytest.mark.parametrize(
    ("panel", "controller", "code", "words"),
    [
        ({"voc_v": None}, SAFE, "assumed-datasheet", "voc_v 22.5"),
        ({"wire": None}, SAFE, "no-panel-wire", "none of its loss is counted"),
        ({"wire": {"length_m": 10.0, "area_mm2": 0.5}}, SAFE, "panel-wire-drop", "takes 10 %"),
        ({}, {"max_input_v": 50.0}, "no-limits", "max_charge_a not given"),
        ({}, {**SAFE, "max_input_v": 23.0}, "cold-voc", "At -10 °C in full sun its string stands at 24.1 V"),
        ({"voc_v": None}, {**SAFE, "max_input_v": 25.0}, "cold-voc", "assumed on the safe side"),
        ({}, {**SAFE, "headroom_v": 5.0}, "panel-voltage", "a full battery asks for 18.7 V"),
        ({}, {**SAFE, "kind": "direct"}, "no-charge-control", "does not stop charging"),
    ],
)
def test_each_doubt_has_its_caution(make_robot, make_weather, panel, controller, code, words):
    """The caution is there, names what it is about and carries the figure."""
    robot = make_robot({"wire": WIRE, **panel}, **controller)
    found = [caution for caution in supply_cautions(robot, make_weather([-10.0, 30.0])) if caution.code == code]
    assert len(found) == 1
    assert words in found[0].text


def test_dim_light_and_a_hungry_controller_are_named_once_there_is_light(make_robot, make_weather, make_light):
    """A shelf behind a window: most light below 50 W/m², and a controller that draws more than it hands over."""
    robot = make_robot({"wire": WIRE, "watts": 5, "imp_a": 5 / 18, "isc_a": 0.295}, **SAFE, own_use_w=0.2)
    weather = make_weather(np.full(24, 20.0))
    dim, bright = (
        (make_light(np.where(np.arange(24) % 24 > 11, level, 0.0)[:, None] * [[1.0, 0.8]]),) for level in (30.0, 800.0)
    )
    for lights, expected in ((dim, ["dim-light", "controller-hungry"]), (bright, [])):
        made = supply(lights, weather, robot, watts=[5.0], battery_v=[13.0])
        assert _codes(supply_cautions(robot, weather, lights=lights, supply=made)) == expected


@pytest.mark.parametrize("kind", ["pwm", "direct"])
def test_a_string_of_twice_the_battery_wastes_half_without_a_converter(make_robot, make_weather, kind):
    """Two 18 V panels in series at 13.7 V give the current of one: 13.7 V x 2.35 A of 80 W, 60 % are lost."""
    # by hand: 36 cells at 13.7 V give nearly their short-circuit current
    for changes, remedy in (
        ({"in_series": 2}, "wire them in parallel"),
        ({"vmp_v": 36.0, "imp_a": 2.22, "voc_v": 43.6, "watts": 80}, "take a panel of fewer volts"),
    ):
        robot = make_robot({"wire": WIRE, **changes}, **{**SAFE, "kind": kind})
        (found,) = [each for each in supply_cautions(robot, make_weather([20.0])) if each.code == "spare-volts"]
        assert found.where == "panel p0"
        assert "36.0 V" in found.text
        assert "about 60 %" in found.text if kind == "pwm" else "about 59 %" in found.text
        assert remedy in found.text


def test_a_panel_made_for_the_battery_or_behind_a_converter_wastes_no_volts(make_robot, make_weather):
    """Full, the pack stands at 13.7 V: 1.6 times are 21.9 V; a tracker takes any voltage."""
    for vmp_v, fires in ((21.8, False), (22.0, True)):
        panel = {"wire": WIRE, "vmp_v": vmp_v, "imp_a": 40 / vmp_v, "voc_v": 1.21 * vmp_v, "isc_a": 42.4 / vmp_v}
        robot = make_robot(panel, **SAFE, kind="pwm")
        assert ("spare-volts" in _codes(supply_cautions(robot, make_weather([20.0])))) == fires
    series = make_robot({"wire": WIRE, "in_series": 2}, max_charge_a=10.0, max_input_v=100.0)
    assert "spare-volts" not in _codes(supply_cautions(series, make_weather([20.0])))
