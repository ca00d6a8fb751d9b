"""What a place offers, told and audited."""

from __future__ import annotations

import json
from pathlib import Path

import numpy as np
import pandas as pd
import pvlib
import pytest

from sunbot.errors import InputError
from sunbot.inputs.site import Climate, Site, WeatherSource
from sunbot.sky import weather_for
from sunbot.studies import check
from sunbot.studies.surveying import survey

# An invented climate at an invented place.
CLIMATE = Climate(
    ghi_kwh_m2_day=(1.0, 1.8, 3.0, 4.3, 5.2, 5.8, 5.7, 4.9, 3.5, 2.1, 1.1, 0.8),
    temp_min_c=(-3.0, -3.0, 0.0, 3.0, 8.0, 11.0, 13.0, 13.0, 9.0, 5.0, 1.0, -2.0),
    temp_max_c=(3.0, 5.0, 10.0, 15.0, 19.0, 23.0, 25.0, 25.0, 20.0, 14.0, 8.0, 4.0),
)
MEADOW = Site(
    name="Test meadow", latitude=47.3, longitude=8.1, altitude_m=540.0, time_zone="Europe/Zurich", climate=CLIMATE
)
COAST = Site(
    name="Test coast",
    latitude=55.317,
    longitude=-160.517,
    altitude_m=7.0,
    time_zone="America/Anchorage",
    weather=WeatherSource(source="file", file="pvlib-data:703165TY.csv"),
)


def coast_csv(folder: Path, *, minutes: int = 0, holes: int = 0) -> Site:
    """The coast's year as an own CSV, its clock off by some minutes, some single hours of light missing."""
    table = weather_for(COAST).table[["ghi", "temp_air", "wind_speed"]].copy()
    table.iloc[np.arange(holes) * 400 + 12, 0] = -999.0
    table.index = pd.DatetimeIndex(table.index + pd.Timedelta(minutes=minutes), name="time")
    table.to_csv(folder / "coast.csv", date_format="%Y-%m-%dT%H:%M:%SZ")
    source = WeatherSource(source="file", file="coast.csv", label="middle")
    return COAST.model_copy(update={"weather": source, "folder": str(folder)})


def test_months_agree_with_the_file_read_by_another_reader():
    """Monthly light and temperature of a typical year equal those of the file as pvlib reads it."""
    path = Path(pvlib.__file__).parent / "data" / "703165TY.csv"
    table, _ = pvlib.iotools.read_tmy3(path, coerce_year=2001, map_variables=True)
    table = table.set_axis(table.index - pd.Timedelta(minutes=30))
    ghi_day = table["ghi"].groupby(table.index.month).sum() / table["ghi"].groupby(table.index.month).count() * 24.0
    air = table["temp_air"].groupby(table.index.month)
    result = survey(COAST)
    # 0.1 %: light of the steps in which the sun is wholly down is set to 0 by the reader.
    assert result.months["ghi_wh_m2_day"].to_numpy() == pytest.approx(ghi_day.to_numpy(), rel=1e-3)
    assert result.months["temp_mean_c"].to_numpy() == pytest.approx(air.mean().to_numpy(), abs=1e-6)
    assert result.months["temp_lowest_c"].to_numpy() == pytest.approx(air.min().to_numpy())
    assert result.months["temp_highest_c"].to_numpy() == pytest.approx(air.max().to_numpy())


def test_a_typical_year_is_audited_and_tells_no_return_period():
    """One sound typical year: every check passed, darkest days dated in its winter, no return period."""
    result = survey(COAST)
    assert result.met
    assert len(result.audit) == 10
    assert [spell.days for spell in result.dark_spells] == [1, 3, 5, 10, 30]
    assert {spell.start.month for spell in result.dark_spells} <= {11, 12, 1}
    assert {spell.return_years for spell in result.dark_spells} == {None}
    assert result.inputs.year_starts_month == 8  # July is the brightest month of that file


def test_generated_years_have_spells_with_return_periods():
    """Twenty generated years: the darkest of each length comes once in 21, within its interval."""
    result = survey(MEADOW, years=20, seed=3)
    assert result.met
    assert result.daily_wh_m2.shape == (20, 365)
    assert {spell.return_years for spell in result.dark_spells} == {21.0}
    assert all(spell.low <= spell.wh <= spell.high for spell in result.dark_spells)
    # 1 %: the generator's own promise for long runs is 1 %, and 20 years scatter by 2 to 3 %.
    assert result.months["ghi_wh_m2_day"].mean() == pytest.approx(1e3 * np.mean(CLIMATE.ghi_kwh_m2_day), rel=0.03)
    lowest, highest = result.months["ghi_lowest_wh_m2_day"], result.months["ghi_highest_wh_m2_day"]
    assert (lowest < result.months["ghi_wh_m2_day"]).all()
    assert (result.months["ghi_wh_m2_day"] < highest).all()


def test_a_horizon_takes_from_the_flat_panel_not_from_ghi():
    """A hill in the south costs the flat panel light in December, and leaves ghi and July as good as they were."""
    hill = COAST.model_copy(update={"horizon": ((90.0, 0.0), (135.0, 12.0), (225.0, 12.0), (270.0, 0.0))})
    bare, behind = survey(COAST).months, survey(hill).months
    assert (behind["ghi_wh_m2_day"] == bare["ghi_wh_m2_day"]).all()
    assert behind.loc[12, "plane_wh_m2_day"] < 0.8 * bare.loc[12, "plane_wh_m2_day"]
    assert behind.loc[7, "plane_wh_m2_day"] > 0.95 * bare.loc[7, "plane_wh_m2_day"]


def test_a_fault_that_is_not_fatal_is_shown_and_not_met(tmp_path: Path):
    """Three hours with fill codes: the survey stands, the audit says which check failed."""
    result = survey(coast_csv(tmp_path, holes=3))
    assert not result.met
    assert [check.code for check in result.audit if not check.passed] == ["fill-codes"]


def test_a_wrong_clock_is_refused_and_shift_minutes_mends_it(tmp_path: Path):
    """A record 60 minutes fast is refused with shift_minutes = -60; with it, the survey is that of the right clock."""
    site = coast_csv(tmp_path, minutes=60)
    with pytest.raises(InputError, match=r"clock: the clock is 60 min fast .* Write shift_minutes = -60"):
        survey(site)
    mended = site.model_copy(update={"weather": site.weather.model_copy(update={"shift_minutes": -60.0})})
    right = survey(coast_csv(tmp_path))
    coast_csv(tmp_path, minutes=60)
    result = survey(mended)
    assert result.met
    assert result.months["ghi_wh_m2_day"].to_numpy() == pytest.approx(right.months["ghi_wh_m2_day"].to_numpy())


def test_what_the_audit_found_goes_with_every_answer_on_the_record(tmp_path: Path, robots):
    """Check tells a fault that is not fatal as a caution; the survey, which shows the audit, does not say it twice."""
    site = coast_csv(tmp_path, holes=3)
    failed = {check.code for check in survey(site).audit if not check.passed}
    robot = robots.robot().model_copy(update={"site": site})
    told = {caution.code for caution in check(robot).cautions}
    assert failed
    assert {f"audit-{code}" for code in failed} <= told
    assert not any(caution.code.startswith("audit-") for caution in survey(site).cautions)


def test_light_off_the_table_of_the_world_is_said():
    """Also by the survey, which shows what a place offers; not where the climate is the user's own."""
    coarse = MEADOW.model_copy(update={"climate": CLIMATE.model_copy(update={"coarse": True})})
    assert "coarse-climate" in {caution.code for caution in survey(coarse, years=2).cautions}
    assert "coarse-climate" not in {caution.code for caution in survey(MEADOW, years=2).cautions}


def test_the_document_is_plain_json_and_repeats():
    """The JSON has the words it promises, twelve months, and the same bytes again."""
    document = survey(MEADOW, years=6).to_dict()
    assert list(document) == ["tool", "inputs", "months", "dark_spells", "audit", "cautions"]
    assert [month["month"] for month in document["months"]] == list(range(1, 13))
    assert set(document["dark_spells"][0]) == {"days", "wh", "from", "return_years", "low", "high"}
    assert set(document["audit"][0]) == {"code", "passed", "text"}
    assert json.dumps(document, allow_nan=False) == json.dumps(survey(MEADOW, years=6).to_dict(), allow_nan=False)


def test_given_weather_is_used_as_it_is():
    """Weather handed in is not read again."""
    weather = weather_for(MEADOW, years=5, seed=9)
    assert survey(COAST.model_copy(update={"climate": CLIMATE}), weather=weather).weather is weather
