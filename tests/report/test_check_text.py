"""The answer of check on a terminal, read as the person who deploys reads it."""

from __future__ import annotations

import math
from dataclasses import replace

import numpy as np
import pandas as pd
import pytest

from sunbot.report.text import MONTH_NAMES, OUT_NAMES, WIDTH, cautions_text, check_text, months_text
from sunbot.studies.outage_cause import OutageCause
from sunbot.types import Caution


def test_the_first_line_holds_the_verdict_and_the_worn_battery(lives, dies):
    """Who reads one line knows the answer and which battery was judged."""
    assert check_text(lives).splitlines()[0] == (
        "Invented sampler at Invented hill: target met, judged with the worn battery (32 of 40 Ah)"
    )
    assert ": TARGET NOT MET, judged with the worn battery" in check_text(dies).splitlines()[0]


def test_survival_stands_with_its_interval_and_the_dimmer_sky(lives):
    """The count, the share, its interval, the target, and the second opinion in 10 % less light."""
    text = check_text(lives)
    assert "alive in 3 of 3 years = 100%, 95 % interval 43.9% to 100.0%; target 80% (met)" in text
    assert "with all light 10 % lower: alive in" in text


def test_no_line_is_too_wide_and_no_number_a_power_of_ten(lives, dies):
    """It fits a terminal of 120 columns, and nobody has to read 1.6e+03."""
    for result in (lives, dies):
        text = check_text(result)
        assert max(map(len, text.splitlines())) <= 120
        assert "e+0" not in text
        assert "nan" not in text
        assert not any(line != line.rstrip() for line in text.splitlines())


def test_the_table_has_a_row_a_month_with_the_numbers_of_the_document(dies):
    """Twelve rows, each as in the JSON."""
    rows = [line.split() for line in months_text(dies.months).splitlines() if line[2:5] in MONTH_NAMES]
    assert [row[0] for row in rows] == list(MONTH_NAMES)
    for row, (_, month) in zip(rows, dies.months.iterrows(), strict=True):
        assert float(row[1]) == pytest.approx(month["plane_wh_m2_day"], abs=0.51)
        assert float(row[2]) == pytest.approx(month["harvest_wh_day"], abs=0.051)
        assert float(row[3]) == pytest.approx(month["demand_wh_day"], abs=0.051)
        assert float(row[5].rstrip("%")) == pytest.approx(100.0 * month["lowest_soc"], abs=0.51)
        assert float(row[6]) == pytest.approx(month["hours_out_per_year"], abs=0.051)


def test_months_in_deficit_and_months_without_light_are_named(dies):
    """Those whose harvest is below demand; all twelve are "every month"."""
    winter = dies.months.assign(harvest_over_demand=[0.5, 0.9, *[1.5] * 8, 1.0, 0.4])
    assert "Harvest falls short of demand in Jan, Feb, Dec." in months_text(winter)
    dark = dies.months.assign(harvest_wh_day=0.0, harvest_over_demand=0.0)
    assert "The panel gives nothing at all in every month." in months_text(dark)
    assert "Harvest falls short of demand in every month." in months_text(dark)


def test_months_not_deployed_are_said_to_be(lives):
    """A month that no deployment reaches has no numbers."""
    months = lives.months.copy()
    months.loc[7, :] = math.nan
    assert "Jul  " in months_text(months)
    assert months_text(months).count("not deployed") == 1


def test_outages_are_dated_on_the_standard_clock(dies):
    """The first one as the JSON has it in UTC, told an hour later where the standard clock is at +1, also in summer."""
    began = dies.outages.first + pd.Timedelta(hours=1)
    told = f"year {began.year - 2000}, {began.day} {began.month_name()}, {began:%H:%M}"
    assert f"the first begins about {told} standard time" in check_text(dies)
    summer = replace(dies, outages=replace(dies.outages, first=pd.Timestamp("2009-07-01T10:30:00Z")))
    assert "year 9, 1 July, 11:30 standard time" in check_text(summer)
    measured = replace(summer, weather=replace(summer.weather, kind="record"))
    assert "2009-07-01, 11:30 standard time" in check_text(measured)


def test_no_outage_is_said_in_words(lives):
    """An answer without trouble says so."""
    assert "Outages of essential loads: none." in check_text(lives)


def test_where_the_energy_goes_adds_up(dies):
    """The watt-hours listed, with the change of the battery, are those of the panel's line to the digits printed."""
    lines = check_text(dies).splitlines()
    start = next(n for n, line in enumerate(lines) if line.startswith("Where the panel's"))
    panel = float(lines[start].split()[3])
    parts = []
    for line in lines[start + 1 :]:
        if " Wh  " not in line:
            break
        parts.append(float(line.split()[0]))
    # each of up to 13 lines is rounded to 0.01, and those below 0.005 are left out; the head to 0.1
    assert sum(parts) == pytest.approx(panel, abs=0.05 + 13 * 0.005)
    assert len(parts) >= 8


def test_every_fate_of_energy_has_a_name(dies):
    """No key of the JSON is missing among the words."""
    assert set(OUT_NAMES) == set(dies.energy.out)


@pytest.mark.parametrize(
    ("visits", "words"),
    [(1.0, "restart it once a year"), (0.4, "restart it 0.4 times a year"), (12.0, "restart it 12 times a year")],
)
def test_visits_are_told_in_words(dies, visits, words):
    """How often someone has to go there."""
    text = check_text(replace(dies, visits_per_year=visits))
    assert words in text
    assert "it does not always come back by itself" in text


def test_a_single_year_is_told_without_a_share(dies):
    """One year: alive or dead, no interval."""
    verdict = replace(dies.verdict, years=1, lost=np.array([[True]]), years_survived=np.array([0]))
    text = check_text(replace(dies, verdict=verdict, survival_light_minus_10=0.0))
    assert "dies in the one year tried (NOT met)" in text
    assert "with all light 10 % lower: dies" in text
    assert "interval" not in text


def test_cautions_are_wrapped_with_their_code_at_the_end():
    """One paragraph each; none where there are none."""
    text = cautions_text([Caution("frost", "battery", "cold " * 60)])
    assert text.splitlines()[0] == "Cautions"
    assert text.endswith("[frost]")
    assert max(map(len, text.splitlines())) <= WIDTH
    assert cautions_text([]) == ""


def test_the_nearness_is_told_either_way(lives, dies):
    """How much more fits, or the way out; what no change mends is said to be so."""
    assert "How close: 0.5 W more" in check_text(replace(lives, extra_load_w=0.5))
    assert "How close: next to nothing" in check_text(replace(lives, extra_load_w=0.0))
    assert "Ways out: no single change meets the target" in check_text(replace(dies, ways_out=()))


def test_a_year_lost_in_five_hundred_is_not_rounded_away(lives):
    """499 of 500 is no hundred per cent, and 94.6 % is no 95 % that fails."""
    lost = np.zeros((500, 1), dtype=bool)
    lost[7] = True
    verdict = replace(lives.verdict, years=500, lost=lost, years_survived=np.array([499]), survival=np.array([0.998]))
    assert "alive in 499 of 500 years = 99.8%," in check_text(replace(lives, verdict=verdict))
    target = lives.robot.target.model_copy(update={"survival": 0.95})
    robot = lives.robot.model_copy(update={"target": target})
    share = np.array([473 / 500])
    verdict = replace(verdict, years_survived=np.array([473]), survival=share, survival_met=np.array([False]))
    text = check_text(replace(lives, robot=robot, verdict=verdict, survival_light_minus_10=0.9499))
    assert "= 94.6%, 95 % interval" in text
    assert "target 95% (NOT met)" in text
    assert "10 % lower: alive in 94.99% of years" in text


def test_a_target_of_half_a_per_cent_is_told_in_full(lives):
    """0.945 is written by the user, and read back."""
    target = lives.robot.target.model_copy(update={"survival": 0.945})
    assert "target 94.5% (met)" in check_text(replace(lives, robot=lives.robot.model_copy(update={"target": target})))


def test_deployments_are_told_as_such(lives, robots):
    """Who is out for a few weeks survives deployments, not years."""
    robot = robots.robot(deployment={"from": "10-20", "to": "11-30"})
    text = check_text(replace(lives, robot=robot))
    assert "alive in 3 of 3 deployments" in text
    assert "10 % lower: alive in 100% of deployments" in text


def test_coated_glass_is_told_with_its_factor(lives):
    """What the robot comes to if the glass passes as much less as it may."""
    text = check_text(replace(lives, survival_coated=1 / 3))
    # Common practice, as in light/window_light.py: behind coated glass 1.5 times either way.
    assert "should the coated glass pass 1.5 times less light: alive in 33% of years" in text
    assert "coated" not in check_text(lives)


def test_a_name_cannot_steer_the_terminal(lives):
    """An escape sequence in a name is printed as a box."""
    text = check_text(replace(lives, robot=lives.robot.model_copy(update={"name": "Red\x1b[31m"})))
    assert "\x1b" not in text
    assert text.startswith("Red\N{WHITE SQUARE}[31m at")


def test_a_cloudless_year_never_meets_a_target(lives):
    """A robot that lives under a clear sky all year is not shown to live; one that dies there dies."""
    cloudless = replace(lives, weather=replace(lives.weather, kind="clear-sky"))
    assert lives.met
    assert not cloudless.met
    first = check_text(cloudless).splitlines()[0]
    assert "NOT SHOWN to meet its target" in first
    assert "target met" not in first
    assert not cloudless.to_dict()["verdict"]["target_met"]


def test_what_the_cold_did_is_told_from_a_tenth_on(dies):
    """The box, the charge a cold pack is cut at, and harvest lost to frost; not where the cold had no part."""
    cold = replace(dies.outages, cause=OutageCause(box_c=-6.4, empty_at_soc=0.351, frost_share=0.912))
    text = check_text(replace(dies, outages=cold))
    assert "the box is at -6 degC when they begin: so cold, a pack is cut off at 35% of its charge" in text
    assert "91% of the harvest of the five days before came with the box too cold" in text
    mild = replace(dies.outages, cause=OutageCause(box_c=12.0, empty_at_soc=0.19, frost_share=0.05))
    text = check_text(replace(dies, outages=mild))
    assert "the box is at" not in text
    assert "too cold to be charged" not in text
