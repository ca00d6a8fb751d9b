"""The controller's formulas."""

import numpy as np
import pytest

from sunbot.harvest.cells import current_a, fit_one_diode, peak
from sunbot.harvest.controller import cold_voc_v, converted_w, shared_peak, tracked_current_a

CELL = fit_one_diode(
    watts=40.0, vmp_v=18.0, imp_a=2.22, voc_v=21.8, isc_a=2.35, voc_pct_per_k=-0.30, isc_pct_per_k=0.05
)
OTHER = fit_one_diode(
    watts=20.0, vmp_v=17.2, imp_a=20 / 17.2, voc_v=21.0, isc_a=1.25, voc_pct_per_k=-0.33, isc_pct_per_k=0.04
)


def _together(cells, lights, temps):
    """Shared maximum as the controller finds it, for arrays of light and temperature per panel."""
    peaks = [peak(cell, np.maximum(g, 1e-4), t) for cell, g, t in zip(cells, lights, temps, strict=True)]
    parameters = [cell.at(g, t) for cell, g, t in zip(cells, lights, temps, strict=True)]
    amps = [np.where(g > 0, p / v, 0.0) for (p, v), g in zip(peaks, lights, strict=True)]
    volts, held = shared_peak(parameters, amps, [v for _, v in peaks])
    return volts * sum(held)


@pytest.mark.parametrize("cells", [(CELL, CELL), (CELL, OTHER), (CELL, OTHER, OTHER)])
def test_the_shared_maximum_is_that_of_a_fine_search(cells):
    """Panels under unlike light, one now and then dark, against every voltage in 10 mV steps."""
    rng = np.random.default_rng(7)
    lights = [10 ** rng.uniform(0.0, 3.05, 200) for _ in cells]
    lights[1][::7] = 0.0
    air_c = rng.uniform(-15.0, 40.0, 200)
    temps = [air_c + 0.045 * light for light in lights]
    best = np.zeros(200)
    for volts in np.arange(9.0, 23.0, 0.01):
        amps = [np.maximum(current_a(c, g, t, volts=volts), 0.0) for c, g, t in zip(cells, lights, temps, strict=True)]
        best = np.maximum(best, volts * sum(amps))
    found = _together(cells, lights, temps)
    assert (found <= best * (1 + 1e-5)).all()
    # Two panels: the top itself. Three: a dim one may be past its open voltage while another of the two still gives.
    assert found == pytest.approx(best, rel=1e-5 if len(cells) == 2 else 0.002)
    assert found.sum() == pytest.approx(best.sum(), rel=1e-5)


def test_equal_panels_under_equal_light_lose_nothing_together():
    """Two alike under the same sun give twice one."""
    light, temp = np.array([900.0, 60.0]), np.array([45.0, 3.0])
    assert _together((CELL, CELL), [light, light], [temp, temp]) == pytest.approx(2 * peak(CELL, light, temp)[0])


def test_more_panel_behind_a_thin_wire_never_gives_less():
    """Power beyond the wire grows with the panel, up to the most the wire lets through."""
    ohm, volts = 1.5, np.full(50, 18.0)
    amps = tracked_current_a(np.linspace(0.1, 15.0, 50), volts, wire_ohm=ohm)
    beyond_w = volts * amps - amps**2 * ohm
    assert (np.diff(beyond_w) >= -1e-12).all()
    assert beyond_w[-1] == pytest.approx(18.0**2 / (4 * ohm))


def test_an_efficiency_curve_is_read_at_the_share_of_rated_power():
    """Between its points linear, beyond them level; without one the single efficiency."""
    feed_w = np.array([0.0, 1.0, 10.0, 30.0, 90.0])
    out_w = converted_w(feed_w, efficiency=0.5, curve=((0.1, 0.8), (0.5, 0.9)), rated_w=50.0)
    assert out_w == pytest.approx(feed_w * np.array([0.8, 0.8, 0.825, 0.9, 0.9]))
    assert converted_w(feed_w, efficiency=0.5, curve=None, rated_w=None) == pytest.approx(0.5 * feed_w)


def test_cold_panels_stand_higher():
    """At -15 degC a panel of -0.30 %/K stands 12 % above its printed open voltage."""
    assert cold_voc_v(21.8, voc_pct_per_k=-0.30, coldest_c=-15.0) == pytest.approx(21.8 * 1.12)
