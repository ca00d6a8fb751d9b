"""The audit finds each fault by the check that is meant for it, and says what would mend it."""

from __future__ import annotations

from functools import cache
from pathlib import Path

import numpy as np
import pandas as pd
import pvlib
import pytest

from sunbot.sky.quality import AuditCheck, audit_record, merged
from sunbot.types import Place

# Real typical years that ship with pvlib, read with pvlib alone: a warm one, and one at 55 N under maritime cloud.
FILES = {"warm": ("723170TYA.CSV", "America/New_York"), "maritime": ("703165TY.csv", "America/Anchorage")}
LIGHT = ["ghi", "dni", "dhi"]
COLUMNS = [*LIGHT, "temp_air", "wind_speed"]


@cache
def year(which: str) -> tuple[pd.DataFrame, Place]:
    """A sound typical year at UTC middles, and its place."""
    name, zone = FILES[which]
    path = Path(pvlib.__file__).parent / "data" / name
    table, head = pvlib.iotools.read_tmy3(path, coerce_year=2001, map_variables=True)
    middles = (table.index - pd.Timedelta(minutes=30)).map(lambda t: t.replace(year=2001)).tz_convert("UTC")
    table = table[COLUMNS].astype(float).set_axis(pd.DatetimeIndex(middles)).sort_index()
    return table, Place(head["latitude"], head["longitude"], head["altitude"], zone)


def failures(table: pd.DataFrame, which: str, **options: float) -> dict[str, AuditCheck]:
    checks = audit_record(table, step_h=1.0, place=year(which)[1], **options)
    return {check.code: check for check in checks if not check.passed}


@pytest.fixture(params=list(FILES))
def which(request: pytest.FixtureRequest) -> str:
    return str(request.param)


@pytest.fixture
def table(which: str) -> pd.DataFrame:
    return year(which)[0].copy()


def test_a_sound_year_passes_every_check(table: pd.DataFrame, which: str):
    """No false alarm, and each of the ten checks says something."""
    checks = audit_record(table, step_h=1.0, place=year(which)[1])
    assert [check.code for check in checks if not check.passed] == []
    assert len({check.code for check in checks}) == 10
    assert all(check.text.endswith(".") and not check.fatal for check in checks)


def test_a_sound_year_passes_with_global_light_alone(table: pd.DataFrame, which: str):
    """A record of ghi alone is enough, and its clock is still held against the sun."""
    assert failures(table[["ghi"]], which) == {}
    late = table[["ghi"]].set_axis(table.index + pd.Timedelta(minutes=30))
    assert failures(late, which)["clock"].shift_minutes == -30


@pytest.mark.parametrize("minutes", [30, -30, 60, -60, 15, -420])
def test_a_shifted_clock_is_refused_with_the_shift_that_mends_it(table: pd.DataFrame, which: str, minutes: int):
    """Stamps that are off by so many minutes fail the clock check alone; adding shift_minutes mends them."""
    wrong = table.set_axis(table.index + pd.Timedelta(minutes=minutes))
    found = failures(wrong, which)
    assert list(found) == ["clock"]
    assert found["clock"].fatal
    assert found["clock"].shift_minutes == -minutes
    assert f"shift_minutes = {-minutes}" in found["clock"].text
    mended = wrong.set_axis(wrong.index + pd.Timedelta(minutes=found["clock"].shift_minutes))
    assert failures(mended, which) == {}


def test_five_minutes_are_not_refused(table: pd.DataFrame, which: str):
    """A clock within 10 minutes passes."""
    assert failures(table.set_axis(table.index + pd.Timedelta(minutes=5)), which) == {}


def test_the_shift_already_applied_is_counted_in(table: pd.DataFrame, which: str):
    """A record under shift_minutes = 90 that is 30 minutes fast is told to write 60."""
    found = failures(table.set_axis(table.index + pd.Timedelta(minutes=30)), which, shift_now=90.0)
    assert "shift_minutes = 60" in found["clock"].text


def test_a_hill_in_the_west_is_no_wrong_clock(table: pd.DataFrame, which: str):
    """A station whose sun sets behind a hill of 20 degrees keeps its right clock."""
    place = year(which)[1]
    sun = pvlib.solarposition.get_solarposition(table.index, place.latitude, place.longitude)
    behind = (sun["azimuth"] > 180.0) & (sun["elevation"] < 20.0)
    table["ghi"] = table["ghi"].mask(behind, 0.9 * table["dhi"])
    assert failures(table[["ghi"]], which) == {}


def test_daylight_saving_in_the_stamps_is_named(table: pd.DataFrame, which: str):
    """Stamps that follow the clock on the wall fail the clock check, with the key that mends it and no single shift."""
    saving = [stamp.dst() for stamp in table.index.tz_convert(year(which)[1].time_zone)]
    worn = table.set_axis(table.index + pd.TimedeltaIndex(saving))
    worn = worn[~worn.index.duplicated()].sort_index()
    clock = failures(worn, which)["clock"]
    assert clock.fatal
    assert clock.shift_minutes is None
    assert f'stamps_in = "{year(which)[1].time_zone}"' in clock.text


def test_one_year_of_several_with_a_wrong_clock_is_named(table: pd.DataFrame, which: str):
    """Of three years, the one whose clock was wrong is named."""
    later = [table.index + pd.Timedelta(days=365 * n, minutes=40 * (n == 1)) for n in range(3)]
    record = pd.concat([table.set_axis(index) for index in later])
    record = record[~record.index.duplicated()].sort_index()
    clock = failures(record, which)["clock"]
    assert "except in 2002" in clock.text


def test_dni_split_under_a_wrong_clock_is_told_from_a_wrong_clock(table: pd.DataFrame, which: str):
    """Where ghi agrees with the sun and dni does not, closure fails and not the clock."""
    place = year(which)[1]
    wrong = pvlib.solarposition.get_solarposition(
        table.index + pd.Timedelta(minutes=60), place.latitude, place.longitude
    )["zenith"].to_numpy()
    split = pvlib.irradiance.erbs_driesse(table["ghi"].to_numpy(), wrong, table.index.day_of_year.to_numpy())
    found = failures(table.assign(dni=split["dni"], dhi=split["dhi"]), which)
    assert "clock" not in found
    assert found["closure"].fatal
    assert "60 min slow" in found["closure"].text


@pytest.mark.parametrize(
    ("factor", "unit"),
    [(1e-3, "kWh"), (3.6, "kJ/m2 in an hour"), (3.6e-3, "MJ"), (0.36, "J/cm2"), (0.0860, "cal/cm2"), (50.0, "")],
)
def test_another_unit_is_named(table: pd.DataFrame, which: str, factor: float, unit: str):
    """Light in another unit fails the unit check alone, with the unit where it is a known one."""
    table[LIGHT] *= factor
    found = failures(table, which)
    assert found["unit"].fatal
    assert unit in found["unit"].text
    assert not unit or list(found) == ["unit"]


def test_watt_hours_in_a_quarter_hour_step_are_named():
    """Wh/m2 in a quarter of an hour are a quarter of the watts."""
    table, place = year("warm")
    quarters = table[["ghi"]].resample("15min").interpolate() / 4.0
    found = {c.code: c for c in audit_record(quarters, step_h=0.25, place=place)}
    assert "Wh/m2 in a step" in found["unit"].text
    assert "multiply it by 4" in found["unit"].text


def test_a_stuck_week_is_found(table: pd.DataFrame, which: str):
    """One value held for a week in summer fails the stuck check alone, fatally."""
    table.iloc[150 * 24 + 20 : 157 * 24 + 20, 0] = 412.0
    found = failures(table, which)
    assert list(found) == ["stuck"]
    assert found["stuck"].fatal
    assert "7.0 days" in found["stuck"].text


@pytest.mark.parametrize("source", ["the day before", "the week before"])
def test_a_week_of_repeated_days_is_found(table: pd.DataFrame, which: str, source: str):
    """A week in which each day repeats the same day, or the week before, fails the stuck check alone."""
    week = table.iloc[149 * 24 : 150 * 24] if source == "the day before" else table.iloc[143 * 24 : 150 * 24]
    table.iloc[150 * 24 : 157 * 24] = np.tile(week.to_numpy(), (7 * 24 // len(week), 1))
    found = failures(table, which)
    assert list(found) == ["stuck"]
    assert found["stuck"].fatal
    assert "7 days repeat" in found["stuck"].text


def test_a_missing_fortnight_is_found(table: pd.DataFrame, which: str):
    """Rows left out and cells left empty for a fortnight fail the gaps check alone, with place and length."""
    hole = slice(90 * 24, 104 * 24)
    emptied = table.copy()
    emptied.iloc[hole] = np.nan
    for broken in (table.drop(table.index[hole]), emptied):
        found = failures(broken, which)
        assert list(found) == ["gaps"]
        assert found["gaps"].fatal
        assert "14.0 days" in found["gaps"].text
        assert f"{table.index[90 * 24]:%Y-%m-%d %H:%M}" in found["gaps"].text


def test_short_gaps_are_counted_and_pass(table: pd.DataFrame, which: str):
    """Three gaps of two hours pass, counted."""
    holes = np.concatenate([np.arange(first, first + 2) for first in (500, 3000, 6000)])
    checks = {c.code: c for c in audit_record(table.drop(table.index[holes]), step_h=1.0, place=year(which)[1])}
    assert all(check.passed for check in checks.values())
    assert "3 gaps" in checks["gaps"].text


def test_diffuse_for_global_is_found(table: pd.DataFrame, which: str):
    """GHI and diffuse exchanged fail the swapped check alone, fatally, with both names."""
    found = failures(table.rename(columns={"ghi": "dhi", "dhi": "ghi"}), which)
    assert list(found) == ["swapped"]
    assert found["swapped"].fatal
    assert "ghi holds dhi" in found["swapped"].text


def test_global_for_beam_is_found(table: pd.DataFrame, which: str):
    """GHI and DNI exchanged are found by their closure."""
    assert "ghi holds dni" in failures(table.rename(columns={"ghi": "dni", "dni": "ghi"}), which)["swapped"].text


def test_diffuse_above_global_is_found_without_a_beam_that_closes(table: pd.DataFrame, which: str):
    """Diffuse at twice the global light is refused, whatever the beam says."""
    found = failures(table.assign(dhi=2.0 * table["ghi"]), which)
    assert found["swapped"].fatal


@pytest.mark.parametrize("code", [9999.0, -999.0, 99999.0, -9999.0])
def test_fill_codes_are_found(table: pd.DataFrame, which: str, code: float):
    """A code for missing values in ten steps fails the fill-codes check alone, fatally."""
    table.iloc[2000:2010, 0] = code
    found = failures(table, which)
    assert list(found) == ["fill-codes"]
    assert found["fill-codes"].fatal
    assert "10 steps" in found["fill-codes"].text


def test_codes_the_reader_emptied_are_told_but_not_refused(table: pd.DataFrame, which: str):
    """Codes that are already empty cells are reported, not fatal."""
    checks = audit_record(table, step_h=1.0, place=year(which)[1], coded={"ghi": 2, "dni": 0})
    (found,) = (check for check in checks if not check.passed)
    assert (found.code, found.fatal) == ("fill-codes", False)
    assert "ghi has codes for missing values in 2 steps" in found.text


def test_999_watts_in_the_sun_are_light(table: pd.DataFrame, which: str):
    """999 W/m2 at noon is no code."""
    table.iloc[np.argmax(table["ghi"].to_numpy()), 0] = 999.0
    assert failures(table, which) == {}


@pytest.mark.parametrize(
    ("column", "value", "says"),
    [("ghi", 2500.0, "ghi up to 2500"), ("dni", 1700.0, "dni up to 1700"), ("ghi", -40.0, "ghi up to -40")],
)
def test_light_beyond_physical_limits_is_found(table: pd.DataFrame, which: str, column: str, value: float, says: str):
    """One impossible value fails the limits check; alone it moves no answer and is not fatal."""
    table.iloc[4000, table.columns.get_loc(column)] = value
    found = failures(table, which)
    assert list(found) == ["limits"]
    assert not found["limits"].fatal
    assert says in found["limits"].text


def test_kelvin_are_found(table: pd.DataFrame, which: str):
    """Temperatures in kelvin are beyond limits, fatally, with a hint."""
    found = failures(table.assign(temp_air=table["temp_air"] + 273.15), which)
    assert found["limits"].fatal
    assert "kelvin" in found["limits"].text


def test_dark_weeks_are_found(table: pd.DataFrame, which: str):
    """A week without light in spring is darker than any overcast; one day alone is told and not fatal."""
    week, day = table.copy(), table.copy()
    week.iloc[90 * 24 : 97 * 24, 0:3] = 0.0
    day.iloc[90 * 24 : 91 * 24, 0:3] = 0.0
    assert failures(week, which)["dark-days"].fatal
    assert not failures(day, which)["dark-days"].fatal


def test_a_lamp_at_night_is_found(table: pd.DataFrame, which: str):
    """A lamp of about 40 W/m2 over the sensor at night is found, by the night check alone."""
    place = year(which)[1]
    sun = pvlib.solarposition.get_solarposition(table.index, place.latitude, place.longitude)
    lamp = 40.0 + np.random.default_rng(1).random(len(table))
    found = failures(table.assign(ghi=table["ghi"].mask(sun["elevation"] < -15.0, lamp)), which)
    assert list(found) == ["night"]
    assert found["night"].fatal


def test_a_beam_of_another_station_is_found(table: pd.DataFrame, which: str):
    """A beam of other days fails closure."""
    wrong = np.roll(table["dni"].to_numpy(), 24 * 3)
    assert "closure" in failures(table.assign(dni=wrong), which)


def test_merged_keeps_the_worst_of_each_check():
    """Of several parts, each check gives its worst finding."""
    good, bad, worse = (AuditCheck("x", passed, fatal, "") for passed, fatal in ((1, 0), (0, 0), (0, 1)))
    assert merged([(good, bad), (worse, good), (bad, good)]) == (worse, bad)


def test_a_record_without_zone_is_a_callers_mistake():
    """Naive stamps are refused, not taken as UTC."""
    table, place = year("warm")
    with pytest.raises(ValueError, match="carry a zone"):
        audit_record(table.set_axis(table.index.tz_localize(None)), step_h=1.0, place=place)
