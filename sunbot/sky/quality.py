"""The audit of a weather record: is the light believable, is the clock right, and if not, what would mend it."""

from __future__ import annotations

from collections.abc import Iterable, Mapping

import pandas as pd

from ..types import Place
from .clock_audit import clock_of
from .quality_checks import (
    SHORT_GAP_H,
    AuditCheck,
    check_clock,
    check_closure,
    check_dark_days,
    check_fill_codes,
    check_gaps,
    check_limits,
    check_night,
    check_stuck,
    check_swapped,
    check_unit,
)
from .record import record_of

__all__ = ["SHORT_GAP_H", "AuditCheck", "audit_record", "merged"]

AUDITED = "audit-"
"""Before the code of a check in the caution that an answer on the record carries."""

_ROWS_AT_ONCE = 600_000


def audit_record(
    raw: pd.DataFrame,
    *,
    step_h: float,
    place: Place,
    shift_now: float = 0.0,
    coded: Mapping[str, int] | None = None,
) -> tuple[AuditCheck, ...]:
    """Look for what makes a weather record unbelievable.

    A fault is named by one check: what is found is mended before the next check looks (codes emptied, units turned into
    W/m2, columns put right, the clock shifted), so that kWh for W is not also reported as nights without end.

    Parameters
    ----------
    raw : DataFrame, one row per step
        As read: UTC, tz-aware middles, sorted, unique. Columns ghi and any of dni, dhi [W/m2], temp_air [degC],
        wind_speed [m/s]; NaN where missing. Rows may be missing: they count as gaps.
    step_h : float
        Length of a step [h].
    place : Place
        Where the record says it was taken.
    shift_now : float
        The shift_minutes already applied to the stamps.
    coded : mapping
        How many fill codes the reader has already emptied, by column.

    Returns
    -------
    One check each of gaps, fill-codes, stuck, swapped, unit, clock, limits, night, dark-days, closure.

    Raises
    ------
    ValueError
        raw has no rows or stamps without a zone.
    """
    times, known = pd.DatetimeIndex(raw.index), coded or {}
    if not len(times) or times.tz is None:
        raise ValueError("a record needs rows with stamps that carry a zone")
    if len(raw) <= _ROWS_AT_ONCE:
        return _audit(raw, step_h=step_h, place=place, shift_now=shift_now, coded=known)
    years = [part for _, part in raw.groupby(times.year)]
    return merged(_audit(part, step_h=step_h, place=place, shift_now=shift_now, coded=known) for part in years)


def merged(audits: Iterable[tuple[AuditCheck, ...]]) -> tuple[AuditCheck, ...]:
    """One audit out of those of several parts: of each check the worst finding, the first among equals."""
    columns = zip(*audits, strict=True)
    return tuple(min(column, key=lambda check: (check.passed, not check.fatal)) for column in columns)


def _audit(
    raw: pd.DataFrame, *, step_h: float, place: Place, shift_now: float, coded: Mapping[str, int]
) -> tuple[AuditCheck, ...]:
    record = record_of(raw, step_h=step_h, place=place)
    gaps = check_gaps(record)
    codes, record = check_fill_codes(record, coded)
    stuck, record = check_stuck(record)
    swapped, record = check_swapped(record)
    unit, record = check_unit(record)
    dni, dhi = record.beam_and_diffuse or (None, None)
    finding = clock_of(record.times, record.ghi, dni=dni, dhi=dhi, step_h=step_h, arc=record.arc, place=place)
    clock = check_clock(finding, zone=place.time_zone, shift_now=shift_now)
    record = record.under_shifted_clock(finding.shift_min)
    rest = (check_limits(record), check_night(record), check_dark_days(record), check_closure(record, finding))
    return (gaps, codes, stuck, swapped, unit, clock, *rest)
