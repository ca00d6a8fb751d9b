"""The interval of a share held against published values."""

from __future__ import annotations

import math

import pytest

from sunbot.studies.statistics import wilson_interval, years_to_settle


@pytest.mark.parametrize(
    ("successes", "trials", "low", "high"),
    [
        # Published: Newcombe, Statistics in Medicine 17 (1998) 857, Table I, method 3 (score); recalled from memory.
        (81, 263, 0.2553, 0.3662),
        (15, 148, 0.0624, 0.1605),
        (0, 20, 0.0, 0.1611),
        (1, 29, 0.0061, 0.1718),
    ],
)
def test_the_score_interval_agrees_with_a_printed_table(successes, trials, low, high):
    """Wilson's interval as Newcombe prints it, to the digits printed."""
    assert wilson_interval(successes, trials) == pytest.approx((low, high), abs=0.00005)


def test_twenty_of_twenty_and_nineteen():
    """From the closed form at z = 1.96: n/(n + z²) for n of n."""
    assert wilson_interval(20, 20) == pytest.approx((20 / (20 + 1.96**2), 1.0), abs=1e-4)
    assert wilson_interval(19, 20) == pytest.approx((0.764, 0.991), abs=0.0005)


def test_years_without_a_failure_that_settle_a_share():
    """After as many years the low end reaches the target, one year earlier it does not."""
    for target in (0.8, 0.9, 0.95, 0.99):
        years = years_to_settle(target)
        assert wilson_interval(years, years)[0] >= target - 1e-12
        assert wilson_interval(years - 1, years - 1)[0] < target
    assert years_to_settle(0.95) == 73
    assert years_to_settle(1.0) is None


def test_years_that_settle_a_share_with_failures_in_it():
    """Where one year in fifty fails, the low end reaches the target after as many; a share at the target never does."""
    for target, survive, of in ((0.95, 49, 50), (0.8, 9, 10), (0.5, 3, 4)):
        times = years_to_settle(target, survive / of) / of
        enough, short = math.ceil(times), math.ceil(times) - 1
        assert wilson_interval(enough * survive, enough * of)[0] >= target
        assert wilson_interval(short * survive, short * of)[0] < target
    assert years_to_settle(0.95, 0.95) is None
    assert years_to_settle(0.95, 0.90) is None


def test_no_share_is_refused():
    """More successes than trials, or no trial at all, is a caller's mistake."""
    for successes, trials in ((1, 0), (3, 2), (-1, 5)):
        with pytest.raises(ValueError, match="is no share"):
            wilson_interval(successes, trials)
