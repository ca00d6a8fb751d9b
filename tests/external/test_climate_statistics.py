"""The spread of a month's days against printed values."""

from __future__ import annotations

import numpy as np
import pytest

from sunbot.sky.daily_light import clearness, shape_for, top_clearness


@pytest.mark.parametrize(
    ("mean", "low", "shape"),
    [
        # Recomputed outside this code from Bendt et al. 1981 with the top of Hollands & Huget 1983
        (0.30, 0.05, -2.1252),
        (0.40, 0.05, 0.1863),
        (0.50, 0.05, 2.2720),
        (0.60, 0.05, 4.6209),
        (0.70, 0.05, 8.3725),
        (0.30, 0.04, -1.9051),
        (0.40, 0.04, 0.3052),
        (0.50, 0.04, 2.3372),
        (0.60, 0.04, 4.6508),
        (0.70, 0.04, 8.3789),
    ],
)
def test_shape_of_the_spread_agrees_with_recomputed_values(mean, low, shape):
    """The exponent of the spread of days, to the printed digits."""
    assert shape_for(mean, low=low, high=top_clearness(mean)) == pytest.approx(shape, abs=1e-4)


def test_shape_of_a_capped_spread():
    """The same where the clear sky ends the spread."""
    # Recomputed as above: K 0.25, lowest 0.04, highest 0.487
    assert shape_for(0.25, low=0.04, high=0.487) == pytest.approx(-0.8126, abs=1e-4)


def test_share_below_agrees_with_the_published_distribution():
    """Putting days back into the published cumulative form returns the share of days below them."""
    # Published: Bendt, Collares-Pereira & Rabl 1981: F = (e^(g Kmin) - e^(g k)) / (e^(g Kmin) - e^(g Kmax))
    share = np.linspace(0.01, 0.99, 50)
    for shape in (-2.1252, 0.1863, 4.6209):
        k = clearness(share, shape, low=0.05, high=0.7)
        back = (np.exp(shape * 0.05) - np.exp(shape * k)) / (np.exp(shape * 0.05) - np.exp(shape * 0.7))
        assert back == pytest.approx(share, rel=1e-9)
