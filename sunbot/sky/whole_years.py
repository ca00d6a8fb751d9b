"""Whole years out of a record: blocks of twelve complete months of the site's standard clock."""

from __future__ import annotations

from dataclasses import dataclass

import numpy as np
import pandas as pd

from ..calendar import standard_offset_h
from ..errors import Fault, InputError
from ..types import Caution, IntArray
from .readings import DAY_S, utc_index

# A record cut at UTC years lacks at most so much of the first or the last month of the site's own clock.
CLOCK_GAP_H = 14


@dataclass(frozen=True, eq=False)
class _Blocks:
    """Where whole years begin in a table: (n_years + 1,) rows, and the first month as months since 1970."""

    rows: IntArray
    first_month: int


def whole_years(
    table: pd.DataFrame, *, step_h: float, zone: str, years: int, name: str
) -> tuple[pd.DataFrame, tuple[Caution, ...]]:
    """The last ``years`` whole years of a mended record; years with values still missing are dropped, and said.

    Raises
    ------
    InputError
        The record holds no twelve complete months, or no whole year without a long gap.
    """
    step_s = round(step_h * 3600)
    offset_s = round(standard_offset_h(zone) * 3600)
    table = _with_ends(table, step_s=step_s, offset_s=offset_s)
    blocks = _blocks(table, offset_s=offset_s, name=name)
    table = _ends_filled(table, blocks, steps_a_day=DAY_S // step_s)
    kept, dropped = [], []
    for year in range(len(blocks.rows) - 1):
        part = table.iloc[blocks.rows[year] : blocks.rows[year + 1]]
        holes = part.isna().sum()
        if holes.any():
            column = str(holes.idxmax())
            dropped.append(f"{_span(blocks.first_month + 12 * year)} ({column} lacks {holes.max() * step_h:.0f} h)")
        else:
            kept.append(part)
    if not kept:
        wrong = f"none of its whole years is free of long gaps: {_first(dropped)}"
        raise InputError(
            Fault(name, wrong, "a record with gaps of at most 3 h, or [climate] for missing temperature or wind")
        )
    out = pd.concat(kept[-years:]) if len(kept) > 1 else kept[0]
    return out, _cautions(len(kept), dropped, years=years, name=name)


def _cautions(kept: int, dropped: list[str], *, years: int, name: str) -> tuple[Caution, ...]:
    cautions = []
    if dropped:
        text = f"Whole years with gaps over 3 h were left out: {_first(dropped)}."
        cautions.append(Caution("years-dropped", name, text))
    if kept == 1 or years == 1:
        text = "One measured year hides the bad ones: a longer record or generated years show how often it fails."
        cautions.append(Caution("one-year", name, text))
    if kept < years:
        word = "year" if kept == 1 else "years"
        cautions.append(Caution("fewer-years", name, f"It holds {kept} whole {word}; {years} were asked for."))
    return tuple(cautions)


def _first(words: list[str]) -> str:
    """The first few of many."""
    more = f" and {len(words) - 5} more" if len(words) > 5 else ""
    return ", ".join(words[:5]) + more


def _span(month: int) -> str:
    """A year from its first month, months counted from January 1970."""
    first, last = np.array([month, month + 11]).astype("datetime64[M]")
    return f"{first} to {last}"


def _local(table: pd.DataFrame, offset_s: int) -> IntArray:
    """Seconds since 1970 on the site's standard clock."""
    return np.asarray(pd.DatetimeIndex(table.index).as_unit("s").asi8, dtype=np.int64) + offset_s


def _month_start_s(months: IntArray | int) -> IntArray:
    return np.asarray(months, dtype=np.int64).astype("datetime64[M]").astype("datetime64[s]").astype(np.int64)


def _months(local: IntArray) -> IntArray:
    return local.astype("datetime64[s]").astype("datetime64[M]").astype(np.int64)


def _with_ends(table: pd.DataFrame, *, step_s: int, offset_s: int) -> pd.DataFrame:
    """Empty rows before and after, where a few hours are all that its first or last month lacks."""
    local = _local(table, offset_s)
    head = int((local[0] - _month_start_s(_months(local[:1]))[0]) // step_s)
    tail = int((_month_start_s(_months(local[-1:]) + 1)[0] - local[-1] - 1) // step_s)
    head = head if head * step_s <= CLOCK_GAP_H * 3600 else 0
    tail = tail if tail * step_s <= CLOCK_GAP_H * 3600 else 0
    if not head and not tail:
        return table
    steps = np.arange(-head, len(table) + tail, dtype=np.int64)
    return table.reindex(utc_index(local[0] - offset_s + step_s * steps))


def _blocks(table: pd.DataFrame, *, offset_s: int, name: str) -> _Blocks:
    """Whole years from the first full month on."""
    local = _local(table, offset_s)
    step_s = int(local[1] - local[0])
    months = _months(local[[0, -1]])
    starts_full = local[0] - _month_start_s(months[0]) < step_s
    ends_full = _month_start_s(months[1] + 1) - local[-1] <= step_s
    first = int(months[0]) + (0 if starts_full else 1)
    complete = int(months[1]) + (1 if ends_full else 0) - first
    count = max(complete, 0) // 12
    if count < 1:
        day = pd.DatetimeIndex(table.index).strftime("%Y-%m-%d")
        wrong = f"it runs from {day[0]} to {day[-1]}, {max(complete, 0)} complete months, which is no whole year"
        remedy = 'at least twelve complete months; with fewer, take their means as [climate] and source = "climate"'
        raise InputError(Fault(name, wrong, remedy))
    edges = _month_start_s(first + 12 * np.arange(count + 1))
    return _Blocks(np.searchsorted(local, edges), first)


def _ends_filled(table: pd.DataFrame, blocks: _Blocks, *, steps_a_day: int) -> pd.DataFrame:
    """The few hours at either end from the other side of the ring, or else from the day beside them."""
    data = table.to_numpy(dtype=np.float64, copy=True)
    start, end = int(blocks.rows[0]), int(blocks.rows[-1])
    empty = np.isnan(data).all(axis=1)
    reach = steps_a_day  # CLOCK_GAP_H is less than a day
    for row in np.flatnonzero(empty[start : start + reach]) + start:
        across = row - start + end
        data[row] = data[across] if across < len(data) and not empty[across] else data[row + steps_a_day]
    for row in np.flatnonzero(empty[end - reach : end]) + end - reach:
        across = row - end + start
        data[row] = data[across] if across >= 0 and not empty[across] else data[row - steps_a_day]
    return pd.DataFrame(data, columns=table.columns, index=table.index)
