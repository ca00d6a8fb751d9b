"""Temperature of the battery's box."""

import math

import numpy as np
import pytest

from sunbot.storage import box_temp_c


def test_a_box_without_lag_is_the_air_plus_its_rise():
    """Lag 0 and the limit of a very short lag follow the air."""
    air = np.array([3.0, -4.0, 7.5])
    assert box_temp_c(air, step_h=1.0, lag_h=0.0, rise_c=2.0) == pytest.approx(air + 2.0)
    assert box_temp_c(air, step_h=1.0, lag_h=1e-3, rise_c=0.0) == pytest.approx(air)


def test_after_a_step_of_the_air_the_box_follows_the_exponential():
    """A jump by 10 K has come through by 1 - exp(-t / lag) after t."""
    air = np.r_[np.zeros(400), np.full(400, 10.0)]
    box = box_temp_c(air, step_h=0.25, lag_h=2.0, rise_c=0.0)
    after_h = np.arange(1, 41) * 0.25
    assert box[400:440] == pytest.approx(10 * (1 - np.exp(-after_h / 2.0)), abs=1e-9)


@pytest.mark.parametrize("lag_h", [0.7, 5.0, 300.0])
def test_the_series_is_a_ring(lag_h):
    """Every step follows from the one before it, the first from the last; the mean is the air's."""
    air = np.random.default_rng(4).normal(5, 8, 97)
    box = box_temp_c(air, step_h=1.0, lag_h=lag_h, rise_c=0.0)
    keep = math.exp(-1.0 / lag_h)
    assert box == pytest.approx(keep * np.roll(box, 1) + (1 - keep) * air, abs=1e-9)
    assert box.mean() == pytest.approx(air.mean())
