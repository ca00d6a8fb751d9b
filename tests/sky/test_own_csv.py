"""The user's own CSV: labels, clocks, and every way a file can be wrong."""

from __future__ import annotations

import numpy as np
import pandas as pd
import pytest

from sunbot.errors import InputError
from sunbot.sky import reading_for, weather_for
from sunbot.sky.own_csv import own_csv_text


@pytest.fixture
def year(site_of, invented_record):
    return invented_record(site_of(), "2018-12-31T23:00", "2019-12-31T23:00")


def test_three_labels_of_one_record_are_one_weather(site_of, year, write_csv):
    """Start, middle and end stamps of the same intervals give the same table to the last digit."""
    digests = set()
    for label in ("start", "middle", "end"):
        weather = weather_for(site_of(file=write_csv(year, label=label), label=label), years=1)
        digests.add(weather.digest)
        assert weather.times[0] == pd.Timestamp("2018-12-31T23:30Z")
    assert len(digests) == 1


def test_a_wrong_label_is_refused_by_the_sun(site_of, year, write_csv):
    """Stamps of the end read as those of the start are an hour off, and the clock audit says so."""
    with pytest.raises(InputError, match="clock"):
        weather_for(site_of(file=write_csv(year, label="end"), label="start"))


def test_shift_minutes_mends_a_clock(site_of, year, write_csv):
    """A logger 60 min fast is right again with shift_minutes = -60."""
    late = year.set_axis(year.index + pd.Timedelta("60min"))
    site = site_of(file=write_csv(late, label="start"), label="start", shift_minutes=-60.0)
    right = weather_for(site_of(file=write_csv(year, "right.csv"), label="start"))
    assert weather_for(site).digest == right.digest


@pytest.mark.parametrize("clock", ["UTC", "Etc/GMT-1", "Europe/Zurich", "Asia/Kolkata"])
def test_offsets_in_the_stamps_are_followed(site_of, year, write_csv, clock):
    """Any clock whose offset stands in the stamp, daylight saving included, names the same instants."""
    reading = reading_for(site_of(file=write_csv(year, clock=clock), label="start"))
    assert (reading.table.index == year.index).all()
    np.testing.assert_allclose(reading.table["ghi"], year["ghi"], atol=1e-9)


@pytest.mark.parametrize(("stamps_in", "clock"), [("UTC", "UTC"), ("+01:00", "Etc/GMT-1"), ("-03:30", None)])
def test_naive_stamps_take_the_clock_they_are_given(site_of, year, write_csv, stamps_in, clock):
    """Naive stamps are local to stamps_in."""
    moved = year.set_axis(year.index.tz_localize(None))
    offset = {"UTC": 0.0, "+01:00": 1.0, "-03:30": -3.5}[stamps_in]
    moved.index = (moved.index + pd.Timedelta(hours=offset)).tz_localize("UTC")
    reading = reading_for(site_of(file=write_csv(moved, clock=None), label="start", stamps_in=stamps_in))
    assert (reading.table.index == year.index).all()


def test_naive_stamps_in_a_zone_with_daylight_saving(site_of, year, write_csv, tmp_path):
    """A wall clock that repeats an hour in autumn and leaves one out in spring is followed through both."""
    local = year.index - pd.Timedelta("30min")
    text = local.tz_convert("Europe/Zurich").tz_localize(None).strftime("%Y-%m-%d %H:%M")
    year.assign(time=text).to_csv(tmp_path / "wall.csv", index=False)
    reading = reading_for(site_of(file="wall.csv", label="start", stamps_in="Europe/Zurich"))
    assert (reading.table.index == year.index).all()


def test_naive_stamps_without_a_clock_are_refused(site_of, year, write_csv):
    """Naive is never taken for UTC; the message says what to write."""
    with pytest.raises(InputError, match=r"carries no offset.*stamps_in = \"UTC\""):
        weather_for(site_of(file=write_csv(year, clock=None), label="start"))


def test_a_label_is_required(site_of, year, write_csv):
    """Which instant a stamp means is never guessed."""
    with pytest.raises(InputError, match=r"weather: label: it is missing"):
        weather_for(site_of(file=write_csv(year)))


TITLE = "time,ghi,temp_air,wind_speed\n"
ROW = "2020-01-01T{:02d}:{:02d}Z,{},5,2\n"


def _rows(*minutes: int, ghi: object = 10) -> str:
    return TITLE + "".join(ROW.format(m // 60, m % 60, ghi) for m in minutes)


@pytest.mark.parametrize(
    ("text", "message"),
    [
        ("", "it is empty"),
        (TITLE, "fewer than two rows"),
        (_rows(0, 60, 120, 120, 180), r"data row 4: 2020-01-01 02:00 UTC stands twice"),
        (_rows(0, 60, 180, 120, 240), r"data row 4: it goes back in time"),
        (_rows(0, 60, 120, 190, 250), "off the grid of its 60 min steps"),
        (_rows(0, 7, 14, 21), "its step is 7 min"),
        (_rows(0, 120, 240), "its step is 120 min"),
        (_rows(0, 60, ghi="much"), r"line 2: ghi: 'much' is not a number"),
        (_rows(0, 60).replace("ghi", "GHI"), r"no column ghi \(there is 'GHI'\)"),
        (_rows(0, 60).replace("time", "when"), "no column time"),
        (_rows(0, 60).replace(",", ";"), "separated by semicolons"),
        (_rows(0, 60).replace("temp_air", "ghi"), "ghi stands twice"),
        (_rows(0, 60).replace("T01:00Z", "T25:00Z"), r"line 3: '2020-01-01T25:00Z' is no time stamp"),
        (_rows(0, 60).replace("T01:00Z", "T01:00"), r"line 3: 2020-01-01T01:00 carries no offset, others do"),
        (_rows(0, 60, 120).replace("2020-01-01T02:00Z", ""), "line 4: it is empty"),
        (_rows(0, 60, 120).replace("2020-01-01T02", "2920-01-01T02"), "most steps are missing|is no time stamp"),
        (
            _rows(0, 60) + "2020-01-01T02:00Z,1,2,3,4,5,6\n",
            r"line 4: its rows cannot be read: 7 cells here, and 4 titles",
        ),
        (
            _rows(0, 60, ghi="12,5"),
            r"line 2: its rows cannot be read: more cells than the 4 titles\. .* a decimal point",
        ),
        ("# notes\n\n" + _rows(0, 60) + "2020-01-01T02:00Z,1,2,3,4\n", r"line 6: its rows cannot be read: 5 cells"),
        ("# notes\n" + _rows(0, 60, ghi="much"), r"line 3: ghi: 'much' is not a number"),
        ("# notes\n" + _rows(0, 60).replace("T01:00Z", "T25:00Z"), r"line 4: '2020-01-01T25:00Z' is no time stamp"),
        (_rows(0, 60) + '"2020-01-01T02:00Z,1,2,3\n', r"line 4: its rows cannot be read: a quotation mark is opened"),
        (
            _rows(0, 60).replace("temp_air", "temperature"),
            r"line 1: the column 'temperature' .* Write temp_air if it holds",
        ),
        (
            _rows(0, 60).replace("wind_speed", "Wind Speed (m/s)"),
            r"the column 'Wind Speed \(m/s\)' .* Write wind_speed if",
        ),
        (
            _rows(0, 60).replace("ghi", "ghi [W/m2]"),
            r"no column ghi \(there is 'ghi \[W/m2\]'\)\. Write ghi over it if",
        ),
        (_rows(0, 60).replace("ghi", "GHI_W_m2"), r"no column ghi \(there is 'GHI_W_m2'\)"),
        (_rows(0, 60).replace("time,", "Timestamp,"), r"no column time \(there is 'Timestamp'\)"),
        (_rows(0, 60).replace(",", "\t"), "separated by tabs"),
        ("PK\x03\x04 and so on", "a workbook of a spreadsheet program, or another archive"),
    ],
)
def test_a_wrong_file_says_what_where_and_what_to_write(site_of, tmp_path, text, message):
    """Each fault names the file, the line and the remedy."""
    (tmp_path / "wrong.csv").write_text(text)
    with pytest.raises(InputError, match=message) as caught:
        weather_for(site_of(file="wrong.csv", label="start"))
    assert "wrong.csv" in str(caught.value)
    assert "Write " in str(caught.value)
    assert "C error" not in str(caught.value)
    assert "\n" not in str(caught.value)


def test_notes_above_the_titles_and_other_columns_are_no_trouble(site_of, year, write_csv, tmp_path):
    """Lines with a # at the top, also with quotes in them, and columns that mean nothing here are passed over."""
    plain = reading_for(site_of(file=write_csv(year), label="start"))
    text = (tmp_path / "tower.csv").read_text()
    (tmp_path / "noted.csv").write_text(f'# the "tower, 2 m\n\n#\n{text}')
    noted = reading_for(site_of(file="noted.csv", label="start"))
    pd.testing.assert_frame_equal(noted.table, plain.table)
    year.assign(temp_module=30.0, rain=0.0, pressure=950.0).pipe(write_csv, "more.csv")
    more = reading_for(site_of(file="more.csv", label="start"))
    pd.testing.assert_frame_equal(more.table, plain.table)


def test_a_file_that_is_not_utf8_is_refused(site_of, tmp_path):
    """Bytes that are no text name the encoding that is asked for."""
    (tmp_path / "wrong.csv").write_bytes(TITLE.encode() + b"2020-01-01T00:00Z,\xff\xfe,1,1\n" * 4)
    with pytest.raises(InputError, match="not UTF-8"):
        weather_for(site_of(file="wrong.csv", label="start"))


def test_stamps_in_beside_offsets_is_refused(site_of, year, write_csv):
    """Two clocks for one file is a contradiction, not a choice of ours."""
    with pytest.raises(InputError, match="stamps_in: it is given, but the stamps"):
        weather_for(site_of(file=write_csv(year), label="start", stamps_in="UTC"))


def test_a_table_written_and_read_back_is_the_same(site_of, year, tmp_path):
    """What we write as own CSV comes back to the last digit."""
    (tmp_path / "kept.csv").write_text(own_csv_text(year))
    reading = reading_for(site_of(file="kept.csv", label="middle"))
    pd.testing.assert_frame_equal(reading.table, year, check_freq=False, check_names=False)
