"""Rest voltages by state of charge."""

from __future__ import annotations

import numpy as np
import pytest

from sunbot.inputs.chemistries import REST_VOLTAGES, rest_voltage_v


@pytest.mark.parametrize("chemistry", REST_VOLTAGES)
def test_rest_voltage_rises_from_empty_to_full_and_meets_linear_interpolation(chemistry):
    """The look-up is the straight line between rising nodes, times the cells."""
    curve = REST_VOLTAGES[chemistry]
    assert np.all(np.diff(curve.soc) > 0)
    assert np.all(np.diff(curve.cell_v) > 0)
    assert (curve.soc[0], curve.soc[-1]) == (0.0, 1.0)
    for soc in np.linspace(0, 1, 41):
        assert rest_voltage_v(chemistry, soc, 3) == pytest.approx(
            3 * np.interp(soc, curve.soc, curve.cell_v), rel=1e-12
        )


def test_five_nickel_cells_are_a_six_volt_pack():
    """Five NiMH cells are 6 V nominal and at least 7 V when full."""
    # Common practice: the label of every such pack, and what a meter shows off the charger.
    assert 5 * REST_VOLTAGES["nimh"].nominal_v == pytest.approx(6.0)
    assert rest_voltage_v("nimh", 1.0, 5) >= 7.0 - 1e-9
