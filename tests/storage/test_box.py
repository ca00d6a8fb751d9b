"""Temperature of the battery's box."""

import math

import numpy as np
import pytest

from sunbot.storage import box_temp_c, heated_box_c, pack_of


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


def heated(worlds, box_c, **keys):
    """Temperature and watts of a box held at 2 degC."""
    pack = pack_of(worlds.ideal("lifepo4", heater_on_below_c=2.0, **keys))
    warm_c, share = heated_box_c(pack, box_c)
    return warm_c, share * pack.heater_w


BOX_C = np.random.default_rng(8).normal(-5.0, 12.0, 500)


@pytest.mark.parametrize("heater_w", [0.05, 1.0, 30.0])
def test_what_the_heater_gives_leaves_through_the_box(worlds, heater_w):
    """Steady heat: watts = loss x lift, never more than the heater has, never warmer than it holds, all it can."""
    warm_c, drawn_w = heated(worlds, BOX_C, heater_w=heater_w, box_loss_w_per_k=0.15)
    assert drawn_w == pytest.approx(0.15 * (warm_c - BOX_C))
    assert (drawn_w <= heater_w).all()
    assert (warm_c[BOX_C > 2.0] == BOX_C[BOX_C > 2.0]).all()
    short = (BOX_C < 2.0) & (warm_c != 2.0)
    assert (warm_c[short] < 2.0).all()
    assert drawn_w[short] == pytest.approx(heater_w)


def test_a_stronger_heater_or_a_tighter_box_is_never_colder(worlds):
    """More watts or less loss."""
    by_watts = [heated(worlds, BOX_C, heater_w=w, box_loss_w_per_k=0.15)[0] for w in (0.0, 0.1, 1.0, 3.0, 50.0)]
    by_loss = [heated(worlds, BOX_C, heater_w=1.0, box_loss_w_per_k=k)[0] for k in (5.0, 0.3, 0.05, 1e-6)]
    for series in (by_watts, by_loss):
        assert (np.diff(series, axis=0) >= 0.0).all()
        assert (np.diff(series, axis=0).max(axis=1) > 0.0).all()


def test_a_box_that_loses_nothing_is_held_as_one_whose_loss_is_unknown_but_for_nothing(worlds):
    """Loss towards 0: the temperatures of a heater taken as enough to the last digit, and hardly a watt drawn."""
    taken_c, full_w = heated(worlds, BOX_C, heater_w=1.0)
    warm_c, drawn_w = heated(worlds, BOX_C, heater_w=1.0, box_loss_w_per_k=1e-9)
    assert (warm_c == taken_c).all()
    assert (full_w == np.where(BOX_C < 2.0, 1.0, 0.0)).all()
    assert drawn_w.max() < 1e-6


def test_no_heater_leaves_the_box_as_it_is(worlds):
    """The loss of the box alone does nothing."""
    warm_c, drawn_w = heated(worlds, BOX_C, box_loss_w_per_k=0.2)
    assert (warm_c == BOX_C).all()
    assert not drawn_w.any()
