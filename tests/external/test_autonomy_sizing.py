"""Sizing by days of autonomy: the arithmetic of the trade, by its worked example."""

import pytest

from sunbot.studies.autonomy_sizing import autonomy_battery_ah, autonomy_watts


def test_the_worked_example_of_the_arithmetic():
    """60 Wh a day from 12.8 V over 5 days, down to 80 %, in the cold and with a margin; end of life comes on top."""
    # Own example of the logic of IEEE Std 1013 (from memory): 60 / 12.8 x 5 = 23.438 Ah; / 0.8 = 29.297 Ah;
    # / 0.9 for the cold x 1.15 margin = 37.43 Ah.
    plain_ah = autonomy_battery_ah(60.0, 12.8, days=5.0, cold_capacity=0.9, end_of_life=1.0)
    assert plain_ah == pytest.approx(37.43, abs=0.01)
    assert plain_ah * 0.9 / 1.15 == pytest.approx(29.297, abs=0.001)
    assert autonomy_battery_ah(60.0, 12.8, days=5.0, cold_capacity=0.9) == pytest.approx(37.43 / 0.8, abs=0.02)


def test_few_days_are_ruled_by_the_daily_discharge():
    """For half a day of autonomy a fifth of the capacity a day is what counts."""
    # From memory, same standard: the larger of the two; 60/12.8/0.2 = 23.4375 Ah before adjustments.
    assert autonomy_battery_ah(60.0, 12.8, days=0.5) == pytest.approx(23.4375 / 0.8 * 1.15, rel=1e-6)


def test_the_panel_gives_the_load_of_the_worst_month_with_a_margin():
    """Array to load 1.3: 60 Wh a day where a watt brings 1.5 Wh asks for 52 W; no light, no panel."""
    assert autonomy_watts(60.0, 1.5) == pytest.approx(52.0)
    assert autonomy_watts(60.0, 0.0) is None
