"""Cells: temperature, fitting a data sheet, wiring panels together."""

import numpy as np
import pytest

from sunbot.harvest.cells import (
    REAR_HEAT_LOSS,
    cell_temp_c,
    current_a,
    fit_one_diode,
    peak,
    scaled_to,
    with_shunt,
)

SHEET = {
    "watts": 40.0,
    "vmp_v": 18.0,
    "imp_a": 2.22,
    "voc_v": 21.8,
    "isc_a": 2.35,
    "voc_pct_per_k": -0.30,
    "isc_pct_per_k": 0.05,
}


def test_night_cells_are_as_warm_as_the_air():
    """Without light a cell has the temperature of the air."""
    assert cell_temp_c(np.zeros(3), np.array([-5.0, 0.0, 7.0]), np.ones(3), u0=25.0, u1=6.84).tolist() == [-5, 0, 7]


def test_a_panel_on_the_deck_runs_hotter_than_in_the_open():
    """Open, deck, insulated: each hotter than the one before, at any wind."""
    wind = np.linspace(0.0, 8.0, 9)
    temps = [cell_temp_c(np.full(9, 800.0), 20.0, wind * w, u0=u0, u1=u1) for u0, u1, w in REAR_HEAT_LOSS.values()]
    assert (temps[0] < temps[1]).all()
    assert (temps[1] < temps[2]).all()


def test_unknown_light_stays_unknown_and_no_heat_loss_is_refused():
    """NaN stays NaN; u0 of 0 is a caller's mistake."""
    assert np.isnan(cell_temp_c(np.array([np.nan]), 20.0, 1.0, u0=25.0, u1=6.84)).all()
    with pytest.raises(ValueError, match="u0"):
        cell_temp_c(np.zeros(1), 20.0, 1.0, u0=0.0, u1=6.84)


def test_the_fitted_cell_returns_its_data_sheet():
    """Name-plate power exactly, open voltage, short current and voltage at the maximum as printed."""
    cell = fit_one_diode(**SHEET)
    power_w, volts = peak(cell, np.array([1000.0]), np.array([25.0]))
    assert power_w[0] == pytest.approx(40.0, rel=1e-9)
    assert volts[0] == pytest.approx(18.0, rel=0.01)  # the fit is explicit, not exact
    assert current_a(cell, np.array([1000.0]), np.array([25.0]), volts=0.0)[0] == pytest.approx(2.35, rel=0.005)
    assert current_a(cell, np.array([1000.0]), np.array([25.0]), volts=21.8)[0] == pytest.approx(0.0, abs=0.02)


def test_name_plate_is_exact_for_many_sheets():
    """Whatever a plausible data sheet says, maximum power is the name-plate; most such sheets have a cell."""
    rng = np.random.default_rng(3)
    fitted = 0
    for _ in range(60):
        vmp_v, watts = rng.uniform(5, 40), rng.uniform(2, 200)
        sheet = dict(SHEET, watts=watts, vmp_v=vmp_v, imp_a=watts / vmp_v, voc_v=vmp_v * rng.uniform(1.15, 1.32))
        sheet["isc_a"] = sheet["imp_a"] * rng.uniform(1.04, 1.12)
        try:
            cell = fit_one_diode(**sheet)
        except ValueError:
            continue
        fitted += 1
        assert peak(cell, np.array([1000.0]), np.array([25.0]))[0][0] == pytest.approx(watts, rel=1e-9)
    assert fitted > 40


def test_no_cell_has_a_square_curve():
    """A data sheet with its maximum at the corner of open voltage and short current is refused."""
    with pytest.raises(ValueError, match="no cell"):
        fit_one_diode(**dict(SHEET, voc_v=18.2, isc_a=2.23))


def test_strings_add_volts_and_amps():
    """Two in series, three beside each other: twice the volts, six times the power, at any light."""
    light, temp = np.array([1000.0, 300.0, 20.0]), np.array([50.0, 20.0, 0.0])
    cell = fit_one_diode(**SHEET)
    power_w, volts = peak(cell, light, temp)
    wired_w, wired_v = peak(cell.wired(2, 3), light, temp)
    assert wired_w == pytest.approx(6 * power_w, rel=1e-7)
    assert wired_v == pytest.approx(2 * volts, rel=1e-4)


def test_a_leaky_cell_keeps_its_name_plate_and_fades_in_dim_light():
    """A given shunt costs nothing at full sun, most of the power at 10 W/m²; one that shorts the panel is refused."""
    cell = fit_one_diode(**SHEET)
    leaky = with_shunt(cell, 400.0)
    light, temp = np.array([1000.0, 10.0]), np.array([25.0, 25.0])
    assert leaky.shunt_ohm == pytest.approx(400.0, rel=1e-6)
    sound_w, leaky_w = peak(cell, light, temp)[0], peak(leaky, light, temp)[0]
    assert leaky_w[0] == pytest.approx(40.0, rel=1e-6)
    # At 10 W/m2 the cells make 23.5 mA, and 400 ohm at 9 V take as much: a triangle below the line V = I R at most.
    assert leaky_w[1] == pytest.approx(0.0235**2 * 400 / 4, rel=0.05)
    assert leaky_w[1] < 0.2 * sound_w[1]
    with pytest.raises(ValueError, match="leaves no"):
        with_shunt(cell, 2.0)


def test_scaling_moves_currents_only():
    """A cell stretched to another power has the same voltages."""
    cell = fit_one_diode(**SHEET)
    light, temp = np.array([700.0, 30.0]), np.array([40.0, 5.0])
    power_w, volts = peak(cell, light, temp)
    bigger_w, same_v = peak(scaled_to(cell, 100.0), light, temp)
    assert bigger_w == pytest.approx(2.5 * power_w, rel=1e-7)
    assert same_v == pytest.approx(volts, rel=1e-4)
