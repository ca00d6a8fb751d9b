"""Clocks and energy years against the standard library's calendar, pvlib's sun and plain counting."""

from __future__ import annotations

from datetime import UTC, datetime, timedelta
from types import SimpleNamespace
from zoneinfo import ZoneInfo

import numpy as np
import pandas as pd
import pytest
from pvlib import solarposition

from sunbot.calendar import (
    duty_share,
    energy_years,
    equation_of_time_min,
    local_clock,
    share_in_hours,
    solar_clock,
    standard_clock,
    standard_offset_h,
)

DAYS = ("mon", "tue", "wed", "thu", "fri", "sat", "sun")
ALWAYS = SimpleNamespace(hours=None, clock="local", months=range(1, 13), weekdays=DAYS)


def duty(**keys):
    return SimpleNamespace(**{**vars(ALWAYS), **keys})


def middles(first: str, last: str, *, step_min: int = 60, zone: str = "UTC") -> pd.DatetimeIndex:
    """Middles of the steps from ``first`` to ``last`` of the zone's standard clock."""
    shift = np.timedelta64(round(standard_offset_h(zone) * 3600), "s")
    step = np.timedelta64(step_min * 60, "s")
    starts = np.arange(np.datetime64(first, "s"), np.datetime64(last, "s"), step)
    return pd.DatetimeIndex(starts - shift + step // 2, tz="UTC")


def year_2001(zone: str = "UTC", *, step_min: int = 60) -> pd.DatetimeIndex:
    return middles("2001-01-01", "2002-01-01", step_min=step_min, zone=zone)


def generated(n_years: int, zone: str = "UTC", *, step_min: int = 60) -> pd.DatetimeIndex:
    """Years of 365 days from 2001, no 29 February."""
    shift = pd.Timedelta(hours=standard_offset_h(zone))
    times = middles("2001-01-01", f"{2001 + n_years}-01-01", step_min=step_min, zone=zone)
    own = times + shift
    return times[~((own.month == 2) & (own.day == 29))]


def share(times, load, zone, *, step_min=60, reference=True, longitude=0.0):
    return duty_share(times, load, zone=zone, longitude=longitude, step_h=step_min / 60, reference=reference)


@pytest.mark.parametrize(
    ("zone", "hours"),
    [
        ("Europe/Zurich", 1),
        ("Europe/Dublin", 0),
        ("America/New_York", -5),
        ("America/Santiago", -4),
        ("Asia/Kolkata", 5.5),
        ("Asia/Kathmandu", 5.75),
        ("Australia/Lord_Howe", 10.5),
        ("UTC", 0),
    ],
)
def test_the_standard_clock_is_the_winter_clock_of_either_hemisphere(zone, hours):
    """Standard offsets are those of the zones' laws."""
    # Published: IANA time zone data base.
    assert standard_offset_h(zone) == hours


def test_a_clock_shows_what_the_calendar_of_the_standard_library_shows():
    """Year, month, day, hour and weekday agree with datetime in zones of every kind, leap days included."""
    times = pd.date_range("2019-12-31 12:00", "2020-12-31", freq="7h17min", tz="UTC")
    for zone in ("Europe/Zurich", "Australia/Lord_Howe", "Asia/Kathmandu", "America/St_Johns"):
        clock = local_clock(times, zone, reference=False)
        walls = [stamp.to_pydatetime().astimezone(ZoneInfo(zone)) for stamp in times]
        assert clock.year.tolist() == [wall.year for wall in walls]
        assert clock.month.tolist() == [wall.month for wall in walls]
        assert clock.day_of_month.tolist() == [wall.day for wall in walls]
        assert clock.weekday.tolist() == [wall.weekday() for wall in walls]
        assert clock.day.tolist() == [wall.date().toordinal() - datetime(1970, 1, 1).toordinal() for wall in walls]
        assert clock.hour == pytest.approx([wall.hour + wall.minute / 60 for wall in walls], abs=1e-12)


def test_the_standard_clock_knows_no_daylight_saving():
    """In July Zurich's standard clock is an hour behind UTC+2, and five centuries on it still counts."""
    times = pd.DatetimeIndex(np.array(["2001-07-01T22:30", "2500-12-31T23:30"], dtype="datetime64[s]"), tz="UTC")
    clock = standard_clock(times, "Europe/Zurich")
    assert clock.hour.tolist() == [23.5, 0.5]
    assert clock.day_of_month.tolist() == [1, 1]
    assert clock.year.tolist() == [2001, 2501]


def test_reference_times_have_the_weekdays_of_2001_and_the_rules_of_today():
    """In the 2001 calendar New York changes its clock on the second Sunday of March and the first of November."""
    # Published: Energy Policy Act of 2005, section 110; before it the change was on the first Sunday of April.
    clock = local_clock(year_2001("America/New_York"), "America/New_York", reference=True)
    ahead = clock.hour - standard_clock(year_2001("America/New_York"), "America/New_York").hour
    saving = np.flatnonzero(ahead % 24 == 1)
    dates = [(clock.month[at], clock.day_of_month[at], clock.weekday[at]) for at in (saving[0], saving[-1])]
    assert dates == [(3, 11, 6), (11, 4, 6)]
    assert clock.weekday[0] == datetime(2001, 1, 1).weekday()


def test_reference_times_reach_into_the_neighbouring_years_by_the_offset_only():
    """A zone east of Greenwich begins 2001 in UTC's 2000; other years are refused."""
    clock = local_clock(year_2001("Pacific/Auckland"), "Pacific/Auckland", reference=True)
    # standard time starts the table, daylight saving is on in January: its first hour shows one o'clock
    assert (clock.year[0], clock.month[0], clock.day_of_month[0], clock.hour[0]) == (2001, 1, 1, 1.5)
    with pytest.raises(ValueError, match="reference times lie in 2001"):
        local_clock(middles("2002-05-01", "2002-05-02"), "UTC", reference=True)


def test_times_without_a_zone_are_refused():
    """Naive stamps are never taken as UTC."""
    with pytest.raises(ValueError, match="no zone"):
        standard_clock(pd.date_range("2001-01-01", periods=3, freq="h"), "UTC")


def test_the_equation_of_time_agrees_with_the_solar_position_algorithm():
    """Over forty years the low-precision formula stays within 0.1 min of the full algorithm."""
    times = pd.date_range("1990-01-03", "2030-01-01", freq="37D", tz="UTC")
    full = solarposition.spa_python(times, 0.0, 0.0)["equation_of_time"].to_numpy()
    seconds = times.as_unit("s").asi8
    assert equation_of_time_min(seconds) == pytest.approx(full, abs=0.1)


@pytest.mark.parametrize(("date", "minutes"), [("2001-02-11", -14.2), ("2001-11-03", 16.4), ("2001-04-15", 0.0)])
def test_solar_noon_runs_late_in_february_and_early_in_november(date, minutes):
    """At the extremes of the equation of time solar 12 is where the sun crosses the meridian."""
    # Published: extremes of -14 min 15 s about 11 February and +16 min 25 s about 3 November (almanacs); the
    # tolerance is 0.3 min for the shift of the dates by a day within the leap cycle.
    noon_utc = pd.DatetimeIndex([f"{date} 12:00"], tz="UTC") - pd.Timedelta(minutes=minutes) + pd.Timedelta(hours=3)
    clock = solar_clock(noon_utc, -45.0)
    assert clock.hour[0] == pytest.approx(12.0, abs=0.3 / 60)
    azimuth = solarposition.spa_python(noon_utc, 50.0, -45.0)["azimuth"].iloc[0]
    assert azimuth == pytest.approx(180.0, abs=0.2)


def test_the_solar_clock_keeps_its_own_date():
    """Far west of Greenwich the solar day is still yesterday's."""
    clock = solar_clock(pd.DatetimeIndex(["2001-03-01 06:00"], tz="UTC"), -150.0)
    assert (clock.month[0], clock.day_of_month[0], clock.weekday[0]) == (2, 28, 2)
    assert 19.5 < clock.hour[0] < 20.0


def test_an_hour_takes_the_share_that_lies_in_the_spans():
    """9 to 11.5 fills the hours of 9 and 10 and half that of 11."""
    hour = np.arange(24) + 0.5
    expected = np.zeros(24)
    expected[[9, 10, 11]] = 1, 1, 0.5
    assert share_in_hours(hour, ((9, 11.5),), 1.0).tolist() == expected.tolist()


def test_spans_at_both_ends_of_the_day_meet_over_midnight():
    """A step centred on midnight lies wholly in 22-24 and 0-6, and half in either."""
    hour = np.array([0.0, 23.75, 6.0])
    assert share_in_hours(hour, ((22, 24), (0, 6)), 1.0).tolist() == [1, 1, 0.5]
    assert share_in_hours(hour, ((22, 24),), 1.0).tolist() == [0.5, 0.75, 0]
    # overlapping spans count once
    assert share_in_hours(np.array([4.0]), ((2, 4), (3, 5), (3.2, 3.4)), 4.0).tolist() == [0.75]


ZONES = ["UTC", "Europe/Zurich", "America/New_York", "Asia/Kolkata", "Asia/Kathmandu", "Australia/Lord_Howe"]


@pytest.mark.parametrize("zone", ZONES)
@pytest.mark.parametrize("step_min", [60, 20, 5])
def test_a_year_of_daytime_duty_sums_to_its_hours(zone, step_min):
    """9-11.5 and 14-16 on 365 days are 1642.5 h in every zone, changes of the clock or not."""
    times = year_2001(zone, step_min=step_min)
    due = share(times, duty(hours=((9, 11.5), (14, 16))), zone, step_min=step_min)
    assert due.sum() * step_min / 60 == pytest.approx(365 * 4.5, abs=1e-9)


@pytest.mark.parametrize("zone", ["Europe/Zurich", "Australia/Lord_Howe", "Asia/Kathmandu"])
def test_hourly_shares_agree_with_counting_minutes(zone):
    """Around both changes of the clock, with weekdays, every hour's share is that of a plain count by the minute."""
    load = duty(hours=((22, 24), (0, 2.25), (9, 9.75)), weekdays=("sat", "sun", "mon"))
    for date in ("2018-03-22", "2018-10-05", "2018-10-25", "2018-03-30"):
        times = middles(date, str(np.datetime64(date) + 5))
        expected = []
        for stamp in times.to_pydatetime():
            walls = [(stamp + timedelta(minutes=m - 29.5)).astimezone(ZoneInfo(zone)) for m in range(60)]
            hours = [(wall.hour + wall.minute / 60 + wall.second / 3600, wall.weekday()) for wall in walls]
            expected.append(np.mean([d in (5, 6, 0) and (h >= 22 or h < 2.25 or 9 <= h < 9.75) for h, d in hours]))
        assert share(times, load, zone, reference=False) == pytest.approx(expected, abs=1e-12)


@pytest.mark.parametrize(
    ("zone", "change", "hours"),
    [
        ("Europe/Zurich", "2018-03-25", 23),
        ("Europe/Zurich", "2018-10-28", 25),
        ("Australia/Lord_Howe", "2018-10-07", 23.5),
        ("Australia/Lord_Howe", "2018-04-01", 24.5),
    ],
)
def test_the_day_of_a_change_has_its_own_length(zone, change, hours):
    """A load due all of Sunday runs 23, 25, 23.5 or 24.5 h on the Sunday the clock changes."""
    times = middles(f"{np.datetime64(change) - 2}", f"{np.datetime64(change) + 2}")
    assert share(times, duty(weekdays=("sun",)), zone, reference=False).sum() == pytest.approx(hours, abs=1e-12)


def test_a_night_duty_across_midnight_sums_to_its_hours():
    """22-24 and 0-6 are 8 h on 365 nights; the lost hour of spring and the doubled one of autumn cancel."""
    due = share(year_2001("Europe/Zurich"), duty(hours=((22, 24), (0, 6))), "Europe/Zurich")
    assert due.sum() == pytest.approx(365 * 8, abs=1e-9)


def test_weekdays_and_months_pick_whole_days():
    """2001 has 52 Tuesdays; March to October has 245 days; all days and months are always."""
    times = year_2001("Asia/Kolkata")
    assert share(times, duty(weekdays=("tue",)), "Asia/Kolkata").sum() == pytest.approx(52 * 24, abs=1e-9)
    assert share(times, duty(months=range(3, 11)), "Asia/Kolkata").sum() == pytest.approx(245 * 24, abs=1e-9)
    assert share(times, ALWAYS, "Asia/Kolkata").tolist() == [1.0] * 8760


def test_a_solar_duty_is_symmetric_about_the_meridian():
    """10 to 14 by the sun: 4 h a day, and the weighted mean time is the SPA transit, even at the extremes."""
    times = middles("2001-01-01", "2002-01-01", step_min=10)
    due = share(times, duty(hours=((10, 14),), clock="solar"), "UTC", step_min=10, longitude=20.0)
    # 0.001 h: a solar day is up to 30 s longer or shorter than 24 h
    assert due.sum() / 6 == pytest.approx(365 * 4, abs=1e-3)
    hour = standard_clock(times, "UTC").hour.reshape(365, 144)
    for day in (41, 306):
        noon_h = (due.reshape(365, 144)[day] * hour[day]).sum() / due.reshape(365, 144)[day].sum()
        at = times[day * 144 : day * 144 + 1].normalize()
        transit = solarposition.sun_rise_set_transit_spa(at, 10.0, 20.0)["transit"].iloc[0]
        # 0.3 min: the equation of time moves by some seconds within the day
        assert noon_h * 60 == pytest.approx((transit - at[0]).total_seconds() / 60, abs=0.3)


def test_hourly_and_five_minute_duties_agree():
    """Twelve five-minute steps average to their hour, for solar and local clocks."""
    for load in (duty(hours=((7.3, 9.1),), clock="solar"), duty(hours=((0, 0.4), (23.2, 24)), weekdays=("wed",))):
        fine = share(year_2001(step_min=5), load, "Europe/Zurich", step_min=5, longitude=8.0)
        coarse = share(year_2001(), load, "Europe/Zurich", longitude=8.0)
        # 1e-9 but for the 15 min around solar midnight that a weekday would decide
        assert fine.reshape(-1, 12).mean(axis=1) == pytest.approx(coarse, abs=1e-3)


@pytest.mark.parametrize("zone", ["UTC", "Asia/Kolkata", "America/New_York"])
@pytest.mark.parametrize("first_month", [1, 8])
def test_generated_years_become_lanes_that_use_every_step_once(zone, first_month):
    """Three generated years give three full lanes in order; the last runs on into the head of the table."""
    times = generated(3, zone)
    lanes = energy_years(times, step_h=1.0, zone=zone, first_month=first_month)
    assert lanes.row.shape == (8760, 3)
    assert np.all(lanes.step_h == 1.0)
    assert sorted(lanes.row.ravel()) == list(range(3 * 8760))
    assert lanes.before.tolist() == [2, 0, 1]
    clock = standard_clock(times, zone)
    assert np.array_equal(clock.month[lanes.row], np.repeat(lanes.month[:, None], 3, axis=1))
    assert (clock.day_of_month[lanes.row[0]] == 1).all()
    assert (lanes.month[0], clock.hour[lanes.row[0]].tolist()) == (first_month, [0.5] * 3)
    # going from lane to lane is going round the ring
    round_the_ring = lanes.row.T.ravel()
    assert set(np.diff(round_the_ring) % len(times)) == {1}


def test_a_leap_day_pads_the_other_years():
    """In a record of 2019 to 2021 only 2020 has a 29 February; the others have 24 steps of 0 h at its place."""
    times = middles("2019-01-01", "2022-01-01")
    lanes = energy_years(times, step_h=1.0, zone="UTC", first_month=10)
    assert lanes.row.shape == (8784, 3)
    assert lanes.step_h.sum(axis=0).tolist() == [8784, 8760, 8760]
    empty = lanes.step_h == 0
    assert set(lanes.month[empty.any(axis=1)]) == {2}
    february = np.flatnonzero(lanes.month == 2)
    assert np.flatnonzero(empty[:, 1]).tolist() == february[-24:].tolist()
    assert sorted(lanes.row[~empty]) == list(range(len(times)))
    # padding repeats the last step of February
    assert np.all(lanes.row[february[-24:], 1] == lanes.row[february[-25], 1])


def test_a_record_may_start_in_any_month_and_miss_an_hour():
    """Five years from March with an hour missing: 43,847 of 43,848 h, each used once, months aligned."""
    times = middles("2019-03-01", "2024-03-01")
    times = times.delete(5000)
    lanes = energy_years(times, step_h=1.0, zone="UTC", first_month=8)
    used = lanes.step_h > 0
    assert lanes.step_h.sum() == 43_847
    assert sorted(lanes.row[used]) == list(range(43_847))
    months = np.broadcast_to(lanes.month[:, None], used.shape)
    assert np.array_equal(standard_clock(times, "UTC").month[lanes.row[used]], months[used])
    # lane 0 starts in August 2019, the last runs over the end of the table into its head
    assert standard_clock(times, "UTC").year[lanes.row[0]].tolist() == [2019, 2020, 2021, 2022, 2023]
    assert lanes.row[-1, -1] == lanes.row[0, 0] - 1


def test_one_year_is_its_own_predecessor():
    """A typical year is a ring of one."""
    lanes = energy_years(year_2001(), step_h=1.0, zone="UTC", first_month=6)
    assert lanes.before.tolist() == [0]
    assert lanes.row[:, 0].tolist() == list(np.roll(np.arange(8760), -lanes.row[0, 0]))


def test_short_steps_are_cut_at_the_same_instants():
    """Five-minute years have twelve times the steps."""
    lanes = energy_years(generated(2, step_min=5), step_h=1 / 12, zone="UTC", first_month=4)
    assert lanes.row.shape == (12 * 8760, 2)
    assert lanes.step_h.sum() == pytest.approx(2 * 8760)
    assert (lanes.row[0] == np.array([90, 455]) * 288).all()


def test_a_deployment_over_new_year_is_one_lane():
    """15 November to 3 February: 81 days a lane, each at start_soc; the last wraps into the head of the table."""
    times = generated(3, "Europe/Zurich")
    span = ((11, 15), (2, 3))
    lanes = energy_years(times, step_h=1.0, zone="Europe/Zurich", first_month=8, deployment=span)
    assert lanes.row.shape == (81 * 24, 3)
    assert lanes.before.tolist() == [-1, -1, -1]
    assert lanes.first_month == 11
    clock = standard_clock(times, "Europe/Zurich")
    assert [(int(clock.month[r]), int(clock.day_of_month[r])) for r in lanes.row[[0, -1], 0]] == [(11, 15), (2, 3)]
    assert clock.year[lanes.row[-1]].tolist() == [2002, 2003, 2001]


def test_a_deployment_within_a_year_that_is_nearly_whole():
    """10 March to 5 March has March at both ends, in the order in which it is lived."""
    lanes = energy_years(generated(2), step_h=1.0, zone="UTC", first_month=1, deployment=((3, 10), (3, 5)))
    assert lanes.row.shape == (361 * 24, 2)
    assert (lanes.month[0], lanes.month[-1]) == (3, 3)
    assert set(np.diff(lanes.row[:, 0])) == {1}
    whole = energy_years(generated(2), step_h=1.0, zone="UTC", first_month=1, deployment=((1, 1), (12, 31)))
    assert whole.row.T.ravel().tolist() == list(range(2 * 8760))


def test_a_deployment_from_a_leap_day_starts_in_march_elsewhere():
    """29 February to 2 March: three days in 2020, two in other years."""
    times = middles("2019-01-01", "2022-01-01")
    lanes = energy_years(times, step_h=1.0, zone="UTC", first_month=1, deployment=((2, 29), (3, 2)))
    assert lanes.step_h.sum(axis=0).tolist() == [48, 72, 48]


def test_what_is_no_ring_of_years_is_refused():
    """Half a year, and a step out of order, are a caller's mistake."""
    with pytest.raises(ValueError, match="whole years"):
        energy_years(middles("2001-01-01", "2001-07-01"), step_h=1.0, zone="UTC", first_month=1)
    with pytest.raises(ValueError, match="whole years"):
        energy_years(middles("2001-01-01T00:00", "2001-01-01T05:00"), step_h=1.0, zone="UTC", first_month=1)


def test_utc_instants_are_not_moved():
    """The same instants in another zone's notation give the same clock."""
    times = year_2001()[:48]
    other = times.tz_convert("Asia/Tokyo")
    assert np.array_equal(standard_clock(times, "Europe/Zurich").hour, standard_clock(other, "Europe/Zurich").hour)
    assert datetime(2001, 1, 1, 0, 30, tzinfo=UTC) == times[0].to_pydatetime()
