"""Reading site and robot files: what is right comes through, what is wrong is named with its remedy."""

from __future__ import annotations

import os
import re
from pathlib import Path

import pytest

from sunbot.errors import InputError
from sunbot.inputs import Robot, Site, load_robot, load_site, site_with_weather

SITES = Path(__file__).parents[2] / "sites"

SITE = """
name = "Test field"
latitude = 47.3
longitude = 8.1
altitude_m = 540
time_zone = "Europe/Zurich"
horizon = [[0, 5], [90, -3]]

[weather]
source = "climate"

[climate]
ghi_kwh_m2_day = [1, 2, 3, 4, 5, 6, 6, 5, 4, 3, 2, 1]
temp_min_c = 2
temp_max_c = [3, 5, 10, 14, 19, 22, 25, 24, 19, 14, 7, 4]
"""
ROBOT = """
name = "Test robot"
site = "site.toml"

[deployment]
from = "03-15"
to = "10-31"

[[panel]]
name = "deck"
watts = 40
vmp_v = 18.0
imp_a = 2.22
voc_v = 21.8
isc_a = 2.35
tilt_deg = 10

[controller]
kind = "mppt"

[battery]
chemistry = "lead-acid"
cells_in_series = 6
capacity_ah = 12

[[rail]]
name = "logic"
kind = "step-down"
volts = 5

[[load]]
name = "computer"
rail = "logic"
watts = 4
hours = [[9, 17]]
"""


@pytest.fixture
def folder(tmp_path: Path) -> Path:
    (tmp_path / "site.toml").write_text(SITE, encoding="utf-8")
    (tmp_path / "robot.toml").write_text(ROBOT, encoding="utf-8")
    return tmp_path


def refusal(folder: Path, file: str, old: str, new: str) -> InputError:
    """What is said when ``old`` in one of the files is replaced by ``new``."""
    path = folder / file
    text = path.read_text(encoding="utf-8")
    assert text.count(old) >= 1
    path.write_text(text.replace(old, new, 1), encoding="utf-8")
    with pytest.raises(InputError) as caught:
        load_robot(folder / "robot.toml")
    return caught.value


def test_a_sound_robot_file_comes_through(folder):
    """Values, defaults, defaults by chemistry and kind, and the site beside it are all there."""
    robot = load_robot(folder / "robot.toml")
    assert (robot.panels[0].watts, robot.loads[0].hours) == (40.0, ((9.0, 17.0),))
    assert (robot.battery.cutoff_soc, robot.battery.restart_soc) == (0.50, 0.60)
    assert robot.rails[0].dropout_v == 0.5
    assert robot.deployment is not None
    assert (robot.deployment.first, robot.deployment.last) == ((3, 15), (10, 31))
    assert robot.site.climate is not None
    assert robot.site.climate.temp_min_c == (2.0,) * 12
    assert robot.site.horizon == ((0.0, 5.0), (90.0, 0.0))
    assert robot.site.folder == str(folder.resolve())
    assert robot.battery.in_words == "lead-acid, 6 x 2.0 V = 12 V"


def test_a_robot_survives_the_round_trip_through_its_own_keys(folder):
    """What the model writes by the file's keys makes the same model again."""
    robot = load_robot(folder / "robot.toml")
    again = Robot.model_validate(robot.model_dump(by_alias=True))
    assert again == robot
    assert hash(again) == hash(robot)


@pytest.mark.parametrize(
    "path", sorted(SITES.glob("*/robot*.toml")), ids=lambda path: f"{path.parent.name}/{path.name}"
)
def test_every_example_deployment_is_sound(path):
    """The example deployments load, and say in their first line that they are invented."""
    assert load_robot(path).watts > 0
    for file in (path, path.with_name("site.toml")):
        assert re.match(r"# .*\binvented\b", file.read_text(encoding="utf-8"))


def test_a_site_is_the_same_in_another_folder(folder, tmp_path_factory):
    """Where a site file stands changes neither equality nor hash nor what is written of it."""
    elsewhere = tmp_path_factory.mktemp("elsewhere") / "site.toml"
    elsewhere.write_text(SITE, encoding="utf-8")
    here, there = load_site(folder / "site.toml"), load_site(elsewhere)
    assert here.folder != there.folder
    assert here == there
    assert hash(here) == hash(there)
    assert here.model_dump_json() == there.model_dump_json()
    assert here != here.model_copy(update={"latitude": 47.0})


def test_another_site_can_take_the_place_of_the_one_named(folder):
    """A path or a site given by the caller wins, also over a file that is not there."""
    (folder / "robot.toml").write_text(ROBOT.replace('"site.toml"', '"gone.toml"'), encoding="utf-8")
    (folder / "other.toml").write_text(SITE.replace("Test field", "Other field"), encoding="utf-8")
    assert load_robot(folder / "robot.toml", site=folder / "other.toml").site.name == "Other field"
    site = Site(name="Made", latitude=1.0, longitude=2.0, time_zone="UTC")
    assert load_robot(folder / "robot.toml", site=site).site == site


WRONG_ROBOT = {
    "below a bound": (
        "watts = 40",
        "watts = -40",
        r'panel 1 \("deck"\): watts: -40 is not above 0\. Write a number .*W',
    ),
    "outside a range": ("tilt_deg = 10", "tilt_deg = 110", r"tilt_deg: 110 is outside 0 to 90\. Write .* from 0 to 90"),
    "nan": ("watts = 40", "watts = nan", r"watts: nan is no finite number"),
    "infinity": ("capacity_ah = 12", "capacity_ah = inf", r"battery: capacity_ah: inf is no finite number"),
    "text for a number": ("watts = 40", 'watts = "40"', r'watts: "40" is no number\. Write 40 without quotes'),
    "true for a number": ("watts = 40", "watts = true", r"watts: true is no number\. Write a number"),
    "fraction of a cell": ("series = 6", "series = 6.0", r"cells_in_series: 6\.0 is no whole number"),
    "number for text": ('name = "deck"', "name = 3", r"panel 1: name: 3 is no text in quotes"),
    "empty name": ('name = "deck"', 'name = ""', r"panel 1: name: is empty"),
    "missing key": ("capacity_ah = 12", "", r"battery: capacity_ah: is missing\. Write .*e\.g\. capacity_ah = 12"),
    "unknown key": (
        "tilt_deg = 10",
        "tilt = 10",
        r"tilt: is no known key\. Write tilt_deg; the keys here are name, watts",
    ),
    "unknown key, nothing near": (
        "tilt_deg = 10",
        "tilt_deg = 10\nqqq = 1",
        r"qqq: is no known key\. Write one of name",
    ),
    "key of another table": (
        "tilt_deg = 10",
        "tilt_deg = 10\nhours_out = 1",
        r"hours_out: is no key .* under \[target\]",
    ),
    "key of the top": ("tilt_deg = 10", 'tilt_deg = 10\nheading = "roams"', r"heading: .*the first lines, above every"),
    "Python's name of a key": ("[[panel]]", "[[panels]]", r"panels: is no known key\. Write panel; "),
    "unknown choice": (
        '"mppt"',
        '"mpt"',
        r'controller: kind: "mpt" is not one of the choices\. Write "mppt"; the choices',
    ),
    "unknown chemistry": (
        '"lead-acid"',
        '"lead"',
        r'chemistry: "lead" .*"lead-acid", if these are 2\.0 V cells; the choices are "lifepo4" \(cells of 3\.2 V\)',
    ),
    "single brackets": ("[[panel]]", "[panel]", r"panel: is a single table\. Write \[\[panel\]\]"),
    "no table": ('"site.toml"', '"site.toml"\ntarget = 3', r"target: 3 is no table\. Write \[target\]"),
    "eleven values": ("tilt_deg = 10", f"tilt_deg = 10\ndirt_loss = {[0.1] * 11}", r"dirt_loss: has 11 values, not 12"),
    "one of twelve": (
        "tilt_deg = 10",
        f"tilt_deg = 10\ndirt_loss = {[0.1] * 11 + [2]}",
        r"dirt_loss: value 12 \(December\): 2 is outside 0 to 1",
    ),
    "across midnight": ("[[9, 17]]", "[[22, 6]]", r"hours: \[22, 6\] .*Write hours = \[\[22, 24\], \[0, 6\]\]\.$"),
    "no such hour": (
        "[[9, 17]]",
        "[[9, 25]]",
        r"hours: pair 1: \[9, 25\] is outside the day\. Write hours from 0 to 24",
    ),
    "overlapping hours": ("[[9, 17]]", "[[9, 17], [16, 18]]", r"hours: \[9, 17\] and \[16, 18\] overlap"),
    "half a pair": ("[[9, 17]]", "[[9]]", r"hours: value 1: \[9\] has too few values"),
    "month": ("watts = 4\n", "watts = 4\nmonths = [0]\n", r"months: value 1: 0 is outside 1 to 12"),
    "weekday": ("watts = 4\n", 'watts = 4\nweekdays = ["Mon"]\n', r'weekdays: value 1: "Mon" .*Write "mon"'),
    "no power": ("watts = 4\n", "", r'load 1 \("computer"\): watts: is missing, and so are amps and traction'),
    "two powers": (
        "watts = 4\n",
        "watts = 4\namps = 1\n",
        r"amps: stands beside watts.*Write only one of watts and amps",
    ),
    "no such rail": (
        'rail = "logic"',
        'rail = "logik"',
        r'rail: "logik" is no rail of this file\. Write rail = "logic"',
    ),
    "volts missing": ("volts = 5", "", r'rail 1 \("logic"\): volts: is missing; kind "step-down" needs it'),
    "volts of none": ('"step-down"', '"none"', r'volts: 5 is given for kind "none"'),
    "rail out of reach": (
        "volts = 5",
        "volts = 12",
        r'rail 1 \("logic"\): volts: 12 .*6 x 2\.0 V = 12 V.* 12\.25 V .*0\.5 V dropout.*kind = "step-up"',
    ),
    "step-up from above": ('"step-down"', '"step-up"', r'volts: 5 .*12\.85 V when full.*kind = "step-down"'),
    "data sheet voltages": ("voc_v = 21.8", "voc_v = 17", r"vmp_v: 18 is not below voc_v = 17"),
    "data sheet currents": ("isc_a = 2.35", "isc_a = 2.2", r"imp_a: 2\.22 is not below isc_a = 2\.2"),
    "data sheet power": ("watts = 40", "watts = 50", r"watts: 50 is not vmp_v x imp_a = 18 x 2\.22 = 39\.96"),
    "restart below cut-off": (
        "capacity_ah = 12",
        "capacity_ah = 12\nrestart_soc = 0.4",
        r"restart_soc: 0\.4 is not above .*0\.5",
    ),
    "leap day": ('"03-15"', '"02-29"', r'deployment: from: "02-29" comes only in leap years'),
    "no such day": (
        '"10-31"',
        '"31.10."',
        r'deployment: to: "31\.10\." is no day of the year\. Write month and day as MM-DD',
    ),
    "curve without rating": ('"mppt"', '"mppt"\nefficiency_curve = [[0, 0.8], [1, 0.9]]', r"rated_w: is missing"),
    "path that is none": ('"site.toml"', '"gone.toml"', r'site: "gone\.toml" leads to .*gone\.toml, where no file is'),
    "site that is no text": ('"site.toml"', "3", r"robot\.toml: site: 3 is no path\. Write the path of the site file"),
}


@pytest.mark.parametrize(("old", "new", "said"), WRONG_ROBOT.values(), ids=WRONG_ROBOT)
def test_a_wrong_robot_file_is_refused_with_key_and_remedy(folder, old, new, said):
    """The message names file and key, says what is wrong there and what to write instead."""
    error = refusal(folder, "robot.toml", old, new)
    assert any(re.search(said, str(fault)) for fault in error.faults), str(error)
    assert all(fault.where.startswith("robot.toml: ") for fault in error.faults)


WRONG_SITE = {
    "latitude": ("47.3", "470", r"site\.toml: latitude: 470 is outside -90 to 90\. Write .*e\.g\. latitude = 47\.3"),
    "longitude of the other side": ("8.1", "-118.1", r"longitude: -118\.1 does not fit the clock of Europe/Zurich"),
    "time zone": ("Europe/Zurich", "Europe/Zurig", r'"Europe/Zurig" is no time zone\. Write .*"Europe/Zurich"'),
    "city for a zone": ("Europe/Zurich", "zurich", r'time_zone: "zurich" is no time zone\. Write .*"Europe/Zurich"'),
    "folder for a zone": ("Europe/Zurich", "Europe", r'time_zone: "Europe" is no time zone'),
    "swapped temperatures": (
        "temp_min_c = 2",
        "temp_min_c = 4.5",
        r"temp_min_c: is above temp_max_c in January, December",
    ),
    "monthly sums": ("[1, 2,", "[31, 2,", r"ghi_kwh_m2_day: value 1 \(January\): 31 is outside 0 to 12"),
    "horizon in disorder": (
        "[[0, 5], [90, -3]]",
        "[[90, 5], [0, 3]]",
        r"do not rise\. Write horizon = \[\[0, 3\], \[90, 5\]\]",
    ),
    "horizon too high": ("[90, -3]", "[90, 95]", r"horizon: pair 2: value 2: 95 is outside -5 to 90"),
    "file without a name": ('"climate"', '"file"', r'weather: file: is missing; source "file" needs it'),
    "file without a source": (
        'source = "climate"',
        'file = "a.csv"',
        r'source: is missing although .*Write source = "file"',
    ),
    "file beside another source": (
        'source = "climate"',
        'source = "climate"\nfile = "a.csv"',
        r'weather: source: is "climate", and file = "a\.csv" would not be read\. Write source = "file", or no file',
    ),
    "sign of a fixed clock": ("Europe/Zurich", "Etc/GMT+1", r'time_zone: "Etc/GMT\+1" is 1 h behind UTC .*"Etc/GMT-1"'),
    "offset for a zone": (
        "Europe/Zurich",
        "UTC+1",
        r'"UTC\+1" is no time zone\. Write "Etc/GMT-1" for a clock 1 h ahead',
    ),
    "offset west for a zone": ("Europe/Zurich", "GMT-03:00", r'Write "Etc/GMT\+3" for a clock 3 h behind UTC'),
    "years missing": ('"climate"', '"nasa-power"', r"first_year: is missing; source \"nasa-power\" needs it"),
    "clock of the stamps": ('"climate"', '"climate"\nstamps_in = "Berlin"', r'stamps_in: "Berlin" is no clock'),
    "the reader's own key": ('name = "Test field"', 'name = "a"\nfolder = "x"', r"folder: is no known key"),
}


@pytest.mark.parametrize(("old", "new", "said"), WRONG_SITE.values(), ids=WRONG_SITE)
def test_a_wrong_site_file_is_refused_with_key_and_remedy(folder, old, new, said):
    """Mistakes of the site file are reported under its own name, also when a robot file led there."""
    error = refusal(folder, "site.toml", old, new)
    assert any(re.search(said, str(fault)) for fault in error.faults), str(error)
    assert all(fault.where.startswith("site.toml: ") for fault in error.faults)


SWAPPED = [(-75, 5), (-57, 4), (-24, 1), (8, 1), (13, 1), (30, 2), (77, 5), (139, 9), (151, 10)]


@pytest.mark.parametrize(("longitude", "hours"), SWAPPED)
def test_a_fixed_clock_with_its_sign_mistaken_is_found(longitude, hours):
    """The sun tells on which side of Greenwich a clock belongs; the right sign is accepted."""
    right, wrong = ("-", "+") if longitude > 0 else ("+", "-")
    Site(name="a", latitude=40.0, longitude=longitude, time_zone=f"Etc/GMT{right}{hours}")
    with pytest.raises(ValueError, match="the signs are the other way round"):
        Site(name="a", latitude=40.0, longitude=longitude, time_zone=f"Etc/GMT{wrong}{hours}")


# Published: the IANA time zone database; the offsets of standard and summer time that people keep there.
KEPT = [
    (-9.2, 1),
    (-9.2, 2),
    (-21.9, 0),
    (74.0, 8),
    (-68.3, -3),
    (-157.4, 14),
    (-172.0, 13),
    (179.0, 12),
    (-176.6, -10),
]


@pytest.mark.parametrize(("longitude", "hours"), KEPT)
def test_fixed_clocks_that_are_kept_somewhere_are_believed(longitude, hours):
    """Galicia in winter and summer, Iceland, western China, Ushuaia, Line Islands, Samoa, Fiji, Aleutians."""
    Site(name="a", latitude=10.0, longitude=longitude, time_zone=f"Etc/GMT{-hours:+d}" if hours else "Etc/GMT")


def test_another_source_on_the_command_line_leaves_no_file_behind(folder):
    """A site whose file was set aside is a sound site: it can be written out and read again."""
    site = Site(name="a", latitude=1.0, longitude=2.0, time_zone="UTC", weather={"source": "file", "file": "a.csv"})
    aside = site_with_weather(site, "clear-sky")
    assert (aside.weather.source, aside.weather.file) == ("clear-sky", None)
    assert Site.model_validate(aside.model_dump(by_alias=True)) == aside


LIGHT = [1.1, 1.9, 3.1, 4.3, 5.2, 5.8, 5.9, 5.0, 3.7, 2.2, 1.2, 0.9]
DAYS = [31, 28, 31, 30, 31, 30, 31, 31, 30, 31, 30, 31]
SLIPS = {
    "MJ": ("ghi_kwh_m2_day", [x * 3.6 for x in LIGHT], "each divided by 3.6 if these are MJ/m2 a day"),
    "sums": ("ghi_kwh_m2_day", [x * d for x, d in zip(LIGHT, DAYS, strict=True)], "days of its month"),
    "Wh": ("ghi_kwh_m2_day", [x * 1000 for x in LIGHT], "each divided by 1000 if these are Wh"),
    "kelvin": ("temp_max_c", [280.0 + x for x in LIGHT], "each less 273.15 if these are kelvin"),
    "Fahrenheit": ("temp_max_c", [70.0 + x for x in LIGHT], "degrees Fahrenheit"),
    "per cent": ("year_to_year", [15.0] * 12, "each divided by 100 if these are per cent"),
    "text": ("temp_max_c", ["3,5"] * 12, "one number for all months or a list of twelve"),
    "commas": ("ghi_kwh_m2_day", [1, 5] * 12, "twelve with decimal commas"),
}


@pytest.mark.parametrize(("key", "values", "said"), SLIPS.values(), ids=SLIPS)
def test_a_list_in_another_unit_is_one_mistake_that_names_the_unit(folder, key, values, said):
    """Twelve values off by one factor are told once, on one line."""
    text = re.sub(rf"^{key} = .*\n", "", SITE, flags=re.M)
    (folder / "site.toml").write_text(f"{text}{key} = {values}\n".replace("'", '"'), encoding="utf-8")
    with pytest.raises(InputError) as caught:
        load_site(folder / "site.toml")
    (fault,) = caught.value.faults
    assert fault.where == f"site.toml: climate: {key}"
    assert said in fault.instead


def test_a_panel_held_at_the_battery_needs_its_voltage(folder):
    """Without vmp_v a pwm or direct controller has nothing to go by; mppt has."""
    text = ROBOT.replace("vmp_v = 18.0\n", "")
    (folder / "robot.toml").write_text(text, encoding="utf-8")
    assert load_robot(folder / "robot.toml").panels[0].vmp_v is None
    for kind in ("pwm", "direct"):
        (folder / "robot.toml").write_text(text.replace('"mppt"', f'"{kind}"'), encoding="utf-8")
        with pytest.raises(InputError, match=rf'panel 1 \("deck"\): vmp_v: is missing; a "{kind}" controller'):
            load_robot(folder / "robot.toml")


def test_names_are_given_once(folder):
    """A second panel, rail or load of one name is refused, with a free name to take."""
    for part in ("panel", "rail", "load"):
        table = ROBOT[ROBOT.index(f"[[{part}]]") :].split("\n\n")[0]
        (folder / "robot.toml").write_text(f"{ROBOT}\n{table}\n", encoding="utf-8")
        with pytest.raises(InputError, match=rf"{part} 2 .*: name: .* is the name of {part} 1 already\. Write .* 2\""):
            load_robot(folder / "robot.toml")


@pytest.mark.parametrize(("second_v", "refused"), [(19.7, False), (19.9, True)])
def test_strings_on_one_tracker_agree_within_a_tenth(folder, second_v, refused):
    """Strings that differ by over 10 % need a tracker each; the limit is met from both sides."""
    second = f'\n[[panel]]\nname = "flank"\nwatts = 20\nvmp_v = {second_v}\ntilt_deg = 60\n'
    (folder / "robot.toml").write_text(ROBOT + second, encoding="utf-8")
    if refused:
        with pytest.raises(InputError, match=r'panel 2 \("flank"\): in_series: .* Write trackers = "per-panel"'):
            load_robot(folder / "robot.toml")
        text = (ROBOT + second).replace('kind = "mppt"', 'kind = "mppt"\ntrackers = "per-panel"')
        (folder / "robot.toml").write_text(text, encoding="utf-8")
    assert len(load_robot(folder / "robot.toml").panels) == 2


def test_an_ordinary_linear_regulator_is_refused_on_five_nickel_cells(folder):
    """Five NiMH cells sink to 5.95 V: 2 V of dropout leave less than 5 V, half a volt does not."""
    text = ROBOT.replace('"lead-acid"', '"nimh"').replace("series = 6", "series = 5").replace('"step-down"', '"linear"')
    (folder / "robot.toml").write_text(text, encoding="utf-8")
    with pytest.raises(
        InputError, match=r"5 x 1\.2 V = 6 V\) sinks to 5\.95 V .* less 2 V dropout, which leaves 3\.95"
    ):
        load_robot(folder / "robot.toml")
    (folder / "robot.toml").write_text(text.replace("volts = 5", "volts = 5\ndropout_v = 0.5"), encoding="utf-8")
    assert load_robot(folder / "robot.toml").rails[0].dropout_v == 0.5


def test_all_mistakes_are_reported_at_once_in_the_order_of_the_files(folder):
    """Mistakes of one key, of several keys together and of the site file stand in one report, none twice."""
    robot = (
        ROBOT.replace("watts = 40", "watts = -40")
        .replace("voc_v = 21.8", "voc_v = 17")
        .replace("cells_in_series = 6", "cells_in_series = 6\nrestart_soc = 0.1")
        .replace("[[9, 17]]", "[[22, 6]]")
        .replace('rail = "logic"', 'rail = "motors"')
    )
    (folder / "robot.toml").write_text(robot, encoding="utf-8")
    (folder / "site.toml").write_text(SITE.replace("47.3", "470"), encoding="utf-8")
    with pytest.raises(InputError) as caught:
        load_robot(folder / "robot.toml")
    assert [fault.where for fault in caught.value.faults] == [
        'robot.toml: panel 1 ("deck"): watts',
        'robot.toml: panel 1 ("deck"): vmp_v',
        "robot.toml: battery: restart_soc",
        'robot.toml: load 1 ("computer"): rail',
        'robot.toml: load 1 ("computer"): hours',
        "site.toml: latitude",
    ]


def test_what_leans_on_a_wrong_key_is_not_reported(folder):
    """A rail is not called out of reach of a battery whose chemistry is itself a mistake."""
    error = refusal(folder, "robot.toml", '"lead-acid"', '"led-acid"')
    assert [fault.where for fault in error.faults] == ["robot.toml: battery: chemistry"]


CALLED = {
    "li-ion": ["lipo", "LiPo", "li-po", "NMC", "lithium-ion", "liion", "Li-Ion"],
    "lifepo4": ["LFP", "LiFePO4"],
    "lead-acid": ["AGM", "gel", "SLA", "VRLA", "Pb", "lead acid"],
    "nimh": ["Ni-MH"],
}


@pytest.mark.parametrize(("meant", "name"), [(meant, name) for meant, names in CALLED.items() for name in names])
def test_another_name_of_a_chemistry_is_answered_as_advice(folder, meant, name):
    """The one it stands for, with the voltage of its cells to compare, and the choices."""
    said = str(refusal(folder, "robot.toml", '"lead-acid"', f'"{name}"'))
    assert re.search(rf'Write "{meant}", if these are \d\.\d V cells; the choices are', said), said


@pytest.mark.parametrize("name", ["nicd", "NiCd", "lithium", "lto", "nimc", "lipo4", "led-acid", "li", ""])
def test_a_chemistry_is_never_guessed_by_its_spelling(folder, name):
    """A cell charged as its near namesake can burn: all four stand there with their voltages."""
    said = str(refusal(folder, "robot.toml", '"lead-acid"', f'"{name}"'))
    assert 'Write what is printed on the cells, one of "lifepo4" (cells of 3.2 V), "li-ion" (cells of 3.6 V)' in said


WRONG_SIZES = {
    "mAh": (
        "capacity_ah = 12",
        "capacity_ah = 12000",
        r"battery: capacity_ah: 12000 Ah at 12 V is 144 kWh.* Write 12 if these were milliampere-hours\.$",
    ),
    "panel in mW": (
        "watts = 40\nvmp_v = 18.0\nimp_a = 2.22",
        "watts = 40000",
        r"watts: 40000 W is not believed for one panel.* Write 40 if these were milliwatts",
    ),
    "load in mW": ("watts = 4\n", "watts = 12000\n", r"load 1 .*watts: 12000 W is not believed.* Write 12 if"),
    "load in mA": (
        "watts = 4\n",
        "amps = 800\n",
        r"amps: 800 A is not believed.* Write 0\.8 if these were milliamperes",
    ),
    "panel wire in mm": (
        "tilt_deg = 10",
        "tilt_deg = 10\nwire = { length_m = 1000 }",
        # 2 x 1000 m x 13.3 ohm/km (IEC 60228, class 5, 1.5 mm2) x 2.22 A = 59.1 V
        r"panel 1 .*: wire: length_m: 1000 m of 1\.5 mm2.* would take 59\.1 V of the panel.s 18 V.* Write 1 if",
    ),
    "panel wire in mm, no data sheet": (
        "vmp_v = 18.0\nimp_a = 2.22\nvoc_v = 21.8\nisc_a = 2.35",
        "wire = { length_m = 800 }",
        r"wire: length_m: 800 m of 1\.5 mm2.* Write 0\.8 if these were millimetres",
    ),
    "panel wire in mm, beyond any wire": (
        "tilt_deg = 10",
        "tilt_deg = 10\nwire = { length_m = 1500 }",
        r"wire: length_m: 1500 is outside 0 to 1000\. Write metres: 1\.5 if these were millimetres",
    ),
    "rail wire in mm": (
        "volts = 5",
        "volts = 5\nwire = { length_m = 300, area_mm2 = 0.5 }",
        # 2 x 300 m x 39 ohm/km x 0.8 A = 18.7 V
        r'rail 1 \("logic"\): wire: length_m: 300 m of 0\.5 mm2.* 18\.7 V of the rail.s 5 V.* Write 0\.3 if',
    ),
    "volts for cells": (
        "series = 6",
        "series = 12",
        r"cells_in_series: 12 cells of lead-acid are 24 V, and the panels reach 21\.8 V .* the count of cells, 6 for",
    ),
}


@pytest.mark.parametrize(("old", "new", "said"), WRONG_SIZES.values(), ids=WRONG_SIZES)
def test_a_slip_of_the_unit_is_told_once_with_the_unit_it_may_have_been(folder, old, new, said):
    """One fault, with the key, the size it would be and what to write."""
    error = refusal(folder, "robot.toml", old, new)
    assert len(error.faults) == 1, str(error)
    assert re.search(said, str(error.faults[0])), str(error)


def test_large_but_possible_sizes_are_believed(folder):
    """The limits refuse slips, not large robots: 800 Ah, a panel of 700 W, 30 m of thick wire."""
    panel = "watts = 700\nvmp_v = 40.0\nvoc_v = 48.0\nwire = { length_m = 30, area_mm2 = 16 }"
    text = ROBOT.replace("watts = 40\nvmp_v = 18.0\nimp_a = 2.22\nvoc_v = 21.8\nisc_a = 2.35", panel)
    (folder / "robot.toml").write_text(text.replace("_ah = 12", "_ah = 800"), encoding="utf-8")
    assert load_robot(folder / "robot.toml").watts == 700
    (folder / "robot.toml").write_text(text.replace("series = 6", "series = 12"), encoding="utf-8")
    assert load_robot(folder / "robot.toml").battery.cells_in_series == 12


@pytest.mark.parametrize("which", ["robot", "site"])
@pytest.mark.parametrize(
    ("content", "said"),
    [
        (b"", "is empty"),
        (b"  \n\n", "is empty"),
        (b"# only words\n", "holds no keys"),
        (
            b'name = "a"\nlatitude = 4,7  # deg\n',
            r"is no TOML in line 2: a decimal comma in latitude = 4,7  # deg\. Write .*: latitude = 4\.7\.$",
        ),
        (
            b'name = "a"\nname = "b"\n',
            r'is no TOML in line 2: the key name stands twice in its table: name = "b"\. Write',
        ),
        (b"[climate]\na = 1\n[climate]\n", r"is no TOML in line 3: the table climate stands twice: \[climate\]\. "),
        (
            b"watts = 40 W\n",
            r"is no TOML in line 1: a unit behind the number in watts = 40 W\. Write .*: watts = 40\.$",
        ),
        ("name = \u201ca\u201d\n".encode(), "is no TOML in line 1: curly quotes in name = .* Write straight quotes"),
        (b'name = "a" "\\"\n', r'is no TOML in line 1 \(expected.*\): name = "a" "\\"\. Write key = value'),
        (b'name = "a"\n# caf\xe9\n', r"is not UTF-8 text \(byte 0xe9 in line 2\)"),
        (b"a = " + b"[" * 50_000, "holds lists or tables nested too deep"),
        (b"latitude = " + b"9" * 10_000, "holds a number too long to read"),
    ],
    ids=[
        "empty",
        "blank",
        "comments",
        "comma",
        "twice",
        "table",
        "unit",
        "curly",
        "words",
        "latin-1",
        "deep",
        "digits",
    ],
)
def test_what_is_no_toml_is_refused_with_the_line(folder, which, content, said):
    """A file that cannot be parsed is named, with the line where there is one."""
    (folder / f"{which}.toml").write_bytes(content)
    with pytest.raises(InputError, match=rf"^{which}\.toml: {said}"):
        load_robot(folder / "robot.toml")


def test_a_byte_order_mark_is_no_mistake(folder):
    """Editors that mark UTF-8 are not the user's fault."""
    (folder / "site.toml").write_bytes(b"\xef\xbb\xbf" + SITE.encode())
    assert load_site(folder / "site.toml").name == "Test field"


def test_what_is_no_file_is_refused(folder):
    """A missing file, a folder and a pipe are named, with the files that are there."""
    with pytest.raises(InputError, match=r"robo\.toml: is not there\. Write .* there is robot\.toml, site\.toml"):
        load_robot(folder / "robo.toml")
    with pytest.raises(InputError, match=r"is a folder\. Write the path of a file in it: robot\.toml, site\.toml"):
        load_robot(folder)
    os.mkfifo(folder / "pipe.toml")
    with pytest.raises(InputError, match="is no ordinary file"):
        load_site(folder / "pipe.toml")
    with pytest.raises(InputError, match="cannot be read"):
        load_site("a\0b.toml")


def test_ten_gigabytes_are_refused_without_reading(folder):
    """A file far too large is refused by its size; this one takes no room on the disk."""
    with (folder / "robot.toml").open("wb") as file:
        file.truncate(10_000_000_000)
    with pytest.raises(InputError, match=r"is 10,000 MB large.*\. Write the path of the right file"):
        load_robot(folder / "robot.toml")


def test_a_model_made_in_python_is_checked_too():
    """The rules hold for models that no file stands behind."""
    with pytest.raises(ValueError, match="does not fit the clock"):
        Site(name="a", latitude=36.0, longitude=79.9, time_zone="America/New_York")
