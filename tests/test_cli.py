"""The command line: exit codes, where words go, wrong input answered in words."""

from __future__ import annotations

import errno
import json
import os
import shlex
import signal
import subprocess
import sys
import time
from pathlib import Path

import pytest
from click.testing import CliRunner

from sunbot.cli import cli

SITE = """
name = "Invented yard"
latitude = 46.0
longitude = 9.0
altitude_m = 300
time_zone = "Europe/Zurich"
snow_days = 0

[climate]
ghi_kwh_m2_day = [1.2, 2.0, 3.2, 4.3, 5.1, 5.8, 6.0, 5.2, 3.8, 2.4, 1.4, 1.0]
temp_min_c = [-2, -1, 2, 6, 10, 14, 16, 15, 12, 7, 2, -1]
temp_max_c = [5, 7, 12, 16, 20, 25, 27, 26, 22, 16, 9, 5]
year_to_year = 0.15
"""

ROBOT = """
name = "Invented box"
site = "site.toml"
heading_deg = 180

[[panel]]
name = "lid"
watts = 40
vmp_v = 18.0
imp_a = 2.22
voc_v = 21.8
isc_a = 2.35
tilt_deg = 40

[battery]
chemistry = "li-ion"
cells_in_series = 3
capacity_ah = 40
box_rise_c = 4

[[rail]]
name = "logic"
kind = "step-down"
volts = 5.0

[[load]]
name = "computer"
rail = "logic"
watts = 0.5
"""

WRONG = {
    "a negative wattage": (("watts = 40", "watts = -40"), 'panel 1 ("lid"): watts'),
    "a word for a number": (("watts = 40", 'watts = "forty"'), "watts"),
    "a yes for a number": (("watts = 40", "watts = true"), "watts"),
    "an unknown key": (("tilt_deg = 40", "tilt_degg = 40\ntilt_deg = 40"), "tilt_deg"),
    "a tilt past upright": (("tilt_deg = 40", "tilt_deg = 110"), "tilt_deg"),
    "no battery": (("[battery]", "[batttery]"), "battery"),
    "an unknown chemistry": (('"li-ion"', '"lithium"'), "chemistry"),
    "a rail that is none": (('rail = "logic"', 'rail = "logik"'), "logic"),
    "a step-down above the battery": (("volts = 5.0", "volts = 12.0"), "step-up"),
    "a load without power": (("watts = 0.5", ""), "watts"),
    "a load with two powers": (("watts = 0.5", "watts = 0.5\namps = 0.2"), "amps"),
    "hours that run backwards": (("watts = 0.5", "watts = 0.5\nhours = [[22, 6]]"), "[[22, 24], [0, 6]]"),
    "a month that is none": (("watts = 0.5", "watts = 0.5\nmonths = [13]"), "months"),
    "restart below cut-off": (
        ("capacity_ah = 40", "capacity_ah = 40\ncutoff_soc = 0.5\nrestart_soc = 0.3"),
        "restart_soc",
    ),
    "infinite capacity": (("capacity_ah = 40", "capacity_ah = inf"), "capacity_ah"),
    "a data sheet the wrong way round": (("voc_v = 21.8", "voc_v = 11.8"), "voc_v"),
    "a site file that is none": (('site = "site.toml"', 'site = "sit.toml"'), "sit.toml"),
    "a broken line": (("watts = 40", "watts = = 40"), "robot.toml"),
    "a site off the globe": (("latitude = 46.0", "latitude = 470.0"), "latitude"),
    "a time zone that is none": (("Europe/Zurich", "Europe/Zurihc"), "Europe/Zurich"),
    "temperatures swapped": (("temp_min_c = [-2,", "temp_min_c = [12,"), "temp_min_c"),
    "eleven months": (("1.4, 1.0]", "1.4]"), "ghi_kwh_m2_day"),
    "a weather file that is none": (("[climate]", '[weather]\nsource = "file"\nfile = "w.csv"\n\n[climate]'), "w.csv"),
}


@pytest.fixture
def folder(tmp_path):
    """A folder with a small robot and its site."""
    (tmp_path / "site.toml").write_text(SITE)
    (tmp_path / "robot.toml").write_text(ROBOT)
    return tmp_path


def run(*words):
    return CliRunner().invoke(cli, [str(word) for word in words])


def test_a_robot_that_lives_ends_with_0(folder):
    """Target met: exit 0, the answer on stdout, nothing written."""
    before = sorted(path.name for path in folder.iterdir())
    done = run("check", folder / "robot.toml", "--years", 3)
    assert done.exit_code == 0, done.output
    assert "target met" in done.stdout
    assert "alive in 3 of 3 years" in done.stdout
    assert sorted(path.name for path in folder.iterdir()) == before


def test_a_robot_that_dies_ends_with_3_and_is_told_a_way_out(folder):
    """Target not met: exit 3, so that a build job can gate on it."""
    (folder / "robot.toml").write_text(
        ROBOT.replace("watts = 40", "watts = 4").replace("imp_a = 2.22\n", "").replace("isc_a = 2.35\n", "")
    )
    done = run("check", folder / "robot.toml", "--years", 3)
    assert done.exit_code == 3, done.output
    assert "NOT met" in done.stdout


def test_json_is_one_document_and_nothing_else_on_stdout(folder):
    """Cautions go to stderr, the document alone to stdout; twice the same, byte for byte."""
    first, again = (run("check", folder / "robot.toml", "--years", 3, "--json") for _ in range(2))
    assert first.stdout == again.stdout
    document = json.loads(first.stdout)
    assert document["verdict"]["years"] == 3
    assert "[safety]" in first.stderr


@pytest.mark.parametrize("kind", WRONG)
def test_wrong_input_is_answered_in_words(folder, kind):
    """Exit 2, the key in the message on stderr, nothing on stdout, nothing written, no traceback."""
    (old, new), key = WRONG[kind]
    where = folder / ("robot.toml" if old in ROBOT else "site.toml")
    where.write_text(where.read_text().replace(old, new))
    before = {path.name: path.read_text() for path in folder.iterdir()}
    done = run("check", folder / "robot.toml", "--csv", folder / "out.csv", "--plot", folder / "out.png")
    assert done.exit_code == 2, done.output
    assert done.stdout == ""
    assert key in done.stderr
    assert "Write " in done.stderr
    assert "Traceback" not in done.stderr
    assert {path.name: path.read_text() for path in folder.iterdir()} == before


@pytest.mark.parametrize(
    ("words", "message"),
    [
        (("check", "nowhere.toml"), "nowhere.toml"),
        (("check", "{robot}", "--years", 0), "--years"),
        (("check", "{robot}", "--seed", -1), "--seed"),
        (("check", "{robot}", "--yeers", 3), "--yeers"),
        (("check", "{robot}", "--weather", "cloudy"), "clear-sky"),
        (("check", "{robot}", "--plot", "out.gif"), ".png"),
        (("check", "{robot}", "--csv", "no/such/folder/out.csv"), "no folder"),
        (("pick", "{robot}", "--watts", "ten:20:5"), "LOW:HIGH:STEP"),
        (("pick", "{robot}", "--battery-ah", "5000:60000"), "5:60 if these are milliampere-hours"),
        (("new", "{folder}", "--lat", 40, "--lon", 10), "site.toml"),
        (("new", "{folder}/new"), "--lat"),
        (("new", "{folder}/new", "--lat", 40, "--lon", -40), "--from-weather"),
        (("new", "{folder}/new", "--example", "moon-base"), "orchard-row"),
        (("new", "{folder}/new", "--example", "mud-flat", "--lat", 47, "--name", "x"), "no use for --lat, --name"),
        (("new", "{folder}/new", "--lat", 47, "--lon", 8, "--time-zone", "CET+1"), '--time-zone: "CET+1" is no time'),
        (("new", "{folder}/new", "--lat", 47, "--lon", 8, "--time-zone", "Asia/Tokyo"), "--lon: 8 does not fit"),
        (("new", "{folder}/new", "--lat", 47, "--lon", 8, "--altitude-m", 90000), "--altitude-m: 90000.0 is outside"),
        (("new", "{folder}/new", "--lat", 47, "--lon", 8, "--name", ""), "--name: is empty"),
        (("new", "{folder}/new", "--from-weather", "no.csv"), "--from-weather no.csv: there is no file"),
        (
            ("new", "{folder}/new", "--from-weather", "pvlib-data:723170TYA.CSV", "--time-zone", "Asia/Tokyo"),
            "--lon: -79.95 does not fit the clock of Asia/Tokyo",
        ),
        (("schema", "rover"), "robot"),
    ],
)
def test_wrong_options_are_answered_in_words(folder, words, message):
    """Exit 2 with the option or the choices on stderr, before any work."""
    names = {"robot": folder / "robot.toml", "folder": folder}
    done = run(*(word.format(**names) if isinstance(word, str) else word for word in words))
    assert done.exit_code == 2, done.output
    assert done.stdout == ""
    assert message in done.stderr


def test_csv_and_plot_are_written_when_asked_for(folder):
    """The steps and the picture stand where they were asked for, whole."""
    done = run("check", folder / "robot.toml", "--years", 1, "--csv", folder / "a.csv", "--plot", folder / "a.png")
    assert done.exit_code == 0, done.output
    lines = (folder / "a.csv").read_text().splitlines()
    assert lines[0] == ("time,ghi_w_m2,plane_w_m2,cell_temp_c,harvest_w,spilled_w,demand_w,served_w,soc,box_temp_c,on")
    assert len(lines) == 8761
    assert (folder / "a.png").read_bytes().startswith(b"\x89PNG")
    assert not list(folder.glob(".*"))


@pytest.mark.parametrize("named", ["robot.toml", "site.toml", "skyline.csv", "tower.txt", "other.toml"])
def test_no_file_the_question_is_read_from_is_overwritten(folder, named):
    """Robot, site, horizon and weather file, and the site of --site: exit 2 before any work, the file untouched."""
    (folder / "skyline.csv").write_text("azimuth,elevation\n0,3\n")
    (folder / "tower.txt").write_text("time,ghi\n")
    weather = '[weather]\nsource = "file"\nfile = "tower.txt"\n\n[climate]'
    (folder / "site.toml").write_text(
        SITE.replace("snow_days = 0", 'horizon_file = "skyline.csv"').replace("[climate]", weather)
    )
    (folder / "other.toml").write_text(SITE)
    before = {path.name: path.read_bytes() for path in folder.iterdir()}
    other = ["--site", folder / "other.toml"] if named == "other.toml" else []
    done = run("check", folder / "robot.toml", *other, "--csv", folder / named)
    assert done.exit_code == 2, done.output
    assert "is a file this question is read from" in done.stderr
    assert {path.name: path.read_bytes() for path in folder.iterdir()} == before


def test_an_answer_is_printed_although_its_file_could_not_be_written(folder, monkeypatch):
    """The disk is full at the end: the answer on stdout, the reason on stderr, exit 2."""
    from sunbot import writing

    def refuse(*_):
        raise OSError(errno.ENOSPC, "No space left on device")

    monkeypatch.setattr(writing.os, "replace", refuse)
    done = run("check", folder / "robot.toml", "--years", 1, "--csv", folder / "a.csv")
    assert done.exit_code == 2
    assert "Invented box" in done.stdout
    assert "a.csv: cannot be written (No space left on device)" in done.stderr
    assert not (folder / "a.csv").exists()


@pytest.mark.skipif(not Path("/dev/full").exists(), reason="only Linux has a device that is always full")
@pytest.mark.parametrize("buffered", [True, False])
@pytest.mark.parametrize(
    "words", ["check {robot} --years 1", "schema robot", "new {folder}/n --example mud-flat", "-h"]
)
def test_a_full_stdout_is_told_in_one_line(folder, words, buffered):
    """Exit 2, which is no verdict, and no traceback."""
    command = words.format(robot=folder / "robot.toml", folder=folder)
    done = subprocess.run(
        ["bash", "-c", f"'{sys.executable}' -m sunbot {command} > /dev/full"],
        capture_output=True,
        text=True,
        check=False,
        env={
            **{name: value for name, value in os.environ.items() if name != "PYTHONUNBUFFERED"},
            **({} if buffered else {"PYTHONUNBUFFERED": "1"}),
            "PYTHONPATH": os.pathsep.join(path for path in sys.path if path),
        },
    )
    assert done.returncode == 2, done.stderr
    assert done.stderr.count("\n") == 1, done.stderr
    assert "stdout: the answer cannot be written (no space left on device)" in done.stderr


def test_help_says_what_each_csv_holds():
    """The rows differ by question."""
    for command, rows in (("check", "steps behind it"), ("pick", "pairs of panel"), ("season", "fortnight")):
        assert rows in " ".join(run(command, "--help").stdout.split())


def test_new_writes_a_folder_that_runs_as_it_is(tmp_path):
    """A place on land gives files that check reads; the climate's coarseness is told with the answer."""
    done = run("new", tmp_path / "here", "--lat", -33.0, "--lon", 19.0, "--name", "Here")
    assert done.exit_code == 0, done.output
    checked = run("check", tmp_path / "here" / "robot.toml", "--years", 2)
    assert checked.exit_code in (0, 3), checked.output
    assert "[coarse-climate]" in checked.stdout


@pytest.mark.parametrize(
    ("latitude", "longitude"),
    [(52, 5), (60, 25), (40, -100), (-15, -56), (-34, 19), (9, 8), (28, 77), (36, 138), (-25, 134), (64, -147)],
)
def test_new_knows_ten_places_on_six_continents(tmp_path, latitude, longitude):
    """Each gives a robot that can be checked offline."""
    assert run("new", tmp_path / "p", "--lat", latitude, "--lon", longitude).exit_code == 0
    assert run("check", tmp_path / "p" / "robot.toml", "--years", 1).exit_code in (0, 3)


def test_new_from_weather_takes_the_climate_of_a_file(tmp_path):
    """The monthly means of a typical year that ships with pvlib, at the place its header names."""
    done = run("new", tmp_path / "w", "--from-weather", "pvlib-data:723170TYA.CSV", "--time-zone", "America/New_York")
    assert done.exit_code == 0, done.output
    assert "latitude = 36.1" in (tmp_path / "w" / "site.toml").read_text()
    sky = run("sky", tmp_path / "w" / "site.toml", "--years", 2)
    assert sky.exit_code == 0, sky.output
    assert "every check passed" in sky.stdout


def test_new_names_the_next_command_so_that_a_shell_can_run_it(tmp_path):
    """A folder with a blank in its name is one word for the shell."""
    done = run("new", tmp_path / "my place", "--example", "mud-flat")
    words = shlex.split(done.stdout.splitlines()[-1])
    assert words == ["next:", "sunbot", "check", str(tmp_path / "my place" / "robot.toml")]


def test_new_from_a_table_of_ones_own_says_how_else(tmp_path):
    """Which instant a stamp names must stand in a site file, which does not exist yet."""
    (tmp_path / "own.csv").write_text("time,ghi\n2020-01-01T00:00Z,0\n2020-01-01T01:00Z,0\n")
    done = run("new", tmp_path / "n", "--from-weather", tmp_path / "own.csv", "--lat", 47, "--lon", 8)
    assert done.exit_code == 2
    assert "must say label. Write --lat and --lon instead" in done.stderr


def test_schema_is_json():
    """Both files have one."""
    for what in ("robot", "site"):
        assert json.loads(run("schema", what).stdout)["type"] == "object"


def test_an_interrupt_ends_with_130_and_leaves_nothing(folder):
    """Ctrl-C in the middle: exit 130 within seconds, no half file."""
    words = [sys.executable, "-m", "sunbot", "check", str(folder / "robot.toml"), "--years", "500"]
    job = subprocess.Popen(
        [*words, "--csv", str(folder / "big.csv")],
        stdout=subprocess.PIPE,
        stderr=subprocess.PIPE,
        text=True,
        env={**os.environ, "PYTHONPATH": os.pathsep.join(path for path in sys.path if path)},
    )
    time.sleep(4.0)
    job.send_signal(signal.SIGINT)
    _, said = job.communicate(timeout=30)
    assert job.returncode == 130, said
    assert "Traceback" not in said
    assert sorted(path.name for path in folder.iterdir()) == ["robot.toml", "site.toml"]


def test_a_closed_pipe_is_no_error(folder):
    """``sunbot check ... | head -1`` leaves no traceback."""
    command = f"'{sys.executable}' -m sunbot check '{folder / 'robot.toml'}' --years 2 | head -1"
    done = subprocess.run(
        ["bash", "-c", command],
        capture_output=True,
        text=True,
        check=False,
        env={**os.environ, "PYTHONPATH": os.pathsep.join(path for path in sys.path if path)},
    )
    assert "Invented box" in done.stdout
    assert "Traceback" not in done.stderr


def test_every_example_loads_runs_and_says_it_is_invented():
    """The folders in sites/ are what the package offers, each robot runs, each file owns up to being invented."""
    from sunbot.report.starter import example_names

    sites = Path(__file__).parents[1] / "sites"
    folders = sorted(path.name for path in sites.iterdir() if path.is_dir())
    assert folders == sorted(example_names())
    for robot in sorted(sites.glob("*/robot*.toml")):
        for file in (robot, robot.with_name("site.toml")):
            assert "invented" in file.read_text(encoding="utf-8").splitlines()[0].lower(), file
        done = run("check", robot, "--years", 1)
        assert done.exit_code in (0, 3), f"{robot}: {done.output}"
