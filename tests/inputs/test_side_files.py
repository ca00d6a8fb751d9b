"""Horizons and tracks that stand beside a site file, and the stops of a route: read, or refused with the line."""

from __future__ import annotations

from pathlib import Path

import pytest

from sunbot.errors import InputError
from sunbot.inputs import load_robot, load_site

SITE = """
name = "Bay"
latitude = 54.0
longitude = 10.0
time_zone = "Europe/Berlin"
"""
STOPS = """
[[stop]]
from = "03-01"
latitude = 54.0
longitude = 10.0
horizon = [[0, 5], [90, -2]]

[[stop]]
name = "North"
from = "09-10"
latitude = 58.5
longitude = 11.0
[stop.climate]
ghi_kwh_m2_day = 2.5
temp_min_c = 2
temp_max_c = 9
"""
SOLAR = """
name = "Boat"
site = "site.toml"
[[panel]]
name = "deck"
watts = 40
tilt_deg = 0
[battery]
chemistry = "lifepo4"
cells_in_series = 4
capacity_ah = 12
[[rail]]
name = "bus"
kind = "none"
[[load]]
name = "lamp"
rail = "bus"
watts = 1
hours = [[9, 12]]
clock = "solar"
"""


def site_of(tmp_path: Path, text: str, **files: str):
    for name, content in files.items():
        (tmp_path / f"{name}.csv").write_text(content, encoding="utf-8")
    (tmp_path / "site.toml").write_text(SITE + text, encoding="utf-8")
    return load_site(tmp_path / "site.toml")


def test_a_horizon_from_a_file_is_the_one_written_out(tmp_path):
    """Comments, empty lines, other columns and elevations below the level are no trouble."""
    file = "\ufeff# taken with a compass\nAzimuth, note, elevation\n\n0,wood,4.5\n120,sea,-1\n270,hill,11\n"
    site = site_of(tmp_path, 'horizon_file = "skyline.csv"\n', skyline=file)
    assert site.horizon == ((0.0, 4.5), (120.0, 0.0), (270.0, 11.0))
    assert site == site_of(tmp_path, "horizon = [[0, 4.5], [120, -1], [270, 11]]\n")


@pytest.mark.parametrize(
    ("content", "message"),
    [
        ("azimuth;elevation\n0;3\n", r"skyline\.csv: line 1: its cells are separated by semicolons"),
        ("azimuth,height\n0,3\n", r"skyline\.csv: line 1: no column elevation\. Write .* azimuth,elevation"),
        ("azimuth,elevation\n0,3\n370,2\n", r"line 3: azimuth: 370 is outside 0 to 360"),
        ("azimuth,elevation\n0,3\n90,high\n", r'line 3: elevation: "high" is no number'),
        ("azimuth,elevation\n0,3\n90,nan\n", r'line 3: elevation: "nan" is no number'),
        ("azimuth,elevation\n90,3\n\n45,2\n", r"line 4: azimuth: 45 does not come after 90"),
        ("azimuth,elevation\n0\n", r"line 2: has fewer cells than titles"),
        ("azimuth,elevation\n", r"holds no row below its titles"),
        ("", r"skyline\.csv: is empty"),
    ],
)
def test_a_wrong_horizon_file_is_told_by_its_line(tmp_path, content, message):
    """What is wrong, where, and what to write."""
    with pytest.raises(InputError, match=message):
        site_of(tmp_path, 'horizon_file = "skyline.csv"\n', skyline=content)


def test_all_mistakes_of_a_file_are_told_at_once(tmp_path):
    """Two wrong cells make two faults."""
    with pytest.raises(InputError) as told:
        site_of(tmp_path, 'horizon_file = "skyline.csv"\n', skyline="azimuth,elevation\n0,x\n400,2\n")
    assert len(told.value.faults) == 2


def test_a_side_file_that_is_not_there_is_told_by_its_key(tmp_path):
    """The site file and the key come first; a horizon twice is refused."""
    with pytest.raises(InputError, match=r"site\.toml: horizon_file: leads to .*nowhere\.csv, where no file is"):
        site_of(tmp_path, 'horizon_file = "nowhere.csv"\n')
    with pytest.raises(InputError, match="horizon_file: stands beside horizon"):
        site_of(tmp_path, 'horizon_file = "skyline.csv"\nhorizon = [[0, 3]]\n', skyline="azimuth,elevation\n0,1\n")


def test_stops_are_read_with_their_horizon_and_climate(tmp_path):
    """Each with its own; a horizon below the level hides nothing."""
    first, second = site_of(tmp_path, STOPS).stops
    assert first.first == (3, 1)
    assert first.horizon == ((0.0, 5.0), (90.0, 0.0))
    assert first.climate is None
    assert second.name == "North"
    assert second.climate is not None
    assert second.climate.ghi_kwh_m2_day == (2.5,) * 12


@pytest.mark.parametrize(
    ("old", "new", "message"),
    [
        ('"09-10"', '"02-10"', r'stop 2 \("North"\): from: "02-10" does not come after "03-01"'),
        ('"09-10"', '"02-29"', r'stop 2 \("North"\): from: "02-29" comes only in leap years'),
        ('"09-10"', '"autumn"', r'stop 2 \("North"\): from: "autumn" is no day of the year'),
        ("latitude = 58.5", "latitude = 585", r'stop 2 \("North"\): latitude: 585 is outside -90 to 90'),
        ("longitude = 11.0", "lon = 11.0", r'stop 2 \("North"\): lon: is no known key'),
        ("temp_max_c = 9", "temp_max_c = 0", r'stop 2 \("North"\): climate: temp_min_c: is above temp_max_c'),
        ("[[stop]]", '[weather]\nsource = "file"\nfile = "a.epw"\n[[stop]]', r'weather: source: "file" is the weather'),
        ("[[stop]]", 'track = "a.csv"\n[[stop]]', r"track: stands beside stop"),
    ],
)
def test_wrong_stops_are_told(tmp_path, old, new, message):
    """By number and name."""
    assert old in STOPS
    with pytest.raises(InputError, match=message):
        site_of(tmp_path, STOPS.replace(old, new, 1))


def test_a_track_makes_stops_in_the_order_of_the_year(tmp_path):
    """Dates with a year may run over New Year; altitude is read where there is a column for it."""
    track = "date,latitude,longitude,altitude_m\n2023-10-01,54,10,3\n2024-01-15,55,11,0\n2024-02-29,56,12,9\n"
    stops = site_of(tmp_path, 'track = "track.csv"\n', track=track).stops
    assert [(s.start, s.latitude, s.altitude_m) for s in stops] == [
        ("01-15", 55.0, 0.0),
        ("02-28", 56.0, 9.0),
        ("10-01", 54.0, 3.0),
    ]


@pytest.mark.parametrize(
    ("rows", "message"),
    [
        ("2023-10-01,54,10\n2023-09-01,55,10", r'line 3: date: "2023-09-01" does not come after "2023-10-01"'),
        ("2023-10-01,54,10\n2024-10-01,55,10", r"over more than one year"),
        ("2023-10-01,54,10\n11-01,55,10", r"some dates have a year and some have none"),
        ("1 Oct,54,10\n2 Oct,54,10", r'line 2: date: "1 Oct" is no date'),
        ("10-01,94,10\n10-02,54,190", r"line 2: latitude: 94 is outside -90 to 90\.[^\n]*\n.*line 3: longitude: 190"),
        ("\n".join(f"{m:02d}-{d:02d},54,10" for m in range(1, 13) for d in range(1, 36)), "420 rows, at most 400"),
    ],
)
def test_a_wrong_track_is_told_by_its_line(tmp_path, rows, message):
    """What is wrong, where, and what to write."""
    with pytest.raises(InputError, match=message):
        site_of(tmp_path, 'track = "track.csv"\n', track=f"date,latitude,longitude\n{rows}\n")


def test_a_robot_on_a_route_has_no_window_and_no_single_solar_time(tmp_path):
    """Both are refused by name."""
    site_of(tmp_path, STOPS)
    window = "[window]\nazimuth_deg = 180\nwidth_m = 1\nheight_m = 1\n"
    (tmp_path / "robot.toml").write_text(SOLAR + window, encoding="utf-8")
    with pytest.raises(InputError) as told:
        load_robot(tmp_path / "robot.toml")
    text = str(told.value)
    assert 'load 1 ("lamp"): clock: "solar" is the time of one meridian' in text
    assert "window: is given, and the site file has a route" in text


HEADINGS = [
    ('[[0, 9, "fixed"]]', r'headings: value 1: \[0, 9, "fixed"\] does not say where the nose points'),
    ('[[0, 9, "roam"]]', r'headings: value 1: value 3: "roam" is not one of the choices\. Write "roams"; the choices'),
    ('[[22, 6, "fixed", 90]]', r'headings = \[\[22, 24, "fixed", 90\], \[0, 6, "fixed", 90\]\]'),
    ("[[0, 9]]", r"headings: pair 1: \[0, 9\] has too few values"),
    ('[[0, 9, "fixed", 1000]]', r"headings: value 1: value 4: 1000 is outside -360 to 360"),
    ('[[0, 30, "roams"]]', r'headings: value 1: \[0, 30, "roams"\] is outside the day'),
]


@pytest.mark.parametrize(("rows", "message"), HEADINGS)
def test_wrong_headings_by_hours_name_the_key(tmp_path, rows, message):
    """In the words of the file."""
    site_of(tmp_path, "")
    text = f"headings = {rows}\n" + SOLAR
    (tmp_path / "robot.toml").write_text(text, encoding="utf-8")
    with pytest.raises(InputError, match=message):
        load_robot(tmp_path / "robot.toml")


@pytest.mark.parametrize(
    ("rows", "message"),
    [
        ("[[20, 17, 60]]", r"tilt_hours = \[\[20, 24, 60\], \[0, 17, 60\]\]"),
        ("[[8, 17, 100]]", r"tilt_hours: value 1: value 3: 100 is outside 0 to 90"),
        ("[[8, 17, 60], [16, 18, 40]]", r"tilt_hours: \[8, 17, 60\] and \[16, 18, 40\] overlap"),
    ],
)
def test_wrong_tilts_by_hours_name_the_key(tmp_path, rows, message):
    """In the words of the file, with the panel they belong to."""
    site_of(tmp_path, "")
    text = SOLAR.replace("tilt_deg = 0", f"tilt_deg = 0\ntilt_hours = {rows}")
    (tmp_path / "robot.toml").write_text(text, encoding="utf-8")
    with pytest.raises(InputError, match=rf'panel 1 \("deck"\): .*{message}'):
        load_robot(tmp_path / "robot.toml")
