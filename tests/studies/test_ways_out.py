"""What it would take, and how much more would fit: each answer run again as its own robot."""

import pytest

from sunbot.inputs.robot import Load, Rail
from sunbot.studies import check
from sunbot.studies.resizing import resized
from sunbot.studies.tilts import tilted
from sunbot.studies.ways_out import rounded_down, rounded_up


@pytest.mark.parametrize("value", [0.3158, 64.784, 123456.7, 0.0009996, 5.0, 0.1 + 0.2])
def test_what_is_printed_is_never_short_of_what_was_found(value):
    """Rounded to the safe side, by less than one in the last digit."""
    for digits in (2, 3, 4):
        up, down = rounded_up(value, digits), rounded_down(value, digits)
        assert down <= value * (1 + 1e-12)
        assert up >= value * (1 - 1e-12)
        assert up - down <= 1.001 * value * 10.0 ** (1 - digits)
        assert float(f"{up:.{digits}g}") == pytest.approx(up, rel=1e-12)


@pytest.fixture(scope="module")
def place(robots):
    return robots.quick_weather(robots.hill(), years=5)


@pytest.fixture(scope="module")
def failing(robots, place):
    return check(robots.robot(watts=60.0, battery_ah=20.0, work_w=4.0, heading_deg=150), weather=place)


def with_steady_load(robot, watts):
    """The robot with one more load, straight from the battery, day and night."""
    rails = (*robot.rails, Rail(name="more", kind="none"))
    return robot.model_copy(update={"rails": rails, "loads": (*robot.loads, Load(name="x", rail="more", watts=watts))})


def met(robot, place):
    return check(robot, weather=place).met


def test_a_failing_robot_is_told_single_changes_the_smallest_first(failing):
    """Panel, battery and draw are among them, one line each, ordered by how far they go."""
    assert not failing.met
    whats = [way.what for way in failing.ways_out]
    assert {"panel", "battery", "constant draw"} <= set(whats)
    assert [way.times for way in failing.ways_out] == sorted(way.times for way in failing.ways_out)
    assert all("\n" not in way.change for way in failing.ways_out)
    assert failing.extra_load_w is None


def test_the_panel_and_the_battery_named_meet_the_target_and_clearly_less_does_not(failing, place):
    """Fed back as robot files; a tenth of the change short of it fails."""
    ways = {way.what: way for way in failing.ways_out}
    for what, filed, make in (
        ("panel", failing.robot.watts, lambda value: resized(failing.robot, watts=value)),
        ("battery", failing.robot.battery.capacity_ah, lambda value: resized(failing.robot, battery_ah=value)),
    ):
        value = ways[what].value
        assert value > filed
        assert met(make(value), place)
        # 2 % is the search's step, and a panel is tried in steps of 4 to 8 % above that.
        assert not met(make(value / (1.10 if what == "panel" else 1.025)), place)


def test_the_draw_named_meets_the_target(failing, place):
    """With so much less drawn by the computer, at the battery, the robot lives."""
    way = next(way for way in failing.ways_out if way.what == "constant draw")
    computer = failing.robot.loads[0]
    at_the_load_w = way.value * 0.90  # through the step-down rail of efficiency 0.90
    less = computer.model_copy(update={"watts": computer.watts - at_the_load_w})
    assert met(failing.robot.model_copy(update={"loads": (less, *failing.robot.loads[1:])}), place)
    nearly = computer.model_copy(update={"watts": computer.watts - 0.9 * at_the_load_w})
    assert not met(failing.robot.model_copy(update={"loads": (nearly, *failing.robot.loads[1:])}), place)


def test_skippable_work_is_cut_where_that_is_enough(robots, place):
    """A robot that only fails by its work is told by how much to cut it; cut so, it does the rest."""
    busy = robots.robot(watts=60.0, battery_ah=40.0, load_w=0.3, work_w=25.0)
    result = check(busy, weather=place)
    assert bool(result.verdict.survival_met[0])
    assert not result.met
    way = next(way for way in result.ways_out if way.what == "skippable work")
    assert "drive" in way.change
    drive = busy.loads[1]
    less = drive.model_copy(update={"on_fraction": drive.on_fraction * way.value})
    assert met(busy.model_copy(update={"loads": (busy.loads[0], less)}), place)


def test_a_better_tilt_is_found_where_it_is_enough(robots, place):
    """A flat panel that fails narrowly in winter is told to stand up, and then lives."""
    flat = tilted(robots.robot(watts=40.0, battery_ah=40.0, load_w=1.0), 0.0)
    way = next(way for way in check(flat, weather=place).ways_out if way.what == "tilt")
    assert way.value > 0
    assert met(tilted(flat, way.value), place)


def test_a_robot_that_lives_is_told_how_much_more_it_would_carry(robots, place):
    """With the extra load the target is met, with a tenth more it is not."""
    result = check(robots.robot(watts=90.0, battery_ah=60.0), weather=place)
    assert result.met
    assert result.ways_out == ()
    assert result.extra_load_w > 0
    assert met(with_steady_load(result.robot, result.extra_load_w), place)
    assert not met(with_steady_load(result.robot, 1.10 * result.extra_load_w), place)


def test_where_no_single_change_does_there_is_none(robots, place):
    """A panel of 1 W for 8 W of load: neither ten times the panel nor any battery."""
    result = check(robots.robot(watts=1.0, battery_ah=5.0, load_w=8.0), weather=place)
    assert [way.what for way in result.ways_out if way.what in ("panel", "battery", "tilt")] == []


def test_the_words_of_the_document(failing):
    """JSON words beside the promised ones."""
    document = failing.to_dict()
    assert document["ways_out"][0]["what"] == failing.ways_out[0].what
    assert document["extra_load_w"] is None
    assert document["outages"]["until_restart_h"] > 0
