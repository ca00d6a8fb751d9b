"""Wires: the flexible-cable table, other sizes, warmth."""

import pytest

from sunbot.wires import CLASS_5_OHM_PER_KM, resistance_ohm


@pytest.mark.parametrize(("area_mm2", "ohm_per_km"), sorted(CLASS_5_OHM_PER_KM.items()))
def test_table_sizes_are_met_exactly_out_and_back(area_mm2, ohm_per_km):
    """A kilometre of a table size has twice the printed resistance."""
    assert resistance_ohm(1000.0, area_mm2) == pytest.approx(2.0 * ohm_per_km, rel=1e-12)


def test_other_sizes_are_solid_copper():
    """Between the table's sizes the resistivity of annealed copper holds."""
    assert resistance_ohm(10.0, 2.0) == pytest.approx(2 * 10.0 * 0.017241 / 2.0, rel=1e-12)


def test_warm_copper_resists_more():
    """From 20 to 70 degC a copper wire gains 20 %."""
    assert resistance_ohm(3.0, 1.5, temp_c=70.0) == pytest.approx(1.2 * resistance_ohm(3.0, 1.5), rel=1e-12)


def test_no_length_no_resistance():
    """A wire of no length has none."""
    assert resistance_ohm(0.0, 1.5) == 0.0


@pytest.mark.parametrize(("length_m", "area_mm2"), [(-1.0, 1.5), (1.0, 0.0), (float("nan"), 1.5)])
def test_impossible_wires_are_a_callers_mistake(length_m, area_mm2):
    """Negative lengths, no copper and NaN are refused."""
    with pytest.raises(ValueError, match="is none"):
        resistance_ohm(length_m, area_mm2)
