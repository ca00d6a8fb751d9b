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
