"""The single checks of the audit: a record in, one finding out. Each looks for one fault and names it once."""

from __future__ import annotations

import math
from collections.abc import Mapping
from dataclasses import dataclass
from itertools import permutations

import numpy as np

from ..types import BoolArray, FloatArray
from .clock_audit import ClockFinding, daily_clearness
from .record import LIGHT, Record, runs, stamp

SHORT_GAP_H = 3.0
"""Gaps up to this are filled by the reader; a longer one hides a part of a day. Common practice."""

DARKEST_OVERCAST = 0.01
"""Daily clearness below which no overcast lies. Common practice; the darkest day of ten sound years had 0.044."""

FILL_CODES = (-99.0, -99.9, -999.0, -9999.0, 99.9, 999.0, 9999.0, 99999.0, 32767.0, 65535.0)
"""What loggers and file formats write for "missing". Common practice."""

# Common practice: the coldest and hottest ever noted, and any hour's mean wind; one at rest may show a little under 0.
_BELIEVABLE = {"temp_air": (-90.0, 60.0), "wind_speed": (-0.5, 75.0)}
_NIGHT_OFFSET_W_M2 = -10.0
_HEAVY = 0.005  # share of a column from which on what is wrong moves an answer
_CLEAR_DAY = 0.75  # clearness of a clear day at sea level. Published: Allen et al., FAO paper 56 (1998), eq. 37
_UNITS = (
    ("kW/m2 or kWh/m2 in an hour", 1e-3, False),
    ("MJ/m2 in an hour", 3.6e-3, False),
    ("kJ/m2 in an hour", 3.6, False),
    ("J/cm2 in an hour", 0.36, False),
    ("cal/cm2 in an hour", 0.0860, False),
    ("micromol/(m2 s) of plant light", 2.04, False),
    ("Wh/m2 in a step", 1.0, True),
    ("kJ/m2 in a step", 3.6, True),
)


@dataclass(frozen=True)
class AuditCheck:
    """One check of a record.

    code : short stable word. passed : nothing found. fatal : found, and no answer on this record could be trusted.
    found : what was found, and where first. instead : completes the sentence "Write ..."; empty where passed.
    shift_minutes : what would mend a clock, where that is the fault.
    """

    code: str
    passed: bool
    fatal: bool
    found: str
    instead: str = ""
    shift_minutes: float | None = None

    @property
    def text(self) -> str:
        """What was found, where, and what to do."""
        return f"{self.found}. Write {self.instead}." if self.instead else f"{self.found}."


def _passed(code: str, found: str) -> AuditCheck:
    return AuditCheck(code, True, False, found)


def check_fill_codes(record: Record, coded: Mapping[str, int]) -> tuple[AuditCheck, Record]:
    """Numbers that stand for "missing"; the record comes back with them as NaN. ``coded``: those the reader met."""
    found, cleaned = [], {}
    for name, values in record.columns.items():
        mask = _coded(name, values)
        if mask.any():
            codes = ", ".join(f"{code:g}" for code in np.unique(values[mask])[:3])
            found.append(f"{name} has {codes} in {_steps(int(mask.sum()))} from {record.when(mask)}")
            cleaned[name] = np.where(mask, np.nan, values)
    known = [f"{name} has codes for missing values in {_steps(n)}" for name, n in coded.items() if n]
    if not found and not known:
        return _passed("fill-codes", "no numbers that stand for missing values"), record
    text, instead = "; ".join(found + known), "nothing in cells without a value"
    return AuditCheck("fill-codes", False, bool(found), text, instead), record.but(**cleaned)


def check_gaps(record: Record) -> AuditCheck:
    """Steps without light: missing rows and empty cells."""
    missing = np.isnan(record.ghi)
    starts, lengths = runs(missing)
    if not len(starts):
        return _passed("gaps", f"all {len(missing)} steps are there")
    longest = int(np.argmax(lengths))
    hours = float(lengths[longest] * record.step_h)
    where = f"the longest {_span(hours)} from {stamp(record.times[int(starts[longest])])}"
    count = "1 gap" if len(starts) == 1 else f"{len(starts)} gaps"
    text = f"{count} in ghi, {_span(float(missing.sum() * record.step_h))} in all, {where}"
    if hours <= SHORT_GAP_H:
        return _passed("gaps", f"{text}: short enough to be filled")
    return AuditCheck("gaps", False, True, text, "the light of a neighbour there, or years without such a gap")


def check_stuck(record: Record) -> tuple[AuditCheck, Record]:
    """A light that stands still, days repeated to the last digit, a temperature that rests for days.

    The record comes back without the light that stands still.
    """
    hours, still = _standing_still(record.ghi, record.step_h)
    found, fatal = [], False
    if len(hours):
        times = "once" if len(hours) == 1 else f"{len(hours)} times"
        found.append(f"ghi stands still {times}, up to {_span(float(hours.max()))}, first from {record.when(still)}")
        fatal = float(hours.sum()) > 24.0
        record = record.but(ghi=np.where(still, np.nan, record.ghi))
    repeated = _repeated_days(record)
    if repeated:
        found.append(f"{_days(len(repeated))} repeated to the last digit, first on {repeated[0]}")
        fatal = fatal or len(repeated) >= 3
    resting = _longest_rest_h(record.columns.get("temp_air"), record.step_h)
    if resting > 72.0:
        found.append(f"temp_air stands still for {_span(resting)}")
    if not found:
        return _passed("stuck", "no value stands still and no day repeats"), record
    return AuditCheck("stuck", False, fatal, "; ".join(found), "what was measured, or nothing, in those cells"), record


def check_swapped(record: Record) -> tuple[AuditCheck, Record]:
    """Diffuse above global, or three columns that close only under exchanged names; the record comes back put right."""
    both = record.beam_and_diffuse
    if both is None:
        return _passed("swapped", "no dni and dhi to compare with"), record
    names = _names_that_close(record)
    if names != LIGHT:
        wrong = ", ".join(f"{name} holds {real}" for name, real in zip(names, LIGHT, strict=True) if name != real)
        mended = {real: record.columns[name] for name, real in zip(names, LIGHT, strict=True)}
        text = f"columns are exchanged: {wrong}"
        return AuditCheck("swapped", False, True, text, "over each column what it holds"), record.but(**mended)
    above = np.nansum(np.maximum(both[1] - record.ghi, 0.0)) / max(float(np.nansum(record.ghi)), 1e-9)
    if above > 0.05:
        text = f"dhi exceeds ghi by {above:.0%} of all light, and it is a part of it"
        return AuditCheck("swapped", False, True, text, "global light under ghi and diffuse under dhi"), record
    return _passed("swapped", "diffuse light stays below global"), record


def check_unit(record: Record) -> tuple[AuditCheck, Record]:
    """Size of the clearest days against a clear sky; the record comes back in W/m2 as far as the unit is known."""
    clearness, usable = daily_clearness(record.ghi, step_h=record.step_h, arc=record.arc)
    days = clearness[usable]
    if not len(days):
        return _passed("unit", "no whole day with the sun above 10 degrees: cannot be told"), record
    top = float(np.quantile(days, 0.98))
    # A dull week may well stay below 0.3, two months of it do not; a thousandth is no weather.
    lowest = 0.30 if len(days) >= 60 else 0.02
    if lowest <= top <= 1.05:
        return _passed("unit", f"the clearest days bring {top:.2f} of the light above the air"), record
    text = f"the clearest days bring {top:.3g} of the light above the air, where clear days bring 0.6 to 0.8"
    named = [(unit, factor * (record.step_h if in_step else 1.0)) for unit, factor, in_step in _UNITS]
    unit, factor = min(named, key=lambda pair: abs(math.log(max(top, 1e-9) / _CLEAR_DAY / pair[1])))
    if not 0.75 < top / _CLEAR_DAY / factor < 1.33:
        return AuditCheck("unit", False, True, text, "light in W/m2, and the place it was measured at"), record
    mended = {name: record.columns[name] / factor for name in LIGHT if name in record.columns}
    turned = f"multiply it by {1.0 / factor:.4g}" if factor < 1.0 else f"divide it by {factor:.4g}"
    text, instead = f"{text}: it looks like {unit}", f"light in W/m2: {turned}"
    return AuditCheck("unit", False, True, text, instead), record.but(**mended)


def check_clock(finding: ClockFinding, *, zone: str, shift_now: float) -> AuditCheck:
    """The clock against the sun, in words; ``shift_now`` is the shift_minutes already applied."""
    if finding.daylight_saving:
        apart = _minutes(finding.daylight_saving)
        text = f"under daylight saving the clock is {apart} against the other months: the stamps wear it"
        return AuditCheck("clock", False, True, text, f'stamps_in = "{zone}"')
    if finding.years_off:
        years = ", ".join(map(str, finding.years_off))
        text = f"the clock agrees with the sun except in {years}"
        return AuditCheck("clock", False, True, text, "right stamps for those years, or leave them out")
    if finding.shift_min:
        wanted = shift_now + finding.shift_min
        text = f"the clock is {_minutes(finding.shift_min)} against the sun ({_evidence(finding)})"
        instead = f"shift_minutes = {wanted:g} in [weather], if place, time zone and label are right"
        return AuditCheck("clock", False, True, text, instead, wanted)
    if finding.by_days is None and finding.by_closure is None:
        return _passed("clock", "too few clear days to hold the clock against the sun")
    return _passed("clock", f"the clock agrees with the sun ({_evidence(finding)})")


def check_limits(record: Record) -> AuditCheck:
    """Values beyond what is physically possible.

    Source
    ------
    Published: Long & Dutton, BSRN Global Network recommended QC tests, V2.0 (2002), physically possible limits.
    The lower limit is wider, -10 W/m2: unventilated sensors cool at night (common practice).
    """
    lift, extra = np.maximum(record.arc.highest_in(record.step_h), 0.0) ** 1.2, record.arc.extra_w_m2
    most = {"ghi": 1.5 * extra * lift + 100.0, "dhi": 0.95 * extra * lift + 50.0, "dni": extra}
    found, weight = [], 0.0
    for name, values in record.columns.items():
        low, top = (_NIGHT_OFFSET_W_M2, most[name]) if name in most else _BELIEVABLE[name]
        beyond = (values > top) | (values < low)
        if beyond.any():
            worst = values[beyond][np.argmax(np.abs(values[beyond]))]
            hint = " (kelvin or Fahrenheit?)" if name == "temp_air" else ""
            n = _steps(int(beyond.sum()))
            found.append(f"{name} up to {worst:.4g}{hint} in {n} from {record.when(beyond)}")
            weight = max(weight, _share(name, values, beyond))
    if not found:
        return _passed("limits", "all values are physically possible")
    text = f"beyond physical limits: {'; '.join(found)}"
    return AuditCheck("limits", False, weight > _HEAVY, text, "what was measured, or nothing, in those cells")


def check_night(record: Record) -> AuditCheck:
    """Light while the sun is deep below the horizon."""
    light = (record.arc.highest_in(record.step_h) < -0.1) & (record.ghi > 10.0)
    if not light.any():
        return _passed("night", "no light at night")
    share = float(record.ghi[light].sum() / np.nansum(record.ghi))
    text = f"light at night in {_steps(int(light.sum()))} from {record.when(light)}, {share:.2%} of all"
    return AuditCheck("night", False, share > 0.01, text, "0 at night, after a look at clock, place and lamps")


def check_dark_days(record: Record) -> AuditCheck:
    """Days with less light than any overcast gives."""
    clearness, usable = daily_clearness(record.ghi, step_h=record.step_h, arc=record.arc)
    dark = usable & (clearness < DARKEST_OVERCAST)
    if not usable.any():
        return _passed("dark-days", "no whole day with the sun above 10 degrees: cannot be told")
    if not dark.any():
        darkest = float(clearness[usable].min())
        return _passed("dark-days", f"the darkest day has {darkest:.3f} of the light above the air")
    text = f"{_days(int(dark.sum()))} darker than any overcast, first from {record.when(dark[record.arc.day])}"
    return AuditCheck("dark-days", False, bool(dark.sum() >= 3), text, "what was measured, or nothing, on those days")


def check_closure(record: Record, finding: ClockFinding) -> AuditCheck:
    """GHI - DHI = DNI cos z, weighted by light, and dni and dhi under the same clock as ghi."""
    both = record.beam_and_diffuse
    miss = _closure_miss(record.ghi, both[0], both[1], record) if both is not None else math.nan
    instead = "no dni and dhi: they are then split from ghi"
    if math.isnan(miss):
        return _passed("closure", "no dni and dhi to compare with")
    if finding.split_off_min:
        text = f"ghi agrees with the sun, but dni and dhi are of a clock {_minutes(finding.split_off_min)}"
        return AuditCheck("closure", False, True, text, instead)
    text = f"global less diffuse light and the beam differ by {miss:.1%} of the light"
    if miss <= 0.10:  # ten sound hourly files leave 0.1 to 1 %, measured minutes up to 7 %
        return _passed("closure", text)
    return AuditCheck("closure", False, miss > 0.25, text, instead)


def _coded(name: str, values: FloatArray) -> BoolArray:
    """Cells that hold a fill code; 99.9 and 999 W/m2 are light by day, so there only codes no light can be count."""
    mask = np.isinf(values) | np.isin(values, FILL_CODES)
    low, top = (-90.0, 1500.0) if name in LIGHT else _BELIEVABLE[name]
    return np.asarray(mask & ((values < low) | (values > top)))


def _names_that_close(record: Record) -> tuple[str, ...]:
    """Which columns to take as ghi, dni, dhi so that they close best; the names as they are unless that is plain."""
    columns = record.columns
    miss = {
        names: _closure_miss(columns[names[0]], columns[names[1]], columns[names[2]], record)
        for names in permutations(LIGHT)
    }
    best = min(miss, key=lambda names: math.inf if math.isnan(miss[names]) else miss[names])
    plain = miss[best] < 0.08 and miss[LIGHT] > 0.3
    return best if plain else LIGHT


def _closure_miss(ghi: FloatArray, dni: FloatArray, dhi: FloatArray, record: Record) -> float:
    """Mean |GHI - DHI - DNI cos z| over mean GHI where the sun stands above 6 degrees."""
    height = record.arc.cos_zenith()
    rows = (height > 0.1) & np.isfinite(ghi + dni + dhi)
    light = float(np.abs(ghi[rows]).sum())
    return float(np.abs(ghi - dhi - dni * height)[rows].sum()) / light if light > 0 else math.nan


def _standing_still(ghi: FloatArray, step_h: float) -> tuple[FloatArray, BoolArray]:
    """Hours of each stretch over which light stands still, and the steps in them."""
    starts, lengths = runs((ghi[1:] == ghi[:-1]) & (ghi[1:] > 0))
    # Whole watts repeat three times in a row by chance at hourly steps; fine steps must stand still for many of them.
    long = (lengths + 1) * step_h >= (4.5 if step_h > 0.5 else 2.0)
    still: BoolArray = np.zeros(len(ghi), dtype=np.bool_)
    for first, n in zip(starts[long], lengths[long], strict=True):
        still[first : first + n + 1] = True
    return np.asarray((lengths[long] + 1) * step_h, dtype=np.float64), still


def _repeated_days(record: Record) -> list[str]:
    """Dates of days whose light equals an earlier day's in every step, at least five of them lit."""
    per_day = round(24.0 / record.step_h)
    n_days = len(record.ghi) // per_day
    days = np.nan_to_num(record.ghi[: n_days * per_day]).reshape(n_days, per_day)
    lit = np.flatnonzero(((days > 0).sum(axis=1) >= 5) & (days.max(axis=1) > 0.02 * days.max(initial=0.0)))
    seen: set[bytes] = set()
    repeated = []
    for day in lit:
        light = days[day].tobytes()
        if light in seen:
            repeated.append(f"{record.times[int(day) * per_day]:%Y-%m-%d}")
        seen.add(light)
    return repeated


def _longest_rest_h(values: FloatArray | None, step_h: float) -> float:
    if values is None:
        return 0.0
    _, lengths = runs(values[1:] == values[:-1])
    return float((lengths.max() + 1) * step_h) if len(lengths) else 0.0


def _share(name: str, values: FloatArray, beyond: BoolArray) -> float:
    """How much of a column the cells beyond the limits weigh."""
    if name not in LIGHT:
        return float(beyond.mean())
    return float(np.abs(values[beyond]).sum() / max(float(np.nansum(np.abs(values))), 1e-9))


def _evidence(finding: ClockFinding) -> str:
    days, closure = finding.by_days, finding.by_closure
    said = [] if days is None else [f"{days.n} clear days: {_minutes(days.minutes)}"]
    return "; ".join(said if closure is None else [*said, f"ghi, dhi and dni: {_minutes(closure.minutes)}"])


def _minutes(behind: float) -> str:
    """How a clock that is ``behind`` the sun by so many minutes runs."""
    return "right" if abs(behind) < 0.5 else f"{abs(behind):.0f} min {'slow' if behind > 0 else 'fast'}"


def _steps(n: int) -> str:
    return "1 step" if n == 1 else f"{n} steps"


def _days(n: int) -> str:
    return "1 day" if n == 1 else f"{n} days"


def _span(hours: float) -> str:
    return f"{hours / 24.0:.1f} days" if hours >= 48.0 else f"{hours:.3g} h"
