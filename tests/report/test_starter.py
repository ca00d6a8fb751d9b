"""Files to start from: copies of examples and commented files for a place."""

from __future__ import annotations

import re
import tomllib

import pytest

from sunbot.errors import InputError
from sunbot.inputs import keys, load_robot
from sunbot.inputs.robot import Robot
from sunbot.inputs.site import Climate, Site
from sunbot.report import starter
from sunbot.types import Place

PLACE = Place(47.3, 8.1, 540.0, "Europe/Zurich")
CLIMATE = Climate(ghi_kwh_m2_day=(1.5,) * 11 + (1.0,), temp_min_c=(2.0,) * 12, temp_max_c=(9.0,) * 12)


def files(**changes):
    said = {"name": 'The "hill"', "climate": CLIMATE, "provenance": "Invented.\nFor this test."}
    return starter.starter_files(PLACE, **{**said, **changes})


def test_the_starter_files_load_as_they_are(tmp_path):
    """What is written for a place is a sound deployment at that place, whatever its name."""
    starter.write_files(tmp_path / "new" / "folder", files())
    robot = load_robot(tmp_path / "new" / "folder" / "robot.toml")
    assert (robot.site.name, robot.site.latitude, robot.site.time_zone) == ('The "hill"', 47.3, "Europe/Zurich")
    assert robot.site.climate == CLIMATE


def test_a_starter_without_a_climate_or_with_a_weather_file_loads_too(tmp_path):
    """The climate may be left to the world map, the light may come from a file."""
    starter.write_files(tmp_path, files(climate=None, weather_file="tower.csv", provenance=""))
    site = load_robot(tmp_path / "robot.toml").site
    assert (site.climate, site.weather.source, site.weather.file) == (None, "file", "tower.csv")


def test_every_key_stands_in_the_starter_files_with_its_comment():
    """Each key of each table is there, set or commented out, with the comment of its field."""
    for text, model in zip(files().values(), (Site, Robot), strict=True):
        words = re.sub(r"\s*\n#\s*", " ", text)
        for part in [model, *(p for p in keys.parts_of(model).values() if p is not Site)]:
            for name, field in keys.keys_of(part).items():
                assert re.search(rf"^(# )?(\[*{name}\b|{name} = )", text, re.M) or name in keys.parts_of(part), name
                assert field.description in words, name


def test_commented_keys_are_sound_when_their_mark_is_removed(tmp_path):
    """A user who uncomments any one key has a file that still parses and knows the key."""
    site, robot = files().values()
    (tmp_path / "site.toml").write_text(site, encoding="utf-8")
    lines = robot.splitlines()
    top = lines.index("# [window]")
    hidden = [n for n, line in enumerate(lines) if re.match(r"# \w+ = ", line) and n < top and '"03-15"' not in line]
    assert len(hidden) > 40
    for number in hidden:
        if re.match(r"# (to|amps|traction|efficiency_curve) = ", lines[number]):
            continue  # stands for another key, or needs one more
        changed = [line.removeprefix("# ") if n == number else line for n, line in enumerate(lines)]
        (tmp_path / "robot.toml").write_text("\n".join(changed), encoding="utf-8")
        load_robot(tmp_path / "robot.toml")


def test_the_provenance_stands_in_the_site_file_as_comments_only():
    """Where the numbers come from can be read, and cannot smuggle in a key."""
    text = files(provenance="From a map.\nlatitude = 0\r\x85name = 3")["site.toml"]
    assert "# From a map." in text
    assert tomllib.loads(text)["latitude"] == 47.3


@pytest.mark.parametrize("name", starter.example_names())
def test_a_copied_example_loads(tmp_path, name):
    """Every example can be copied and read, and its files are readable by others as usual."""
    written = starter.copy_example(name, tmp_path / name)
    assert {path.name for path in written} >= {"site.toml", "robot.toml", "README.md"}
    assert load_robot(tmp_path / name / "robot.toml").watts > 0
    assert not list((tmp_path / name).glob(".sunbot-*"))


def test_an_unknown_example_lists_the_choices(tmp_path):
    """The nearest name comes first, nothing is written."""
    with pytest.raises(InputError, match=r"'mudflat' is no example\. Write one of mud-flat, canal-bank"):
        starter.copy_example("mudflat", tmp_path / "new")
    assert not (tmp_path / "new").exists()


@pytest.mark.parametrize("taken", ["site.toml", "robot.toml"])
def test_a_folder_with_a_deployment_is_refused(tmp_path, taken):
    """A folder that holds either file is left as it is."""
    (tmp_path / taken).write_text("mine", encoding="utf-8")
    with pytest.raises(InputError, match=rf"holds {taken} already"):
        starter.copy_example("orchard-row", tmp_path)
    assert [path.name for path in tmp_path.iterdir()] == [taken]
    assert (tmp_path / taken).read_text(encoding="utf-8") == "mine"


def test_other_files_of_the_folder_stay(tmp_path):
    """A README of the user's own is not replaced."""
    (tmp_path / "README.md").write_text("mine", encoding="utf-8")
    written = starter.copy_example("orchard-row", tmp_path)
    assert "README.md" not in {path.name for path in written}
    assert (tmp_path / "README.md").read_text(encoding="utf-8") == "mine"


def test_of_two_files_both_or_none_are_written(tmp_path):
    """Where the second file cannot be written, the first is taken back."""
    with pytest.raises(InputError, match=r"gone.* there is no folder"):
        starter.write_files(tmp_path, {"site.toml": "a", "gone/robot.toml": "b"})
    assert list(tmp_path.iterdir()) == []


def test_what_cannot_be_written_is_said(tmp_path):
    """A folder below a file is refused as the user's mistake."""
    (tmp_path / "file").write_text("", encoding="utf-8")
    with pytest.raises(InputError, match="cannot be made"):
        starter.write_files(tmp_path / "file" / "new", {"site.toml": ""})
