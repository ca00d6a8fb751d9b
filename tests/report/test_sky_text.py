"""The answer of sky on a terminal."""

from __future__ import annotations

from dataclasses import replace

import pytest

from sunbot.report.sky_text import sky_text
from sunbot.studies import survey


@pytest.fixture(scope="module")
def seen(robots):
    return survey(robots.hill(), years=2)


def test_no_audit_is_not_a_passed_audit(seen):
    """Of a route nothing is audited, and the first line says so."""
    assert "every check passed" in sky_text(seen).splitlines()[0]
    text = sky_text(replace(seen, audit=()))
    assert text.splitlines()[0].endswith(": not audited: a route has many places")
    assert "passed" not in text
    assert "Is it believable?" not in text


def test_failed_checks_are_counted_in_the_first_line(seen):
    failed = (replace(seen.audit[0], passed=False), *seen.audit[1:])
    assert f"1 of {len(failed)} checks FAILED" in sky_text(replace(seen, audit=failed)).splitlines()[0]


def test_the_heads_of_the_columns_do_not_run_together(seen):
    """Each word of the second head line stands apart."""
    head = sky_text(seen).split("Month by month")[1].splitlines()[2]
    assert [part.strip() for part in head.split("  ") if part.strip()] == [
        "the level",
        "this horizon",
        "such month",
        "such month",
        "mean",
        "low",
        "high",
    ]


def test_dark_spells_of_generated_years_have_no_calendar_year(seen):
    """Year 1 or 2, not 2001."""
    part = sky_text(seen).split("The darkest days in a row")[1].split("\n\n")[0]
    assert "year 1, " in part or "year 2, " in part
    assert "2001-" not in part
