"""The audit on open data: silent on sound files, and right about one that is half an hour off."""

from __future__ import annotations

from collections.abc import Callable
from pathlib import Path

import pandas as pd
import pytest

from sunbot.calendar import standard_offset_h
from sunbot.errors import InputError
from sunbot.inputs.site import Site, WeatherSource
from sunbot.sky import audit_of, reading_for
from sunbot.sky.quality import AuditCheck, audit_record
from sunbot.types import Place

Fetch = Callable[..., Path]

DIYEPW = ("diyepw", "1.3.1", "894c06663648980c8d3eacef553ff1c97ddc2bbc1e38769573166d84b1f731cc")
PVDEG = ("pvdeg", "0.7.4", "fb898e6e611b88c5fd3a3ba580b903b3eb9ca663bd2c7d064c5bbe13999274dd")
PVANALYTICS = ("pvanalytics", "0.2.2", "4e5022f60aecb5948148d0ca72ca7bf849e5468c78da572e1af17bf944cf44f6")
GOLDEN = Place(39.742, -105.18, 1829.0, "America/Denver")


def site_of(file: str, *, folder: Path | str = "", zone: str) -> Site:
    """A site somewhere under that clock; the audit goes by where the file says it was taken."""
    source = WeatherSource(source="file", file=file, elsewhere=True)
    longitude = 15.0 * standard_offset_h(zone)
    return Site(name="Station", latitude=0.0, longitude=longitude, time_zone=zone, weather=source, folder=str(folder))


def failed(checks: tuple[AuditCheck, ...]) -> dict[str, str]:
    return {check.code: check.text for check in checks if not check.passed}


def audit_file(site: Site) -> dict[str, AuditCheck]:
    return {check.code: check for check in audit_of(reading_for(site), site)}


@pytest.mark.parametrize(
    ("file", "zone"),
    [
        ("723170TYA.CSV", "America/New_York"),
        ("703165TY.csv", "America/Anchorage"),
        ("12839.tm2", "America/New_York"),
    ],
)
def test_no_false_alarm_on_the_typical_years_that_ship_with_pvlib(file: str, zone: str):
    """Greensboro and Sand Point (TMY3) and Miami (TMY2): every check passes, and the clock was really held."""
    checks = audit_file(site_of(f"pvlib-data:{file}", zone=zone))
    assert failed(tuple(checks.values())) == {}
    assert "clear days" in checks["clock"].text


@pytest.mark.parametrize(
    ("member", "zone"),
    [
        ("USA_AK_Northway.AP.702910_TMY3.epw", "America/Anchorage"),
        ("USA_IL_Chicago.OHare.Intl.AP.725300_TMY3.epw", "America/Chicago"),
    ],
)
def test_no_false_alarm_on_sound_epw(registry_file: Fetch, member: str, zone: str):
    """Northway at 63 N, nearly dark and frozen in December, and Chicago: every check passes."""
    path = registry_file(*DIYEPW, f"diyepw/data/tmy_epw_files/{member}")
    checks = audit_file(site_of(path.name, folder=path.parent, zone=zone))
    assert failed(tuple(checks.values())) == {}
    assert "clear days" in checks["clock"].text


def test_an_epw_half_an_hour_off_is_found(registry_file: Fetch):
    """A file of that package whose light is half an hour off its labels is refused with the shift that mends it.

    Two ways agree on it to a minute: its clear days lie 29.9 min from the sun's, and its own global, diffuse and beam
    light close at 30 min (0.5 %) and not at 0 (5 %).
    """
    path = registry_file(*DIYEPW, "diyepw/data/tmy_epw_files/USA_CA_Mount.Shasta.725957_TMYx.epw")
    site = site_of(path.name, folder=path.parent, zone="America/Los_Angeles")
    clock = audit_file(site)["clock"]
    assert (clock.passed, clock.fatal, clock.shift_minutes) == (False, True, -30.0)
    mended = site.model_copy(update={"weather": site.weather.model_copy(update={"shift_minutes": -30.0})})
    assert failed(tuple(audit_file(mended).values())) == {}


@pytest.mark.parametrize("member", ["psm4_golden.csv", "psm4_miami.csv", "psm4_nyc.csv"])
def test_no_false_alarm_on_satellite_typical_years(registry_file: Fetch, member: str):
    """Satellite-derived typical years whose stamps name the middle: every check passes."""
    table = pd.read_csv(registry_file(*PVDEG, f"pvdeg/data/{member}"), index_col=0)
    stamps = pd.DatetimeIndex(pd.to_datetime(table.index.str[4:].map("2001{}".format), utc=True))
    place = {
        "psm4_golden.csv": Place(39.73, -105.18, 1820.0, "America/Denver"),
        "psm4_miami.csv": Place(25.77, -80.18, 0.0, "America/New_York"),
        "psm4_nyc.csv": Place(40.73, -74.02, 0.0, "America/New_York"),
    }[member]
    assert failed(audit_record(table.set_axis(stamps).sort_index(), step_h=1.0, place=place)) == {}


def test_no_false_alarm_on_a_measured_year(registry_file: Fetch):
    """The year 1999 of one satellite pixel near Golden, stamps in the middle of the hour: every check passes."""
    raw = pd.read_csv(registry_file(*PVDEG, "pvdeg/data/psm3.csv"), skiprows=2)
    stamps = pd.DatetimeIndex(pd.to_datetime(raw[["Year", "Month", "Day", "Hour", "Minute"]]))
    names = {"GHI": "ghi", "DNI": "dni", "DHI": "dhi", "Temperature": "temp_air", "Wind Speed": "wind_speed"}
    table = raw[list(names)].rename(columns=names).astype(float)
    table.index = stamps.tz_localize("Etc/GMT+7").tz_convert("UTC")
    assert failed(audit_record(table, step_h=1.0, place=Place(39.73, -105.18, 1820.0, "America/Denver"))) == {}


def test_no_false_alarm_on_minutes_of_a_pyranometer(registry_file: Fetch):
    """One day of one-minute global light: every check passes, and one day is said to be too few for the clock."""
    raw = pd.read_csv(registry_file(*PVANALYTICS, "pvanalytics/data/midc_bms_ghi_20220120.csv"), index_col=0)
    table = raw.set_axis(pd.DatetimeIndex(pd.to_datetime(raw.index, utc=True))).set_axis(["ghi"], axis=1)
    checks = audit_record(table, step_h=1 / 60, place=GOLDEN)
    assert failed(checks) == {}
    assert "too few clear days" in next(check.text for check in checks if check.code == "clock")


def test_no_false_alarm_on_five_minute_means_of_five_columns(registry_file: Fetch):
    """Four winter days of measured five-minute light, air and wind, with single holes: every check passes."""
    raw = pd.read_csv(registry_file(*PVANALYTICS, "pvanalytics/data/rmis_weather_data.csv"), index_col=0)
    names = {
        "Global Horizontal": "ghi",
        "Direct Normal": "dni",
        "Diffuse Horizontal": "dhi",
        "Ambient Temperature": "temp_air",
        "Wind Speed": "wind_speed",
    }
    stamps = pd.to_datetime(raw.index).tz_localize("Etc/GMT+7").tz_convert("UTC") - pd.Timedelta(seconds=150)
    assert (
        failed(audit_record(raw[list(names)].rename(columns=names).set_axis(stamps), step_h=1 / 12, place=GOLDEN)) == {}
    )


def test_the_one_fault_of_a_record_with_a_day_missing_is_its_gap(registry_file: Fetch):
    """The five-minute record beside plane-of-array minutes lacks over a day: that is found, and nothing else."""
    raw = pd.read_csv(registry_file(*PVANALYTICS, "pvanalytics/data/irradiance_RMIS_NREL.csv"), index_col=0)
    names = {"irradiance_ghi__7981": "ghi", "irradiance_dni__7982": "dni", "irradiance_dhi__7983": "dhi"}
    stamps = pd.to_datetime(raw.index).tz_localize("Etc/GMT+7").tz_convert("UTC") - pd.Timedelta(seconds=150)
    found = failed(audit_record(raw[list(names)].rename(columns=names).set_axis(stamps), step_h=1 / 12, place=GOLDEN))
    assert list(found) == ["gaps"]


def test_an_epw_header_with_a_decimal_comma_is_refused(registry_file: Fetch, tmp_path: Path):
    """A time zone written 5,5 splits the header into one field too many: refused, with what to write."""
    path = registry_file(*DIYEPW, "diyepw/data/tmy_epw_files/USA_IL_Chicago.OHare.Intl.AP.725300_TMY3.epw")
    head, rest = path.read_text(encoding="latin-1").split("\n", 1)
    (tmp_path / "comma.epw").write_text(head.replace("-6.0", "-6,0") + "\n" + rest, encoding="latin-1")
    with pytest.raises(InputError, match=r"decimal comma.*Write .*decimal point"):
        reading_for(site_of("comma.epw", folder=tmp_path, zone="America/Chicago"))


def test_quarter_hours_of_satellite_light_pass_up_to_where_they_end(registry_file: Fetch):
    """Three months of quarter-hour global light alone: the clock is held by its clear days, every check passes."""
    raw = pd.read_csv(registry_file(*PVANALYTICS, "pvanalytics/data/serf_east_psm3_data.csv"), index_col=0)
    table = raw[["ghi", "temp_air"]].set_axis(pd.DatetimeIndex(pd.to_datetime(raw.index, utc=True)))
    checks = audit_record(table, step_h=0.25, place=GOLDEN)
    assert failed(checks) == {}
    assert "clear days: " in next(check.text for check in checks if check.code == "clock")
