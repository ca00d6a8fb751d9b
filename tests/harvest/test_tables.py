"""The grid of light and temperature against the curve it stands for."""

import numpy as np
import pytest

from sunbot.harvest.cells import current_a, fit_one_diode, peak, with_shunt
from sunbot.harvest.tables import current_table, look_up, peak_table, spots

SHEETS = [
    {"watts": 40.0, "vmp_v": 18.0, "imp_a": 2.22, "voc_v": 21.8, "isc_a": 2.35},
    {"watts": 5.0, "vmp_v": 6.0, "imp_a": 5 / 6, "voc_v": 7.4, "isc_a": 0.9},
    {"watts": 120.0, "vmp_v": 34.0, "imp_a": 120 / 34, "voc_v": 42.0, "isc_a": 3.8},
]


def _cell(sheet):
    return fit_one_diode(**sheet, voc_pct_per_k=-0.30, isc_pct_per_k=0.05)


def _points(seed):
    """Random light, half of it dim, and cell temperature."""
    rng = np.random.default_rng(seed)
    light = np.concatenate([rng.uniform(0.3, 60.0, 4000), rng.uniform(0.0, 1500.0, 4000)])
    return light, rng.uniform(-45.0, 95.0, len(light))


@pytest.mark.parametrize("sheet", SHEETS)
def test_power_between_grid_points_is_right_to_a_thousandth_of_name_plate(sheet):
    """Maximum power: 0.1 % of name-plate everywhere, and 0.5 % of itself down to 1 W/m²; its voltage to 0.3 %."""
    cell, (light, temp) = _cell(sheet), _points(1)
    power_w, volts = peak(cell, light, temp)
    at_full, looked_v = look_up(peak_table(cell), spots(light, temp))
    looked_w = at_full * light / 1000.0
    assert np.abs(looked_w - power_w).max() < 0.001 * sheet["watts"]
    seen = light > 1.0
    assert looked_w[seen] == pytest.approx(power_w[seen], rel=0.005)
    assert looked_v[light > 5] == pytest.approx(volts[light > 5], rel=0.003)


def test_a_leaky_cell_is_tabulated_as_well():
    """The power of a panel with a shunt that stays: 0.1 % of name-plate."""
    cell, (light, temp) = with_shunt(_cell(SHEETS[0]), 400.0), _points(3)
    at_full, _ = look_up(peak_table(cell), spots(light, temp))
    assert np.abs(at_full * light / 1000.0 - peak(cell, light, temp)[0]).max() < 0.001 * 40.0


@pytest.mark.parametrize("sheet", SHEETS)
@pytest.mark.parametrize("share", [0.5, 0.75, 0.9, 1.05])
def test_current_between_grid_points_is_right_to_a_thousandth_of_name_plate(sheet, share):
    """Current at a fixed voltage behind a wire, times that voltage: 0.1 % of name-plate, up to open circuit."""
    cell, (light, temp) = _cell(sheet), _points(2)
    volts, extra_ohm = share * sheet["vmp_v"], 0.03 * sheet["vmp_v"] / sheet["imp_a"]
    right = np.maximum(current_a(cell, light, temp, volts=volts, extra_ohm=extra_ohm), 0.0)
    table = current_table(cell, volts=volts, extra_ohm=extra_ohm)
    looked = np.maximum(look_up(table, spots(light, temp))[0], 0.0)
    assert np.abs(looked - right).max() * volts < 0.001 * sheet["watts"]


def test_no_light_no_power():
    """At 0 W/m² the power is exactly 0."""
    at_full, _ = look_up(peak_table(_cell(SHEETS[0])), spots(np.zeros(2), np.array([-20.0, 30.0])))
    assert (at_full * 0.0 == 0.0).all()


def test_beyond_the_rim_the_last_mesh_goes_on():
    """Light and temperatures past the grid are carried on in a straight line, not cut or wrapped."""
    cell = _cell(SHEETS[0])
    light, temp = np.array([1700.0, 800.0]), np.array([25.0, 115.0])
    at_full, _ = look_up(peak_table(cell), spots(light, temp))
    assert at_full * light / 1000.0 == pytest.approx(peak(cell, light, temp)[0], rel=0.005)
