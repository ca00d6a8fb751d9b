"""Typical years: EPW written by hand, turned to the site's clock, and every way such a file can be wrong."""

from __future__ import annotations

from collections.abc import Callable
from pathlib import Path

import numpy as np
import pandas as pd
import pytest

from sunbot.errors import InputError
from sunbot.sky import reading_for, weather_for

HEAD = [
    "DESIGN CONDITIONS,0",
    "TYPICAL/EXTREME PERIODS,0",
    "GROUND TEMPERATURES,0",
    "HOLIDAYS/DAYLIGHT SAVINGS,No,0,0,0",
    "COMMENTS 1,invented",
    "COMMENTS 2,invented",
    "DATA PERIODS,1,1,Data,Sunday, 1/ 1,12/31",
]
YEARS = [1999, 2004, 1988, 2000, 1991, 1996, 2003, 1992, 1985, 1990, 2004, 1987]


@pytest.fixture
def epw_of(tmp_path: Path) -> Callable[..., str]:
    """Write a table of middles as EPW on the clock ``offset_h``; months of a typical year mix source years."""

    def write(table: pd.DataFrame, *, offset_h: float = 1.0, location: str | None = None, mix: bool = True) -> str:
        place = location or f"LOCATION,Invented,-,-,own,000000,47.3,8.1,{offset_h},540"
        middles = table.index + pd.Timedelta(hours=offset_h)
        rows = [
            f"{YEARS[b.month - 1] if mix else b.year},{b.month},{b.day},{b.hour + 1},60,?,{r.temp_air},5,80,95000,"
            f"0,0,300,{r.ghi},{r.dni},{r.dhi},0,0,0,0,180,{r.wind_speed}" + ",0" * 13
            for b, r in zip(middles, table.itertuples(), strict=True)
        ]
        (tmp_path / "year.epw").write_text("\n".join([place, *HEAD, *rows]) + "\n")
        return "year.epw"

    return write


@pytest.fixture
def year(site_of, invented_record) -> pd.DataFrame:
    return invented_record(site_of(), "2000-12-31T23:00", "2001-12-31T23:00")


def test_an_epw_comes_back_as_it_was(site_of, year, epw_of):
    """Hour 1 is the hour from 0 to 1 of the file's clock; mixed source years become one calendar of 2001."""
    reading = reading_for(site_of(file=epw_of(year)))
    assert reading.kind == "typical"
    assert reading.table.index.dtype == "datetime64[s, UTC]"
    pd.testing.assert_frame_equal(reading.table, year, check_freq=False)


@pytest.mark.parametrize(
    ("zone", "first"),
    [
        ("Europe/Zurich", "2000-12-31T23:30Z"),
        ("Europe/Athens", "2000-12-31T22:30Z"),
        ("Africa/Accra", "2001-01-01T00:30Z"),
        ("Asia/Kolkata", "2000-12-31T18:30Z"),
    ],
)
def test_the_year_is_turned_to_the_clock_of_the_site(site_of, year, epw_of, zone, first):
    """A file on another clock starts on 1 January of the site's; its rows keep their hour of the sun."""
    site = site_of(file=epw_of(year), time_zone=zone)
    table = reading_for(site).table
    assert table.index[0] == pd.Timestamp(first)
    assert len(table) == 8760
    assert (np.diff(table.index.asi8) == 3600).all()
    assert table["ghi"].sum() == pytest.approx(year["ghi"].sum())
    inside = table.index.intersection(year.index)
    pd.testing.assert_frame_equal(table.loc[inside], year.loc[inside], check_freq=False)


def test_a_clock_between_whole_hours(site_of, invented_record, epw_of):
    """A half-hour clock: the first hour of 1 January in India is 18:30 to 19:30 UTC."""
    place = (28.6, 77.2, 216.0, "Asia/Kolkata")
    year = invented_record(site_of(*place), "2000-12-31T18:30", "2001-12-31T18:30")
    location = "LOCATION,Invented,-,-,own,0,28.6,77.2,5.5,216"
    weather = weather_for(site_of(*place, file=epw_of(year, offset_h=5.5, location=location)))
    assert weather.times[0] == pd.Timestamp("2000-12-31T19:00Z")
    np.testing.assert_allclose(weather.table["ghi"], year["ghi"], atol=1e-9)


def test_a_typical_year_says_that_it_is_one(site_of, year, epw_of):
    """One year whatever number is asked for, its file named, and a caution that one year hides the bad ones."""
    weather = weather_for(site_of(file=epw_of(year)), years=50)
    assert weather.kind == "typical"
    assert weather.n_years == 1
    assert [caution.code for caution in weather.cautions] == ["one-year"]
    assert "year.epw" in weather.origin
    assert (weather.row == np.arange(8760)).all()


def test_leap_days_leave_no_hole(site_of, invented_record, epw_of):
    """One leap year keeps its 29 February as a record; without it, it is a typical year of 365 days."""
    leap = invented_record(site_of(), "2003-12-31T23:00", "2004-12-31T23:00")
    record = weather_for(site_of(file=epw_of(leap, mix=False)))
    assert record.kind == "record"
    assert len(record.table) == 8784
    dropped = leap[~((leap.index + pd.Timedelta("1h")).strftime("%m-%d") == "02-29")]
    typical = weather_for(site_of(file=epw_of(dropped, mix=False)))
    assert typical.kind == "typical"
    assert len(typical.table) == 8760
    assert not typical.table.isna().any().any()


def test_an_epw_of_many_years_is_a_record(site_of, invented_record, epw_of):
    """Rows whose own years run on keep them, leap day included."""
    three = invented_record(site_of(), "2002-12-31T23:00", "2005-12-31T23:00")
    weather = weather_for(site_of(file=epw_of(three, mix=False)), years=2)
    assert weather.kind == "record"
    assert weather.n_years == 2
    assert weather.times[0] == pd.Timestamp("2003-12-31T23:30Z")


def test_two_records_an_hour_are_half_hours(site_of, invented_record, epw_of):
    """Rows that share an hour follow each other within it."""
    fine = invented_record(site_of(), "2000-12-31T23:00", "2001-12-31T23:00", step="30min")
    reading = reading_for(site_of(file=epw_of(fine)))
    assert reading.step_h == 0.5
    pd.testing.assert_frame_equal(reading.table, fine, check_freq=False)


def test_fill_codes_and_short_gaps_are_filled_and_said(site_of, year, epw_of):
    """Two missing noons are filled by clearness, a missing temperature by a line; the cautions count them."""
    holed = year.copy()
    holed.iloc[4000:4002, :3] = 9999
    holed.iloc[500, 3] = 99.9
    weather = weather_for(site_of(file=epw_of(holed)))
    codes = {caution.code: caution.text for caution in weather.cautions}
    assert {"fill-codes", "gaps-filled", "one-year"} <= codes.keys()
    assert weather.table["ghi"].iloc[4000:4002].to_numpy() == pytest.approx(year["ghi"].iloc[4000:4002], rel=0.25)
    assert not weather.table.isna().any().any()


def test_a_long_gap_in_a_typical_year_is_refused(site_of, year, epw_of):
    """There is no other year to take: 100 h without light name the first of them."""
    holed = year.copy()
    holed.iloc[4000:4100, :3] = 9999
    with pytest.raises(InputError, match=r"year\.epw: ghi lacks \d+ h from 2001-06-16 .* only up to 3 h are filled"):
        weather_for(site_of(file=epw_of(holed)))


def test_a_decimal_comma_in_the_header_is_named(site_of, year, epw_of):
    """A comma in the time zone makes eleven fields of ten."""
    head = "LOCATION,Invented,-,-,own,000000,47.3,8.1,1,0,540"
    with pytest.raises(InputError, match=r"LOCATION\): it has 11 fields .* decimal comma"):
        weather_for(site_of(file=epw_of(year, location=head)))
    quoted = 'LOCATION,Invented,-,-,own,000000,47.3,8.1,"1,0",540'
    with pytest.raises(InputError, match="are not four numbers"):
        weather_for(site_of(file=epw_of(year, location=quoted)))


@pytest.mark.parametrize(
    ("place", "refused"),
    [((47.3, 8.1, 540.0), False), ((47.59, 8.1, 830.0), False), ((47.7, 8.1, 540.0), True), ((47.3, 8.1, 900.0), True)],
)
def test_a_header_of_another_place_is_refused(site_of, year, epw_of, place, refused):
    """Over 0.3 degrees or 300 m is another place, unless the site file says elsewhere = true."""
    site = site_of(*place, file=epw_of(year))
    if not refused:
        assert weather_for(site).place.latitude == place[0]
        return
    with pytest.raises(InputError, match="elsewhere = true"):
        weather_for(site)
    weather = weather_for(site_of(*place, file="year.epw", elsewhere=True))
    assert (weather.place.latitude, weather.place.altitude_m) == (47.3, 540.0)
    assert "elsewhere" in {caution.code for caution in weather.cautions}


def _broken(path: Path, change: Callable[[list[str]], list[str]]) -> None:
    path.write_text("\n".join(change(path.read_text().split("\n"))))


@pytest.mark.parametrize(
    ("change", "message"),
    [
        (lambda x: [*x[:20], x[19], *x[20:]], r"line 22: its hour stands twice"),
        (lambda x: [*x[:20], x[30], *x[20:30], *x[31:]], r"line 22: its hour comes after a later hour"),
        (lambda x: [*x[:20], x[20].replace(",1,1,", ",13,1,", 1), *x[21:]], "is no date"),
        (lambda x: [*x[:20], x[20].replace("1999", "soon", 1), *x[21:]], r"line 21: it cannot be read"),
        (
            lambda x: [*x[:20], x[20].replace(",95000,0,0,300,", ",95000,0,0,300,x", 1), *x[21:]],
            r"line 21: ghi: .*not a num",
        ),
        (lambda x: x[:7] + x[8:], "no DATA PERIODS line"),
        (lambda x: x[:8], r"no DATA PERIODS line|cannot be read"),
        (lambda x: [*x[:8], *(",".join(line.split(",")[:12]) for line in x[8:-1])], "its rows cannot be read"),
        (lambda x: ["LOCATION,a,b,c", *x[1:]], "it has 4 fields"),
        (lambda x: [x[0].replace("47.3", "470.3"), *x[1:]], "no place on Earth"),
        (lambda x: [x[0].replace("47.3", "nan"), *x[1:]], "not finite"),
    ],
)
def test_a_broken_epw_says_what_and_where(site_of, year, epw_of, tmp_path, change, message):
    """Each fault names the file and the line."""
    name = epw_of(year)
    _broken(tmp_path / name, change)
    with pytest.raises(InputError, match=message) as caught:
        weather_for(site_of(file=name))
    assert "year.epw" in str(caught.value)


@pytest.mark.parametrize(
    ("keys", "message"),
    [
        ({"file": "none.csv"}, "there is no file"),
        ({"file": "."}, "is a folder"),
        ({"file": "notes.txt"}, "files ending in .txt are not read"),
        ({"file": "pvlib-data:Altitude.h5"}, r"no weather file of the installed pvlib.*pvlib-data:723170TYA.CSV"),
        ({"file": "pvlib-data:../__init__.py"}, "no weather file of the installed pvlib"),
        ({"file": "pvlib-data:723170TYA.CSV", "label": "end"}, "label: it is for own CSV files"),
        ({"file": "pvlib-data:12839.tm2"}, "elsewhere = true"),
    ],
)
def test_a_file_that_cannot_be_meant_is_refused(site_of, tmp_path, keys, message):
    """A missing file, a folder, another kind, a path out of the package, another place: each says what is wrong."""
    (tmp_path / "notes.txt").write_text("nothing")
    with pytest.raises(InputError, match=message):
        weather_for(site_of(**keys))
