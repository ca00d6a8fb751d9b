"""Clocks and years: the site's standard clock, local and solar time, and energy years laid side by side."""

from __future__ import annotations

from collections.abc import Collection
from dataclasses import dataclass
from datetime import datetime
from math import gcd
from typing import Protocol
from zoneinfo import ZoneInfo

import numpy as np
import pandas as pd

from .types import BoolArray, FloatArray, IntArray

REFERENCE_YEAR = 2001
"""Generated and typical years are numbered from here."""

RULES_YEAR = 2018
"""Its zone rules are taken for the reference year: the same weekdays, and daylight saving as it is today."""

_DAY_S = 86_400
_RULES_SHIFT_S = int((datetime(RULES_YEAR, 1, 1) - datetime(REFERENCE_YEAR, 1, 1)).total_seconds())
_REFERENCE_SPAN = np.array(["2000-12-30", "2002-01-03"], dtype="datetime64[s]").astype(np.int64)
_J2000_S = int(np.datetime64("2000-01-01T12:00:00", "s").astype(np.int64))
_WEEKDAYS = ("mon", "tue", "wed", "thu", "fri", "sat", "sun")


@dataclass(frozen=True, eq=False)
class Clock:
    """What a clock shows at each time: year, month 1-12, day of the month, whole days since 1970-01-01 of that
    clock, hour of the day as a fraction (0 to below 24), weekday 0 = Monday. All (n_times,).
    """

    year: IntArray
    month: IntArray
    day_of_month: IntArray
    day: IntArray
    hour: FloatArray
    weekday: IntArray


@dataclass(frozen=True, eq=False)
class Lanes:
    """Energy years side by side, aligned by month.

    row : (n_steps, n_years) index into the weather's steps (any valid index where step_h is 0)
    step_h : (n_steps, n_years) hours of each step; 0 = padding at the end of a month (a February without its 29th)
    month : (n_steps,) calendar month 1-12 of the step, the same in all lanes
    before : (n_years,) whose end state starts this lane; -1 = starts at start_soc (deployments)
    first_month : the month energy years start with (a deployment: the month it starts in)
    """

    row: IntArray
    step_h: FloatArray
    month: IntArray
    before: IntArray
    first_month: int


class Duty(Protocol):
    """When a load is due: hour spans of its clock (None = always), months 1-12, weekdays "mon" to "sun"."""

    @property
    def hours(self) -> tuple[tuple[float, float], ...] | None: ...
    @property
    def clock(self) -> str: ...
    @property
    def months(self) -> Collection[int]: ...
    @property
    def weekdays(self) -> Collection[str]: ...


def standard_offset_h(zone: str) -> float:
    """Hours the site's standard clock is ahead of UTC: the smaller of the zone's offsets in January and July."""
    offsets = (datetime(RULES_YEAR, month, 1, 12, tzinfo=ZoneInfo(zone)).utcoffset() for month in (1, 7))
    return min(offset.total_seconds() for offset in offsets if offset is not None) / 3600.0


def standard_clock(times: pd.DatetimeIndex, zone: str) -> Clock:
    """The site's clock without daylight saving, at UTC ``times``."""
    return _clock(_seconds(times) + round(standard_offset_h(zone) * 3600.0))


def local_clock(times: pd.DatetimeIndex, zone: str, *, reference: bool) -> Clock:
    """The site's clock on the wall, daylight saving included; ``reference``: times are of the 2001 calendar.

    Raises ``ValueError`` for times without a zone, and for a reference time outside the year 2001.
    """
    seconds = _seconds(times)
    if reference and seconds.size and not _REFERENCE_SPAN[0] <= seconds.min() <= seconds.max() < _REFERENCE_SPAN[1]:
        raise ValueError(f"reference times lie in {REFERENCE_YEAR}, these run from {times.min()} to {times.max()}")
    shift = _RULES_SHIFT_S if reference else 0
    return _clock(_on_the_wall(seconds + shift, zone) - shift)


def solar_clock(times: pd.DatetimeIndex, longitude: float) -> Clock:
    """Apparent solar time: 12 when the sun is due south (north)."""
    seconds = _seconds(times)
    return _clock(seconds + longitude * 240.0 + 60.0 * equation_of_time_min(seconds))


def equation_of_time_min(seconds: IntArray | FloatArray) -> FloatArray:
    """Apparent less mean solar time [min] at ``seconds`` since 1970-01-01 UTC, within 0.1 min from 1950 to 2050.

    Source
    ------
    Published: The Astronomical Almanac, low-precision formulas for the Sun (page C5), from memory; held against the
    solar position algorithm of NREL/TP-560-34302 in the tests.
    """
    days = (seconds - _J2000_S) / _DAY_S
    anomaly = np.radians(357.528 + 0.9856003 * days)
    centre_deg = 1.915 * np.sin(anomaly) + 0.020 * np.sin(2.0 * anomaly)
    longitude = np.radians(280.460 + 0.9856474 * days + centre_deg)
    return np.asarray(4.0 * (-centre_deg + 2.466 * np.sin(2.0 * longitude) - 0.053 * np.sin(4.0 * longitude)))


def share_in_hours(hour: FloatArray, spans: tuple[tuple[float, float], ...], step_h: float) -> FloatArray:
    """Share of each step, centred on ``hour``, that lies in the spans of the day; (n_times,), 0 to 1."""
    hour = np.asarray(hour, dtype=np.float64)
    share = np.zeros_like(hour)
    for first, last in _joined(spans):
        for day in (-24.0, 0.0, 24.0):  # a step may reach over midnight
            reach = np.minimum(hour + step_h / 2, last + day) - np.maximum(hour - step_h / 2, first + day)
            share += np.maximum(reach, 0.0)
    return np.minimum(share / step_h, 1.0)


def duty_share(
    times: pd.DatetimeIndex, duty: Duty, *, zone: str, longitude: float, step_h: float, reference: bool
) -> FloatArray:
    """Share of each step in which a load is due by its hours, months and weekdays; (n_times,), 0 to 1.

    Weekday and month are those of the duty's own clock. Steps are looked at in quarter hours, so that a step over
    midnight or over a change of the clock (they fall on quarter hours everywhere) counts what really lies in the duty.
    """
    days = np.isin(np.arange(7), [_WEEKDAYS.index(day) for day in duty.weekdays])
    months = np.isin(np.arange(13), list(duty.months))
    if duty.hours is None and days.all() and months[1:].all():
        return np.ones(len(times))
    step_s = round(step_h * 3600.0)
    part_s = gcd(step_s, 900)
    middles = np.arange(step_s // part_s) * part_s + (part_s - step_s) // 2
    parts = pd.DatetimeIndex((_seconds(times)[:, None] + middles).ravel().astype("datetime64[s]"), tz="UTC")
    clock = solar_clock(parts, longitude) if duty.clock == "solar" else local_clock(parts, zone, reference=reference)
    share = (days[clock.weekday] & months[clock.month]).astype(np.float64)
    if duty.hours is not None:
        share *= share_in_hours(clock.hour, duty.hours, part_s / 3600.0)
    return np.asarray(share.reshape(len(times), -1).mean(axis=1))


def energy_years(
    times: pd.DatetimeIndex,
    *,
    step_h: float,
    zone: str,
    first_month: int,
    deployment: tuple[tuple[int, int], tuple[int, int]] | None = None,
) -> Lanes:
    """Cut a ring of whole years into energy years that start on the first of ``first_month``.

    Lane 0 is the first that starts in the table, the last runs on into the table's head. With ``deployment``, the
    (month, day) of its first and last day, each lane is one deployment, and ``first_month`` has no effect.
    Raises ``ValueError`` where the times are not whole years.
    """
    first, last = deployment or ((first_month, 1), (first_month, 1))
    clock = standard_clock(times, zone)
    since = _days_since(clock.month, clock.day_of_month, first)
    starts = np.flatnonzero(since < np.roll(since, 1))
    if not starts.size:
        raise ValueError("energy years are cut from whole years; in these times no year begins")
    order = np.roll(np.arange(len(times)), -starts[0])
    lane = np.repeat(np.arange(starts.size), np.diff(starts, append=starts[0] + len(times)))
    if deployment is not None:
        out = since[order] <= _days_since(np.array(last[0]), np.array(last[1]), first)
        order, lane = order[out], lane[out]
    # the month of the first day comes twice where a deployment ends earlier in it: slot 12 is its second turn
    again = (clock.month == first[0]) & (clock.day_of_month < first[1])
    slot = np.where(again, 12, (clock.month - first[0]) % 12)[order]
    row, inside, slots = _side_by_side(order, lane * 13 + slot, starts.size)
    if deployment is None and np.unique(slots).size != 12:
        raise ValueError("energy years are cut from whole years; a month is missing in these times")
    return Lanes(
        row=row,
        step_h=np.where(inside, float(step_h), 0.0),
        month=(first[0] - 1 + slots) % 12 + 1,
        before=np.full(starts.size, -1) if deployment is not None else (np.arange(starts.size) - 1) % starts.size,
        first_month=first[0],
    )


def _side_by_side(order: IntArray, group: IntArray, n_lanes: int) -> tuple[IntArray, BoolArray, IntArray]:
    """Rows of each lane, whether the lane has that step, and the month slot; ``group`` is lane x 13 + slot."""
    if np.any(np.diff(group) < 0):
        raise ValueError("energy years are cut from whole years; the months of these times are out of order")
    count = np.bincount(group, minlength=n_lanes * 13)
    head = np.cumsum(count) - count
    longest = count.reshape(n_lanes, 13).max(axis=0)
    slots = np.repeat(np.arange(13), longest)
    turn = np.arange(slots.size) - np.repeat(np.cumsum(longest) - longest, longest)
    which = slots[:, None] + 13 * np.arange(n_lanes)
    inside = turn[:, None] < count[which]
    # padding repeats the last step of its month
    at = head[which] + np.maximum(np.minimum(turn[:, None], count[which] - 1), 0)
    return order[at % order.size], inside, slots


def _days_since(month: IntArray, day: IntArray, first: tuple[int, int]) -> IntArray:
    """Place in a year of twelve 31-day months that begins on ``first``; 0 to 371, it falls where a new one begins."""
    return np.asarray((31 * (month - first[0]) + day - first[1]) % 372)


def _joined(spans: tuple[tuple[float, float], ...]) -> list[tuple[float, float]]:
    """The same hours as spans that do not overlap."""
    joined: list[tuple[float, float]] = []
    for first, last in sorted(spans):
        if joined and first <= joined[-1][1]:
            joined[-1] = (joined[-1][0], max(joined[-1][1], last))
        else:
            joined.append((first, last))
    return joined


def _seconds(times: pd.DatetimeIndex) -> IntArray:
    """Whole seconds since 1970-01-01 UTC."""
    if times.tz is None:
        raise ValueError("times carry no zone; localize them to UTC first")
    return np.asarray(times.as_unit("s").asi8)


def _on_the_wall(seconds: IntArray, zone: str) -> IntArray:
    """Seconds of UTC as seconds of the zone's own clock."""
    utc = pd.DatetimeIndex(seconds.astype("datetime64[s]"), tz="UTC")
    return np.asarray(utc.tz_convert(zone).tz_localize(None).as_unit("s").asi8)


def _clock(seconds: IntArray | FloatArray) -> Clock:
    """A clock that shows 1970-01-01 0:00 at 0 s."""
    day = np.floor_divide(seconds, _DAY_S).astype(np.int64)
    months = day.astype("datetime64[D]").astype("datetime64[M]")
    month = months.astype(np.int64)
    return Clock(
        year=month // 12 + 1970,
        month=month % 12 + 1,
        day_of_month=day - months.astype("datetime64[D]").astype(np.int64) + 1,
        day=day,
        hour=(seconds - day * _DAY_S) / 3600.0,
        weekday=(day + 3) % 7,
    )
