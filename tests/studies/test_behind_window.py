"""What a window gives a robot, and how far from the glass it can live."""

from __future__ import annotations

import json
from dataclasses import replace
from pathlib import Path

import numpy as np
import pytest

from sunbot.errors import InputError
from sunbot.inputs import load_robot
from sunbot.sky import weather_for
from sunbot.studies.behind_window import behind_window
from sunbot.studies.chain import Chain
from sunbot.studies.checking import check

TENDER = Path(__file__).parents[2] / "sites" / "winter-garden" / "robot.toml"


@pytest.fixture(scope="module")
def tender():
    robot = load_robot(TENDER)
    return robot, weather_for(robot.site, years=2)


@pytest.fixture(scope="module")
def result(tender):
    robot, weather = tender
    return behind_window(robot, weather=weather, years=2, distances_m=(0.1, 0.6, 2.0))


def test_the_example_lives_and_starves_in_the_depth_of_the_room(result):
    """Distances ascend, with the robot's own among them; near the glass it lives, two metres in it does not."""
    table = result.distances
    assert list(table.index) == [0.1, 0.3, 0.6, 2.0]
    assert table.loc[0.3, "target_met"]
    assert not table.loc[2.0, "target_met"]
    assert 0.3 <= result.farthest_m < 2.0
    assert (np.diff(table["survival"]) <= 0.0).all()
    assert table.loc[2.0, "harvest_wh_day"] < 0.2 * table.loc[0.3, "harvest_wh_day"]


def test_the_row_of_its_own_distance_is_what_check_says(tender, result):
    """The table says of the robot's own place what check says: survival, and the light of the worst month."""
    robot, weather = tender
    own, checked = result.distances.loc[robot.window.distance_m], check(robot, weather=weather)
    assert own["survival"] == pytest.approx(float(checked.verdict.survival[0]))
    worst = checked.months.loc[own["worst_month"]]
    assert own["light_wh_m2_day"] == pytest.approx(worst["plane_wh_m2_day"], rel=1e-6)
    assert own["harvest_wh_day"] == pytest.approx(worst["harvest_wh_day"], rel=0.02)  # the battery's voltage moves
    codes = [caution.code for caution in checked.cautions]
    assert "behind-glass" in codes
    assert result.months["light_wh_m2_day"].to_numpy() == pytest.approx(checked.months["plane_wh_m2_day"].to_numpy())


def test_sun_and_lux_by_month(result):
    """There is never more sun than under a clear sky; lux and watts keep to what daylight can have."""
    months = result.months
    assert (months["sun_h_day"] <= months["sun_clear_sky_h_day"]).all()
    assert (months["sun_clear_sky_h_day"] < 12.0).all()
    assert months["lumens_per_w"].between(100.0, 140.0).all()
    # 4.5 and 1 hours of 150 lx at 300 lm/W
    assert months["lamp_wh_m2_day"].to_numpy() == pytest.approx(5.5 * 0.5, rel=0.02)


def test_coated_glass_is_told_with_its_doubt(tender, result):
    """With a coating the share alive at so much less light stands beside; clear glass has none."""
    robot, weather = tender
    assert 0.0 <= result.survival_coated <= result.distances.loc[0.3, "survival"]
    answer = check(robot, weather=weather)
    assert answer.survival_coated == answer.to_dict()["verdict"]["survival_coated"] == result.survival_coated
    clear = robot.model_copy(update={"window": robot.window.model_copy(update={"clear_share": 1.0})})
    assert "survival_coated" not in check(clear, weather=weather).to_dict()["verdict"]
    assert behind_window(clear, weather=weather, years=2, distances_m=(0.2,)).survival_coated is None


def test_the_battery_lives_in_the_room(tender):
    """However cold it is outside, cells and battery have the room's air."""
    robot, weather = tender
    arctic = replace(weather, table=weather.table.assign(temp_air=-40.0))
    cold, mild = (Chain(above).run(robot).ledger for above in (arctic, weather))
    assert cold.panel.sum() == pytest.approx(mild.panel.sum(), rel=0.05)
    air_c = Chain(arctic).weather_at(robot).table["temp_air"]
    assert (air_c == robot.window.room_min_c).all()


def test_the_document_is_json(result):
    """What it says can be written down, NaN as null."""
    document = json.loads(json.dumps(result.to_dict(), allow_nan=False))
    assert len(document["months"]) == 12
    assert document["distances"][0]["distance_m"] == 0.1


def test_without_a_window_it_says_what_to_write(tender):
    """The message names the table to add; a distance of nothing is the caller's mistake."""
    robot, weather = tender
    with pytest.raises(InputError, match=r"window: is missing\. Write a \[window\] table"):
        behind_window(robot.model_copy(update={"window": None}), weather=weather)
    with pytest.raises(ValueError, match="above 0"):
        behind_window(robot, weather=weather, distances_m=(0.0,))
