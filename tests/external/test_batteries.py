"""Batteries held against published curves, facts of the trade, and the laws of a store."""

from __future__ import annotations

import numpy as np
import pytest

from sunbot.inputs.robot import Battery
from sunbot.storage import autonomy_h, pack_of


def test_five_nimh_cells_are_six_volts_and_seven_when_fresh():
    """Five cells are 6 V nominal and at least 7 V freshly charged."""
    # Common practice.
    pack = pack_of(Battery(chemistry="nimh", cells_in_series=5, capacity_ah=2.1), age="new")
    middle_v = float(np.interp(0.5, pack.curve.soc, pack.curve.rest_v))
    assert middle_v == pytest.approx(6.0, abs=0.3)
    assert pack.curve.rest_v[-1] >= 7.0


def test_a_small_pack_carries_one_ampere_for_two_hours():
    """A 2.1 Ah pack carries 1 A for about 2 h."""
    # Common practice. 1 A at the pack's mean voltage under load; drained to the end.
    battery = Battery(chemistry="nimh", cells_in_series=5, capacity_ah=2.1, cutoff_soc=0.0)
    hours = autonomy_h(pack_of(battery, age="new"), battery_ah=2.1, draw_w=6.1)
    assert hours == pytest.approx(2.0, abs=0.2)


@pytest.mark.parametrize(
    ("chemistry", "soc", "cell_v"),
    [
        # Published: Safari & Delacourt, J. Electrochem. Soc. 158 (2011) A562 (LFP on graphite).
        ("lifepo4", 0.5, 3.309),
        ("lifepo4", 0.9, 3.345),
        # Published: Chen et al., J. Electrochem. Soc. 167 (2020) 080534 (NMC811 on graphite, 3.0 to 4.2 V).
        ("li-ion", 0.5, 3.767),
        ("li-ion", 1.0, 4.200),
        # From memory: 12.25 V of six cells half charged.
        ("lead-acid", 0.5, 12.25 / 6),
    ],
)
def test_rest_voltage_follows_its_source(chemistry, soc, cell_v):
    """The look-up in stored energy gives the voltage of the curve back, to a millivolt a cell."""
    pack = pack_of(Battery(chemistry=chemistry, cells_in_series=4, capacity_ah=10))
    place = pack.curve.energy_at(soc) * pack.places_per_wh_ah
    assert float(pack.rest_v.at(np.asarray(place))) / 4 == pytest.approx(cell_v, abs=0.001)
    assert float(pack.soc.at(np.asarray(place))) == pytest.approx(soc, abs=0.001)


def test_stored_energy_is_the_integral_of_voltage_over_charge():
    """Energy from empty to full agrees with a fine sum over the curve, and its inverse returns the charge."""
    curve = pack_of(Battery(chemistry="li-ion", cells_in_series=3, capacity_ah=10)).curve
    soc = np.linspace(0.0, 1.0, 200_001)
    volts = np.interp(soc, curve.soc, curve.rest_v)
    fine = float((0.5 * (volts[1:] + volts[:-1]) * np.diff(soc)).sum())
    assert curve.full_wh_ah == pytest.approx(fine, rel=1e-9)
    np.testing.assert_allclose(curve.soc_at(curve.energy_at(soc[::500])), soc[::500], atol=1e-9)


def test_autonomy_is_usable_energy_over_the_load():
    """A gentle load gets the usable watt-hours out, less what the resistance and self-discharge take."""
    battery = Battery(chemistry="lifepo4", cells_in_series=4, capacity_ah=12)
    pack = pack_of(battery, age="worn")
    usable_wh = (pack.curve.full_wh_ah - float(pack.curve.energy_at(pack.cutoff_soc))) * 12 * 0.8
    hours = autonomy_h(pack, battery_ah=12, draw_w=2.0)
    # 1 %: I²R at 0.16 A is negligible, self-discharge over two and a half days is 0.2 %.
    assert hours == pytest.approx(usable_wh / 2.0, rel=0.01)


def test_frost_takes_capacity_from_the_same_pack():
    """At -20 °C a lithium pack lasts about 0.55 of its warm hours, at 0 °C about 0.8."""
    # From memory: capacity 0.8 at 0 °C and 0.55 at -20 °C.
    pack = pack_of(Battery(chemistry="lifepo4", cells_in_series=4, capacity_ah=12, cutoff_soc=0.0))
    warm, zero, cold = (autonomy_h(pack, battery_ah=12, draw_w=2.0, temp_c=temp_c) for temp_c in (25.0, 0.0, -20.0))
    assert zero / warm == pytest.approx(0.8, abs=0.02)
    assert cold / warm == pytest.approx(0.55, abs=0.02)
