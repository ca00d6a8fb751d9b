"""Shares, nouns, dates and names as people read them."""

from __future__ import annotations

import datetime as dt
import math
import warnings
from types import SimpleNamespace

import pytest
from matplotlib.figure import Figure

from sunbot.report.words import counted, date_text, drawable, printable
from sunbot.shares import exact_share, share_text


@pytest.mark.parametrize("years", [7, 50, 499, 500])
@pytest.mark.parametrize("target", [0.8, 0.945, 0.95, 0.999, 1.0])
def test_no_share_of_years_is_rounded_across_a_bound(years, target):
    """Every share of whole years stands below, on or above 0 %, 100 % and the target as it was before it was told."""
    for alive in range(years + 1):
        share = alive / years
        shown = float(share_text(share, target=target).rstrip("%")) / 100.0
        for bound in (0.0, 1.0, target):
            assert (shown > bound + 1e-9) == (share > bound + 1e-9)
            assert (shown < bound - 1e-9) == (share < bound - 1e-9)
        assert shown == pytest.approx(share, abs=0.0051)


@pytest.mark.parametrize(
    ("share", "options", "told"),
    [
        (499 / 500, {}, "99.8%"),
        (1 / 500, {}, "0.2%"),
        (0.946, {"target": 0.95}, "94.6%"),
        (0.9499, {"target": 0.95}, "94.99%"),
        (0.72, {"target": 0.95}, "72%"),
        (1.0, {"places": 1}, "100.0%"),
        (0.0, {}, "0%"),
        (0.9999999, {"most": 0}, "99%"),
        (1e-7, {"most": 2}, "0.01%"),
        (math.nan, {}, "-"),
    ],
)
def test_digits_are_added_only_where_they_are_needed(share, options, told):
    """The plain cases keep whole per cents."""
    assert share_text(share, **options) == told


def test_a_target_keeps_its_digits():
    """0.945 is neither 94 nor 95 %."""
    assert exact_share(0.945) == "94.5%"
    assert exact_share(0.95) == "95%"
    assert exact_share(1.0) == "100%"


def test_one_of_a_thing_has_no_s():
    assert [counted(count, "cell") for count in (0, 1, 2)] == ["0 cells", "1 cell", "2 cells"]


def test_generated_years_are_numbered_and_measured_ones_dated():
    """The ninth of the years generated from 2001 on is not the 2009 anybody lived."""
    day = dt.date(2009, 12, 29)
    assert date_text(day, SimpleNamespace(kind="generated")) == "year 9, 29 December"
    assert date_text(day, SimpleNamespace(kind="record")) == "2009-12-29"


@pytest.mark.parametrize(
    "name", ["Post $\\frac{$", "cash $5 and $6", "ring \x1b[31m\x07", "果園", "two\nlines", "C:\\$x"]
)
def test_any_name_can_be_drawn(name):
    """No formula is read into it, no letter is missing, nothing is warned of."""
    figure = Figure()
    figure.suptitle(drawable(name))
    with warnings.catch_warnings():
        warnings.simplefilter("error")
        figure.draw_without_rendering()


def test_control_characters_are_not_printed():
    """A terminal would obey them."""
    assert printable("a\x1b[31mb\n") == "a\N{WHITE SQUARE}[31mb\n"
