"""Whole years out of records: months of the standard clock, leap days, dropped years, the last N."""

from __future__ import annotations

import numpy as np
import pandas as pd
import pytest

from sunbot.errors import InputError
from sunbot.sky import weather_for
from sunbot.sky.whole_years import whole_years


def _codes(weather) -> set[str]:
    return {caution.code for caution in weather.cautions}


@pytest.fixture
def record(site_of, invented_record):
    return invented_record(site_of(), "2017-11-14", "2021-02-03")


def test_years_run_from_the_first_full_month_and_keep_the_leap_day(site_of, record, write_csv):
    """From mid-November 2017 to February 2021: three years from December on, 29 February 2020 among them."""
    weather = weather_for(site_of(file=write_csv(record), label="start"), years=50)
    assert weather.kind == "record"
    assert weather.n_years == 3
    assert len(weather.table) == (3 * 365 + 1) * 24
    local = weather.times + pd.Timedelta("1h")
    assert local[0] == pd.Timestamp("2017-12-01T00:30Z")
    assert local[-1] == pd.Timestamp("2020-11-30T23:30Z")
    assert ((local.month == 2) & (local.day == 29)).sum() == 24
    assert (weather.row == np.arange(len(weather.table))).all()
    assert not weather.table.isna().any().any()
    assert "fewer-years" in _codes(weather)


def test_the_last_years_are_taken(site_of, record, write_csv):
    """Of three whole years two are asked for: the later ones, and no word of too few."""
    weather = weather_for(site_of(file=write_csv(record), label="start"), years=2)
    assert weather.times[0] == pd.Timestamp("2018-11-30T23:30Z")
    assert "fewer-years" not in _codes(weather)
    assert weather.ref_times.equals(weather.times)


def test_a_year_with_a_long_gap_is_dropped_with_a_word(site_of, record, write_csv):
    """A missing fortnight costs its year and no other."""
    hole = (record.index >= "2019-06-01") & (record.index < "2019-06-15")
    weather = weather_for(site_of(file=write_csv(record[~hole]), label="start"))
    assert weather.n_years == 2
    dropped = next(caution for caution in weather.cautions if caution.code == "years-dropped")
    assert "2018-12 to 2019-11 (ghi lacks" in dropped.text
    days = np.unique(weather.times.tz_localize(None).to_numpy().astype("datetime64[Y]").astype(int) + 1970)
    assert list(days) == [2017, 2018, 2019, 2020]


def test_a_record_of_holes_is_refused(site_of, record, write_csv):
    """A week without light in every June leaves no year to take."""
    holed = record.copy()
    holed.loc[(holed.index.month == 6) & (holed.index.day < 9), ["ghi", "dni", "dhi"]] = np.nan
    with pytest.raises(InputError, match="none of its whole years is free of long gaps"):
        weather_for(site_of(file=write_csv(holed), label="start"))


def test_less_than_a_year_is_refused(site_of, invented_record, write_csv):
    """Eleven complete months are no year."""
    short = invented_record(site_of(), "2019-01-01", "2019-12-20")
    with pytest.raises(InputError, match=r"11 complete months, which is no whole year.*twelve complete months"):
        weather_for(site_of(file=write_csv(short), label="start"))


@pytest.mark.parametrize(
    ("place", "zone"),
    [
        ((47.3, 8.1), "Europe/Zurich"),
        ((28.6, 77.2), "Asia/Kolkata"),
        ((-33.9, 151.2), "Australia/Sydney"),
        ((-36.8, 174.8), "Pacific/Auckland"),
        ((47.6, -52.7), "America/St_Johns"),
        ((21.3, -157.9), "Pacific/Honolulu"),
        ((1.9, -157.4), "Pacific/Kiritimati"),
    ],
)
def test_one_year_of_utc_is_one_year_of_any_clock(site_of, invented_record, write_csv, place, zone):
    """The hours that a UTC year lacks of the local one come from its other end: nothing is lost, nothing is added."""
    site = site_of(*place, 20.0, zone, file="utc.csv", label="start")
    year = invented_record(site, "2019-01-01", "2020-01-01")
    write_csv(year, "utc.csv")
    weather = weather_for(site)
    clock = weather.times[[0, -1]].tz_convert(zone)
    dst = pd.Timedelta(clock[0].dst())
    assert clock[0] - dst - pd.Timestamp("2019-01-01", tz=zone) <= pd.Timedelta("30min")
    assert len(weather.table) == 8760
    assert weather.table["ghi"].sum() == pytest.approx(year["ghi"].sum(), rel=1e-4)
    assert "one-year" in _codes(weather)


def test_a_finer_step_is_the_same_year(site_of, invented_record, write_csv):
    """Ten-minute steps: six times the rows, whole days."""
    site = site_of(file="fine.csv", label="end")
    write_csv(invented_record(site, "2019-12-31T23:00", "2020-12-31T23:00", step="10min"), "fine.csv", label="end")
    weather = weather_for(site)
    assert weather.step_h == pytest.approx(1 / 6)
    assert len(weather.table) == 366 * 144
    assert weather.n_years == 1


def test_more_years_than_there_are_are_never_made_up():
    """A record of 24 months has two years however many are asked for."""
    times = pd.date_range("2018-01-01T00:30", periods=730 * 24, freq="h", tz="UTC", unit="s")
    table = pd.DataFrame({"ghi": np.arange(730.0 * 24)}, index=times)
    out, cautions = whole_years(table, step_h=1.0, zone="UTC", years=9, name="x")
    pd.testing.assert_frame_equal(out, table, check_freq=False)
    assert [caution.code for caution in cautions] == ["fewer-years"]
