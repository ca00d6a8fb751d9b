"""Designs and how long a pack lasts by itself."""

import numpy as np
import pytest

from sunbot.storage import autonomy_h, pack_of, usable_wh


def test_autonomy_is_the_usable_energy_over_the_draw_where_nothing_is_lost(worlds):
    """Without losses the hours are Wh over W, at 25 °C and in the cold."""
    pack = pack_of(worlds.ideal("lifepo4", capacity_ah=12.0), age="new")
    for temp_c in (25.0, 0.0):
        hours = autonomy_h(pack, battery_ah=12.0, draw_w=3.0, temp_c=temp_c)
        assert hours == pytest.approx(usable_wh(pack, 12.0, temp_c=temp_c) / 3.0, rel=1e-6)


def test_age_and_resistance_shorten_it(worlds):
    """A worn pack lasts less than worn_capacity of a new one at a heavy draw, for its resistance takes a share."""
    battery = worlds.ideal("nimh", capacity_ah=2.0, resistance_mohm=300.0)
    new, worn = (autonomy_h(pack_of(battery, age=age), battery_ah=2.0, draw_w=10.0) for age in ("new", "worn"))
    assert worn < 0.8 * new
    assert autonomy_h(pack_of(battery), battery_ah=2.0, draw_w=20.0) < worn / 2


def test_a_draw_of_nothing_is_a_mistake_of_the_caller(worlds):
    """No number of hours is right for it."""
    with pytest.raises(ValueError, match="draw_w must be above 0"):
        autonomy_h(pack_of(worlds.ideal("nimh")), battery_ah=2.0, draw_w=0.0)


def test_a_larger_pack_lasts_in_proportion(worlds):
    """Twice the Ah at twice the W is the same pack twice."""
    pack = pack_of(worlds.ideal("lead-acid", resistance_mohm=50.0))
    hours = [autonomy_h(pack, battery_ah=ah, draw_w=ah) for ah in (5.0, 10.0, 40.0)]
    assert hours == pytest.approx(np.full(3, hours[0]), rel=1e-9)
