"""Data sheets completed, and panels that cannot work refused."""

import pytest

from sunbot.errors import InputError
from sunbot.harvest.panels import arrays_of

NOTHING = {"vmp_v": None, "imp_a": None, "voc_v": None, "isc_a": None}


def test_missing_figures_follow_from_the_others(make_robot):
    """Current from watts and volts, open voltage and short current by the typical ratios."""
    (array,) = arrays_of(make_robot({"imp_a": None, "voc_v": None, "isc_a": None}))
    sheet = array.sheet
    assert sheet.imp_a == pytest.approx(40 / 18)
    assert sheet.voc_v == pytest.approx(1.25 * 18)
    assert sheet.isc_a == pytest.approx(1.08 * 40 / 18)
    assert sheet.assumed == ("imp_a", "voc_v", "isc_a")
    (array,) = arrays_of(make_robot({**NOTHING, "imp_a": 2.0}))
    assert array.sheet.vmp_v == pytest.approx(20.0)
    (array,) = arrays_of(make_robot({**NOTHING, "voc_v": 22.5}))
    assert array.sheet.vmp_v == pytest.approx(18.0)


def test_a_panel_of_unknown_voltage_clears_the_battery(make_robot):
    """With a tracker an unknown panel is one of 36 cells for a 12 V pack, of two such in a row for 24 V."""
    assert arrays_of(make_robot(NOTHING))[0].vmp_v == pytest.approx(18.0)
    assert arrays_of(make_robot(NOTHING, battery={"cells_in_series": 8}))[0].vmp_v == pytest.approx(36.0)
    assert arrays_of(make_robot(NOTHING, battery={"cells_in_series": 8}, step_up=True))[0].vmp_v == pytest.approx(18.0)


def test_a_panel_of_unknown_voltage_is_like_its_neighbour(make_robot):
    """On a shared tracker the string is taken to have the voltage of the one that is known."""
    known = {"vmp_v": 36.0, "imp_a": 1.11, "voc_v": 43.6, "isc_a": 1.175}
    arrays = arrays_of(make_robot({**NOTHING, "in_series": 2}, known))
    assert arrays[0].vmp_v == pytest.approx(36.0)
    assert arrays[0].sheet.vmp_v == pytest.approx(18.0)


def test_assumed_open_voltage_is_on_the_safe_side_for_the_controller(make_robot):
    """What a controller must survive is taken at 1.30 times the voltage at maximum power."""
    assert arrays_of(make_robot({"voc_v": None}))[0].voc_v == pytest.approx(1.30 * 18)
    assert arrays_of(make_robot({"in_series": 2}))[0].voc_v == pytest.approx(2 * 21.8)


def test_a_sheet_no_cell_can_have_is_named_with_its_figures(make_robot):
    """All impossible panels are reported at once, each with its figures."""
    square = {"voc_v": 18.2, "isc_a": 2.23}
    with pytest.raises(InputError, match=r'panel 1 \("p0"\): no solar cell has vmp_v 18.*voc_v 18.2') as found:
        arrays_of(make_robot(square, square))
    assert len(found.value.faults) == 2


def test_a_panel_that_cannot_reach_the_battery_is_refused(make_robot):
    """6 V panels do not charge a 12 V pack; a tracker that steps up may take them."""
    small = {"vmp_v": 6.0, "imp_a": 40 / 6, "voc_v": 7.4, "isc_a": 7.1}
    for kind in ("mppt", "pwm", "direct"):
        with pytest.raises(InputError, match=r"7.4 V in full sun cannot reach the 1[34]\.\d V"):
            arrays_of(make_robot(small, kind=kind))
    assert arrays_of(make_robot(small, step_up=True))[0].vmp_v == 6.0
    assert arrays_of(make_robot({**small, "in_series": 3}))[0].vmp_v == 18.0


def test_a_shunt_that_shorts_the_panel_is_refused(make_robot):
    """1 ohm across a 40 W panel leaves no 40 W."""
    with pytest.raises(InputError, match="shunt_ohm: 1 ohm would short"):
        arrays_of(make_robot({"shunt_ohm": 1.0}))
    assert arrays_of(make_robot({"shunt_ohm": 400.0}))[0].cell.leaks
