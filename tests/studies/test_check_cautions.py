"""Which cautions an answer carries, and which it must not."""

from __future__ import annotations

import re
from dataclasses import replace

import pytest

from sunbot.inputs.robot import Deployment
from sunbot.studies.cautions import check_cautions, few_years, standing_cautions
from sunbot.studies.chain import Chain
from sunbot.studies.verdict import verdict_on

GENEROUS = {"watts": 200.0, "battery_ah": 60.0, "load_w": 0.3}


@pytest.fixture(scope="module")
def chain(robots):
    return Chain(robots.quick_weather(robots.hill(), years=3))


def codes(chain, robot):
    balance = chain.run(robot)
    cautions = check_cautions(chain, robot, balance, verdict_on(balance, robot.target), survival_coarse=0.4)
    return {caution.code: caution.text for caution in cautions}


def battery_of(robots, **changes):
    """The generous robot's battery, changed."""
    robot = robots.robot(**GENEROUS)
    return robot.model_copy(update={"battery": robot.battery.model_copy(update=changes)})


def test_few_years_says_how_many_would_settle_it(chain, robots):
    """Three years without a failure leave the target of 0.95 open; 73 would settle it."""
    told = codes(chain, robots.robot(**GENEROUS, survival=0.95))
    assert "--years 73" in told["few-years"]


def test_few_years_counts_the_failures_seen(robots):
    """One in fifty: as many years as settle that share; at the target itself none do; more than 500 cannot be run."""
    robot = robots.robot(survival=0.95)
    (told,) = few_years(49, 50, robot=robot)
    assert "203 with failures as rare would settle 95% (--years 203)" in told.text
    (told,) = few_years(19, 20, robot=robot)
    assert "no number of years settles 95%" in told.text
    (told,) = few_years(48, 50, robot=robot)
    assert "more than can be run" in told.text
    (told,) = few_years(1, 1, robot=robot)
    assert told.text.startswith("1 year leaves room")
    assert not list(few_years(500, 500, robot=robot))


def test_a_target_that_is_missed_needs_no_word_on_few_years(chain, robots):
    """Who fails is not told to look longer."""
    assert "few-years" not in codes(chain, robots.robot(watts=3.0, load_w=3.0, survival=0.95))


def test_frost_is_told_where_it_costs_harvest_and_not_of_a_warm_or_heated_box(chain, robots):
    """Cells that must not be charged below freezing: the share of the harvest, unless the box stays above."""
    assert "0 degC" in codes(chain, battery_of(robots))["frost"]
    assert "frost" not in codes(chain, battery_of(robots, box_rise_c=15.0))
    assert "frost" not in codes(chain, battery_of(robots, heater_w=20.0))


def test_frost_counts_while_the_robot_is_out(chain, robots):
    """A winter deployment meets it all along, a summer one never; neither is told the year's share."""
    winter, summer = (
        codes(chain, battery_of(robots, box_rise_c=-4.0).model_copy(update={"deployment": Deployment(**days)}))
        for days in ({"from": "12-01", "to": "02-20"}, {"from": "06-01", "to": "08-31"})
    )
    assert int(winter["frost"].split("%")[0]) > 50
    assert "frost" not in summer


def test_a_heater_silences_the_frost_only_as_far_as_it_warms_the_box(chain, robots):
    """50 mW in a box that loses 0.2 W/K warm it by a quarter of a kelvin; 20 W keep it."""
    weak = codes(chain, battery_of(robots, heater_w=0.05, box_loss_w_per_k=0.2))
    strong = codes(chain, battery_of(robots, heater_w=20.0, box_loss_w_per_k=0.2))
    assert "0 degC" in weak["frost"]
    assert not {"frost", "heater-too-weak", "heater-taken-as-enough"} & set(strong)


def in_air(chain, air_c):
    """The same light in air of one temperature."""
    return Chain(replace(chain.weather, table=chain.weather.table.assign(temp_air=air_c)))


def test_a_heater_taken_as_enough_is_told_with_the_loss_it_needs(chain, robots):
    """At -19 degC the box wants 20 K: 3 W do that at 0.15 W/K or less; nothing where it never runs."""
    told = codes(in_air(chain, -19.0), battery_of(robots, heater_w=3.0))["heater-taken-as-enough"]
    assert "1 degC" in told
    assert "20 K" in told
    assert "0.15 W/K" in told
    assert "box_loss_w_per_k" in told
    assert "heater-taken-as-enough" not in codes(in_air(chain, 2.0), battery_of(robots, heater_w=3.0))
    assert "heater-taken-as-enough" not in codes(in_air(chain, -19.0), battery_of(robots))


def test_a_heater_taken_as_enough_counts_the_cold_of_the_deployment_only(chain, robots):
    """A summer that never sees the heater run says nothing of it."""
    heated = battery_of(robots, heater_w=3.0)
    june = robots.robot(**GENEROUS, deployment={"from": "06-10", "to": "08-20"})
    assert "heater-taken-as-enough" in codes(chain, heated)
    assert "heater-taken-as-enough" not in codes(chain, june.model_copy(update={"battery": heated.battery}))


def test_a_heater_too_weak_is_told_with_its_hours_and_what_it_takes(chain, robots):
    """At -19 degC all year 3 W at 0.3 W/K lift by 10 of 20 K: 8800 h a year, and 6 W or 0.15 W/K would do."""
    told = codes(in_air(chain, -19.0), battery_of(robots, heater_w=3.0, box_loss_w_per_k=0.3))
    for word in ("8800 h a year", "lift it by 10 K", "20 K", "takes 6 W", "0.15 W/K"):
        assert word in told["heater-too-weak"]
    assert "heater-taken-as-enough" not in told
    assert "heater-too-weak" not in codes(in_air(chain, -19.0), battery_of(robots, heater_w=6.0, box_loss_w_per_k=0.3))


@pytest.mark.parametrize(("heater_w", "loss_w_per_k"), [(1.0, 0.83), (1.35, 0.29)])
def test_what_a_caution_says_would_do_does(chain, robots, heater_w, loss_w_per_k):
    """Watts and loss are rounded to the safe side: taken at its word the caution is gone."""
    weak = {"heater_w": heater_w, "box_loss_w_per_k": loss_w_per_k}
    told = codes(chain, battery_of(robots, **weak))["heater-too-weak"]
    watts, loss = (float(found) for found in re.search(r"takes ([\d.]+) W, .* than ([\d.]+) W/K", told).groups())
    for change in ({"heater_w": watts}, {"box_loss_w_per_k": loss}):
        assert "heater-too-weak" not in codes(chain, battery_of(robots, **(weak | change)))


def test_heat_is_told_where_the_box_is_too_hot_to_be_charged(chain, robots):
    """The other end of the window."""
    assert "heat" in codes(chain, battery_of(robots, box_rise_c=35.0))


def test_cells_beyond_the_window_they_are_made_for_are_told(chain, robots):
    """Common practice: lithium cells work from -20 to 60 degC; a heater or a mild box says nothing."""
    told = codes(chain, battery_of(robots, box_rise_c=-25.0))
    assert "below -20 degC" in told["battery-too-cold"]
    assert "h a year" in told["battery-too-cold"]
    assert "above 60 degC" in codes(chain, battery_of(robots, box_rise_c=40.0))["battery-too-hot"]
    assert "battery-too-cold" not in codes(chain, battery_of(robots, box_rise_c=-25.0, heater_w=20.0))
    assert not {"battery-too-cold", "battery-too-hot"} & set(codes(chain, battery_of(robots)))


def test_a_pack_too_weak_is_told(chain, robots):
    """More than the pack can give through its resistance."""
    told = codes(chain, robots.robot(watts=60.0, battery_ah=2.0, load_w=200.0))
    assert "larger pack" in told["pack-too-weak"]
    assert "pack-too-weak" not in codes(chain, robots.robot(**GENEROUS))


def test_a_controller_that_eats_more_than_it_gives_is_told(chain, robots):
    """Its own use, day and night, above what it hands over."""
    controller = {"kind": "mppt", "own_use_w": 5.0}
    assert "draws" in codes(chain, robots.robot(watts=5.0, controller=controller))["controller-hungry"]


@pytest.mark.parametrize(
    ("chemistry", "cells", "word"),
    [("lifepo4", 4, "protection circuit"), ("li-ion", 3, "fire"), ("lead-acid", 6, "hydrogen"), ("nimh", 10, "fuse")],
)
def test_every_chemistry_has_its_safety_word_and_local_codes_go_first(chain, robots, chemistry, cells, word):
    """The dangers of the cells stand in every answer."""
    battery = {"chemistry": chemistry, "cells_in_series": cells, "capacity_ah": 20.0}
    told = codes(chain, robots.robot(battery=battery))["safety"]
    assert word in told
    assert "Local codes and licensed practice go first" in told


def test_thresholds_by_charge_on_a_flat_voltage_are_told(chain, robots):
    """A voltmeter cannot tell the charge of lithium iron phosphate."""
    flat = {"chemistry": "lifepo4", "cells_in_series": 4, "capacity_ah": 20.0}
    assert "flat-voltage" in codes(chain, robots.robot(battery=flat, work_w=5.0))
    assert "flat-voltage" not in codes(chain, robots.robot(battery=flat))
    assert "flat-voltage" not in codes(chain, robots.robot(work_w=5.0))


def test_a_coarse_climate_tells_survival_in_dimmer_light(chain, robots):
    """Read off the table of the world: the share alive with 15 % less light stands in the caution."""
    robot = robots.robot()
    climate = robot.site.climate.model_copy(update={"coarse": True})
    coarse = robot.model_copy(update={"site": robot.site.model_copy(update={"climate": climate})})
    assert "40%" in codes(chain, coarse)["coarse-climate"]
    assert "coarse-climate" not in codes(chain, robot)


def test_a_ring_that_does_not_settle_is_told(chain, robots):
    """The robot lives on the edge."""
    robot = robots.robot()
    balance = chain.run(robot)
    unsettled = replace(balance, settled=~balance.settled)
    cautions = check_cautions(chain, robot, unsettled, verdict_on(balance, robot.target), survival_coarse=0.0)
    assert "not-periodic" in {caution.code for caution in cautions}


def test_cautions_of_the_weather_are_passed_on(robots, chain):
    """What the reader of the weather noted reaches the answer."""
    from sunbot.types import Caution

    noted = replace(chain.weather, cautions=(Caution("one-year", "a file", "One year hides the bad ones."),))
    assert "one-year" in {caution.code for caution in standing_cautions(Chain(noted), robots.robot())}


def test_a_regulator_is_held_to_the_voltage_of_a_pack_on_charge(chain, robots):
    """Ten nickel cells on charge stand at 14 to 16 V; half an ampere from there to 5 V is 4.5 to 5.5 W of heat."""
    # Common practice: 1.4 to 1.6 V a cell on charge.
    robot = robots.robot(
        battery={"chemistry": "nimh", "cells_in_series": 10, "capacity_ah": 12.0},
        rail=[{"name": "logic", "kind": "linear", "volts": 5.0}],
        load=[{"name": "computer", "rail": "logic", "amps": 0.5}],
    )
    told = codes(chain, robot)["regulator-heat"]
    assert 4.5 < float(re.search(r"([\d.]+) W into heat", told)[1]) < 5.5
