"""The clock of a record against the sun: by the symmetry of its clearest days, and by closure of its three columns."""

from __future__ import annotations

from dataclasses import dataclass
from zoneinfo import ZoneInfo

import numpy as np
import pandas as pd

from ..types import BoolArray, FloatArray, IntArray, Place
from .sun_arc import SunArc

CLOCK_LIMIT_MIN = 10.0
"""A clock further off than this is refused: it moves the light on an upright wall by several per cent."""

LOWEST_NOON_COS = 0.17
"""Days on which the sun stays below 10 degrees tell nothing about clocks or overcast. Common practice."""

_DAYS_A_MONTH = 6
_FEWEST_DAYS = 3
_GROUP_DAYS = 8
_SMOOTH = 0.97
_COARSE_MIN = np.arange(-720.0, 720.0, 20.0)
_FINE_MIN = np.arange(-100.0, 101.0, 10.0)
_BLOCK_H = 0.25


@dataclass(frozen=True)
class Offset:
    """How far clocks are behind the sun [min, positive = behind], from ``n`` independent days or steps."""

    minutes: float
    spread: float
    n: int

    @property
    def error(self) -> float:
        """Standard error of the median [min]."""
        return float(1.86 * self.spread / np.sqrt(max(self.n, 1)))  # 1.253 x 1.483: median, MAD of a normal law

    @property
    def surely_near(self) -> bool:
        """Within the limit, and surely so."""
        return abs(self.minutes) + 2.0 * self.error < CLOCK_LIMIT_MIN

    @property
    def too_far(self) -> bool:
        """Beyond the limit, and surely so."""
        return abs(self.minutes) > CLOCK_LIMIT_MIN + 2.0 * self.error


@dataclass(frozen=True)
class ClockFinding:
    """The clock as the light shows it.

    by_days : from the symmetry of clear days, None where there are too few.
    by_closure : from GHI - DHI = DNI cos z, None where it cannot be told.
    years_off : years whose clock is off while the record as a whole is not.
    daylight_saving : minutes by which clear days under daylight saving differ from the others, 0 where they agree.
    """

    by_days: Offset | None
    by_closure: Offset | None
    years_off: tuple[int, ...] = ()
    daylight_saving: float = 0.0

    @property
    def shift_min(self) -> float:
        """Minutes to add to every stamp, in steps of 5; 0 where the clock is right, or no one shift would mend it."""
        if self.daylight_saving or self.years_off:
            return 0.0
        closure = None if self.split_off_min else self.by_closure
        for offset in (self.by_days, closure):
            if offset is not None and offset.too_far:
                return 5.0 * round(offset.minutes / 5.0)
        return 0.0

    @property
    def split_off_min(self) -> float:
        """Minutes by which dni and dhi are off while ghi agrees with the sun: they were made under another clock."""
        days, closure = self.by_days, self.by_closure
        if days is None or closure is None or not (days.surely_near and closure.too_far):
            return 0.0
        return closure.minutes


def clock_of(
    times: pd.DatetimeIndex,
    ghi: FloatArray,
    *,
    dni: FloatArray | None,
    dhi: FloatArray | None,
    step_h: float,
    arc: SunArc,
    place: Place,
) -> ClockFinding:
    """Hold a record's clock against the sun.

    Parameters
    ----------
    times, ghi, dni, dhi, arc : (n_times,)
        A regular series [W/m2], NaN where missing, and the sun over it. Only the clearest days of each month count.
    step_h : float
        Length of a step [h].
    place : Place
        Its time zone says when daylight saving would be worn.

    Returns
    -------
    ClockFinding; sure of nothing on a record without clear days.
    """
    closure = None if dni is None or dhi is None else offset_by_closure(ghi - dhi, dni, arc=arc)
    days = _clearest_days(times, ghi, step_h=step_h, arc=arc)
    if len(days) < _FEWEST_DAYS:
        return ClockFinding(None, closure)
    first, minutes = offsets_of_days(ghi, days, step_h=step_h, arc=arc)
    if len(minutes) < _FEWEST_DAYS:
        return ClockFinding(None, closure)
    noon = times[first + round(12.0 / step_h)]
    whole = _median(minutes)
    summer = _summer_clock_min(noon, minutes, place.time_zone)
    return ClockFinding(whole, closure, () if whole.too_far else _years_off(noon, minutes), summer)


def offsets_of_days(ghi: FloatArray, first: IntArray, *, step_h: float, arc: SunArc) -> tuple[IntArray, FloatArray]:
    """For each day that starts at row ``first``: the shift at which E0 cos z fits its light best [min].

    Only the part of the day above 0.3 of its peak counts, so that a hill on the horizon weighs little. Days that no
    shift fits (broken cloud) are left out. Returns the rows kept and their shifts.
    """
    light, start, per_block = _blocks(ghi, first, step_h=step_h, arc=arc)
    weight = (light > 0.3 * light.max(axis=1, keepdims=True)).astype(np.float64)  # a NaN block counts as dark
    half_block = (per_block - 1) * step_h * 30.0
    coarse = np.stack([_likeness(light, weight, start, shift + half_block) for shift in _COARSE_MIN])
    about = _COARSE_MIN[int(np.argmax(np.nansum(coarse, axis=1)))]
    fits = np.stack([_likeness(light, weight, start, about + shift + half_block) for shift in _FINE_MIN])
    best, peak = _peaks(fits)
    good = (best > 0) & (best < len(_FINE_MIN) - 1)
    good &= fits.max(axis=0) >= max(_SMOOTH, float(np.quantile(fits.max(axis=0), 0.3)))
    return first[good], about + peak[good]


def offset_by_closure(beam: FloatArray, dni: FloatArray, *, arc: SunArc) -> Offset | None:
    """The shift at which ``beam`` = GHI - DHI meets DNI cos z [min]; None where the columns never close well."""
    with np.errstate(invalid="ignore"):
        rows = np.flatnonzero((dni > 300.0) & (beam > 50.0))
    if len(rows) < 50:
        return None
    rows = rows[:: max(1, len(rows) // 1500)]
    sun, wanted = arc.take(rows), beam[rows] / dni[rows]

    def miss(shift: float) -> float:
        return float(np.median(np.abs(wanted - sun.cos_zenith(shift))))

    coarse = min(_COARSE_MIN, key=miss)
    fine = min(coarse + np.arange(-20.0, 21.0, 2.0), key=miss)
    # 0.02: sound files leave 0.001 to 0.009; above it the columns are not of one sky and say nothing about clocks.
    if miss(fine) > 0.02 or miss(0.0) < 2.0 * miss(fine):
        return Offset(0.0, 0.0, len(rows)) if miss(0.0) <= 0.02 else None
    return Offset(float(fine), 0.0, len(rows))


def daily_clearness(ghi: FloatArray, *, step_h: float, arc: SunArc) -> tuple[FloatArray, BoolArray]:
    """Light of each solar day over that above the air, and which days are whole and have the sun above 10 degrees."""
    n_days = int(arc.day.max()) + 1
    known = np.isfinite(ghi)
    height = arc.cos_zenith()
    above = np.bincount(arc.day, np.maximum(height, 0.0) * arc.extra_w_m2, n_days)
    light = np.bincount(arc.day, np.where(known, ghi, 0.0), n_days)
    noon = np.zeros(n_days)
    np.maximum.at(noon, arc.day, height)
    whole = np.bincount(arc.day[known], minlength=n_days) * step_h > 23.5
    usable = whole & (noon > LOWEST_NOON_COS)
    return np.divide(light, above, out=np.zeros(n_days), where=above > 0), usable


def _clearest_days(times: pd.DatetimeIndex, ghi: FloatArray, *, step_h: float, arc: SunArc) -> IntArray:
    """First rows of the clearest whole days of each month of each year."""
    clearness, usable = daily_clearness(ghi, step_h=step_h, arc=arc)
    first = np.searchsorted(arc.day, np.arange(len(clearness)))
    usable &= first + round(24.0 / step_h) <= len(ghi)
    candidates = np.flatnonzero(usable)
    if not len(candidates):
        return candidates
    when = times[first[candidates]]
    month = np.asarray(when.year * 12 + when.month)
    order = candidates[np.lexsort((-clearness[candidates], month))]
    month = np.sort(month)
    rank = np.arange(len(month)) - np.searchsorted(month, month)
    return np.asarray(np.sort(first[order[rank < _DAYS_A_MONTH]]))


def _blocks(ghi: FloatArray, first: IntArray, *, step_h: float, arc: SunArc) -> tuple[FloatArray, SunArc, int]:
    """Light of days in blocks of at least a quarter hour (n_days, n_blocks), and the sun at each block's first row."""
    per_day = round(24.0 / step_h)
    per_block = next(n for n in range(max(1, round(_BLOCK_H / step_h)), per_day + 1) if per_day % n == 0)
    starts = first[:, None] + np.arange(0, per_day, per_block)
    light = ghi[starts[:, :, None] + np.arange(per_block)].mean(axis=2)
    return np.nan_to_num(light), arc.take(starts), per_block


def _likeness(light: FloatArray, weight: FloatArray, sun: SunArc, shift_min: float) -> FloatArray:
    """Weighted correlation of each day's light with E0 cos z under a shifted clock; (n_days,)."""
    model = np.maximum(sun.cos_zenith(shift_min), 0.0) * sun.extra_w_m2
    total = weight.sum(axis=1, keepdims=True)
    x = (light - (weight * light).sum(axis=1, keepdims=True) / total) * weight
    y = (model - (weight * model).sum(axis=1, keepdims=True) / total) * weight
    scale = np.sqrt((x * x).sum(axis=1) * (y * y).sum(axis=1))
    return np.asarray(np.divide((x * y).sum(axis=1), scale, out=np.zeros(len(scale)), where=scale > 0))


def _peaks(fits: FloatArray) -> tuple[IntArray, FloatArray]:
    """Index of the best shift of each day, and the top of the parabola through it and its neighbours [min]."""
    best = np.argmax(fits, axis=0)
    inner = np.clip(best, 1, len(fits) - 2)
    days = np.arange(fits.shape[1])
    left, mid, right = fits[inner - 1, days], fits[inner, days], fits[inner + 1, days]
    bend = 2.0 * (left - 2.0 * mid + right)
    step = _FINE_MIN[1] - _FINE_MIN[0]
    return best, _FINE_MIN[inner] + step * np.divide(left - right, bend, out=np.zeros(len(bend)), where=bend < 0)


def _median(minutes: FloatArray) -> Offset:
    middle = float(np.median(minutes))
    return Offset(middle, float(np.median(np.abs(minutes - middle))), len(minutes))


def _years_off(noon: pd.DatetimeIndex, minutes: FloatArray) -> tuple[int, ...]:
    years = np.asarray(noon.year)
    groups = {int(year): minutes[years == year] for year in np.unique(years)}
    return tuple(y for y, of in groups.items() if len(groups) > 1 and len(of) >= _GROUP_DAYS and _median(of).too_far)


def _summer_clock_min(noon: pd.DatetimeIndex, minutes: FloatArray, zone: str) -> float:
    """Minutes by which days under daylight saving differ from the rest, where that is about the hour itself."""
    saving = noon.tz_convert(ZoneInfo(zone)).map(lambda t: bool(t.dst())).to_numpy(dtype=bool)
    if min(saving.sum(), (~saving).sum()) < _GROUP_DAYS:
        return 0.0
    summer, rest = _median(minutes[saving]), _median(minutes[~saving])
    apart = summer.minutes - rest.minutes
    return apart if abs(apart) > 30.0 + 2.0 * (summer.error + rest.error) else 0.0
