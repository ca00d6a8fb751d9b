"""The whole chain at its edges: dark, cold, hungry, half-hour clocks, leap days, steps of minutes."""

from __future__ import annotations

import numpy as np
import pandas as pd
import pytest

from sunbot.errors import InputError
from sunbot.inputs.robot import Deployment
from sunbot.inputs.site import Site, WeatherSource
from sunbot.sky import weather_for
from sunbot.studies import check
from sunbot.studies.chain import Chain
from sunbot.studies.checking import check_on

LOW_PANEL = {"name": "lid", "watts": 10, "vmp_v": 5.0, "imp_a": 2.0, "voc_v": 6.0, "isc_a": 2.15, "tilt_deg": 40}


def answer(robot, weather=None, *, years=1, trace=False):
    weather = weather_for(robot.site, years=years) if weather is None else weather
    return check_on(Chain(weather), robot, years=weather.n_years, seed=1, trace=trace)


def closes(result):
    """What leaves the panel is accounted for, and no fate is negative."""
    energy = result.energy
    assert min(energy.out.values()) >= 0.0
    whole = max(energy.panel, 1.0)
    assert sum(energy.out.values()) + energy.stored == pytest.approx(energy.panel, abs=1e-6 * whole)


def at(robots, robot=None, **place):
    site = Site(**{**robots.HILL, **place})
    return (robot or robots.robot()).model_copy(update={"site": site})


@pytest.mark.parametrize("source", ["climate", "clear-sky"])
def test_a_polar_night_is_dark_and_the_answer_says_so(robots, source):
    """At 78 N no watt-hour comes from November to January; the battery ends flat, and the text names the months."""
    from sunbot.report.text import check_text

    arctic = {
        "ghi_kwh_m2_day": [0, 0.01, 0.9, 2.6, 4.4, 5.0, 4.2, 2.6, 1.1, 0.2, 0, 0],
        "temp_min_c": [-20, -20, -20, -15, -6, 0, 3, 2, -2, -8, -14, -18],
        "temp_max_c": [-10, -10, -10, -6, 0, 5, 9, 8, 3, -3, -7, -9],
    }
    place = {"latitude": 78.2, "longitude": 15.6, "altitude_m": 10.0, "time_zone": "Arctic/Longyearbyen"}
    result = answer(at(robots, **place, climate=arctic, weather={"source": source}))
    assert (result.months.loc[[1, 11, 12], "harvest_wh_day"] == 0.0).all()
    assert (result.months.loc[[1, 12], "hours_out_per_year"] == 744.0).all()
    assert result.months.loc[6, "harvest_wh_day"] > 50.0
    assert not result.met
    closes(result)
    assert "The panel gives nothing at all in Jan, " in check_text(result)
    # lithium must not be charged in that spring: the sun is back in March, the robot in May at the earliest
    assert result.months.loc[3, "hours_out_per_year"] == 744.0


@pytest.mark.parametrize("kind", ["pwm", "direct", "mppt"])
def test_a_panel_that_cannot_reach_the_battery_is_refused(robots, kind):
    """With the panel named, its voltage and the one that charging takes."""
    with pytest.raises(InputError, match=r'panel 1 \("lid"\): voc_v: 6.0 V .* cannot reach the 1[12]\.\d V'):
        answer(robots.robot(panel=[LOW_PANEL], controller={"kind": kind}))


def test_a_controller_that_eats_more_than_it_gives_leaves_a_dead_robot(robots):
    """All harvest goes into the controller, the robot stays off but for its first charge, and the books close."""
    result = answer(robots.robot(watts=5.0, controller={"kind": "mppt", "own_use_w": 5.0}))
    assert result.energy.out["controller"] >= 0.98 * result.energy.panel
    assert result.unserved_share > 0.99
    assert result.visits_per_year == 1.0
    assert "controller-hungry" in {caution.code for caution in result.cautions}
    closes(result)


def test_a_start_up_power_never_reached_gives_nothing(robots):
    """A controller that starts above what the panel can give offers not a watt."""
    result = answer(robots.robot(controller={"kind": "mppt", "own_use_w": 0.0, "start_up_w": 50.0}))
    assert (result.months["harvest_wh_day"] == 0.0).all()
    assert not result.met
    closes(result)


def test_lithium_is_not_charged_below_freezing_though_the_loads_are_fed(robots):
    """A box at -15 degC all year: by day the panel carries the load, not a watt-hour is stored, every night is out."""
    cold = {**robots.HILL["climate"], "temp_min_c": [-16.0] * 12, "temp_max_c": [-14.0] * 12}
    place = at(robots, robots.robot(watts=100.0, load_w=0.5), climate=cold)
    battery = place.battery.model_copy(update={"charge_min_c": 0.0})
    result = answer(place.model_copy(update={"battery": battery}), trace=True)
    assert (np.diff(result.trace.soc[:, 0]) <= 1e-12).all()
    assert "frost" in {caution.code for caution in result.cautions}
    assert result.energy.out["spilled"] > 0.8 * result.energy.panel
    heated = battery.model_copy(update={"heater_w": 5.0})
    warm = answer(place.model_copy(update={"battery": heated}), trace=True)
    assert (np.diff(warm.trace.soc[:, 0]) > 0).any()
    assert warm.energy.out["heater"] > 0
    for one in (result, warm):
        closes(one)


def test_a_load_the_pack_cannot_give_is_an_outage_not_a_miracle(robots):
    """200 W from 2 Ah: hardly any of it is served, in every month."""
    result = answer(robots.robot(watts=60.0, battery_ah=2.0, load_w=200.0))
    assert result.unserved_share > 0.98
    assert (result.months["hours_out_per_year"] > 600.0).all()
    assert "pack-too-weak" in {caution.code for caution in result.cautions}
    closes(result)


@pytest.mark.parametrize("load_w", [0.0, 1e-9])
def test_a_robot_without_loads_to_speak_of_survives(robots, load_w):
    """Nothing asked, nothing missed; what would still fit is watts, not a multiple of nothing."""
    robot = robots.robot(load_w=load_w, controller={"kind": "mppt", "own_use_w": 0.0})
    result = check(robot, weather=robots.quick_weather(robots.hill(), years=2))
    assert result.met
    assert result.unserved_share == 0.0
    assert result.outages.first is None
    # the darkest week gives this panel about half a watt; more than a tenth of that fits
    assert 0.05 < result.extra_load_w < 2.0


def test_a_draw_while_off_beyond_the_harvest_never_lets_it_come_back(robots):
    """Cut off once, it stays off until someone comes: once a year."""
    battery = {"chemistry": "li-ion", "cells_in_series": 3, "capacity_ah": 3.0, "boot_wh": 30.0, "off_draw_w": 0.5}
    result = answer(robots.robot(watts=3.0, battery=battery))
    assert result.visits_per_year == 1.0
    assert result.outages.longest_h > 8000.0
    closes(result)


def test_a_half_hour_zone_and_one_of_three_quarters_keep_the_local_clock(robots):
    """A lamp from 19 to 21 in zones of +5:30 and +5:45 burns two hours a day, at that hour of the wall clock."""
    for zone, longitude, minutes in (("Asia/Kolkata", 78.0, 330), ("Asia/Kathmandu", 85.0, 345)):
        robot = robots.robot()
        lamp = robot.loads[0].model_copy(update={"hours": ((19.0, 21.0),), "watts": 2.0})
        there = at(robots, robot.model_copy(update={"loads": (lamp,)}), time_zone=zone, longitude=longitude)
        result = answer(there, trace=True)
        lanes, demand = result.lanes, result.trace.demand_w
        busy = demand[:, 0] - demand.min()
        clock = result.weather.times[lanes.row[:, 0]] + pd.Timedelta(minutes=minutes)
        hour = clock.hour + clock.minute / 60.0
        daily_wh = (busy * lanes.step_h[:, 0]).sum() / 365.0
        assert daily_wh == pytest.approx(2.0 * 2.0 / 0.9, rel=0.02)
        # an hour's step is centred at most half an hour outside the duty
        assert hour[busy > 0].min() >= 18.5
        assert hour[busy > 0].max() <= 21.5
        closes(result)


def test_the_southern_hemisphere_is_the_northern_one_half_a_year_later(robots):
    """The mirrored climate at 46 S: June is dark, the energy year starts six months later, panels lean north."""
    north = robots.robot(watts=15.0)
    turned = {
        name: values[6:] + values[:6] if isinstance(values, list) else values
        for name, values in robots.HILL["climate"].items()
    }
    south = at(robots, north.model_copy(update={"heading_deg": 0.0}), latitude=-46.0, climate=turned)
    up, down = answer(north, years=3), answer(south, years=3)
    assert int(down.months["plane_wh_m2_day"].idxmin()) in (5, 6, 7)
    shift = (down.inputs.year_starts_month - up.inputs.year_starts_month) % 12
    assert shift in (5, 6, 7)
    # 15 %: the drawn years differ, and the sun is nearer in the southern summer.
    assert down.energy.panel == pytest.approx(up.energy.panel, rel=0.15)


def written(weather, folder, name, every):
    """Weather as an own CSV in means of ``every`` steps, and the site that names it."""
    table = weather.resample(every, label="left", closed="left").mean()
    table.index.name = "time"
    table.to_csv(folder / name, date_format="%Y-%m-%dT%H:%M:%SZ", float_format="%.4f")
    return WeatherSource(source="file", file=name, label="start")


def minutes_of(site, first, last, *, step="5min", seed=4):
    """A synthetic record: a clear sky under clouds that come and go in half hours, days bright and dull."""
    import pvlib

    times = pd.date_range(first, last, freq=step, tz="UTC", inclusive="left", unit="s")
    middles = times + pd.Timedelta(step) / 2
    zenith = pvlib.solarposition.get_solarposition(middles, site.latitude, site.longitude)["zenith"].to_numpy()
    cosine = np.maximum(np.cos(np.radians(zenith)), 0.0)
    clear = 1098.0 * cosine * np.exp(-0.057 / np.maximum(cosine, 0.01))
    rng = np.random.default_rng(seed)
    per_day = round(pd.Timedelta("1D") / pd.Timedelta(step))
    days = np.repeat(rng.uniform(0.15, 0.95, size=len(times) // per_day), per_day)
    gusts = np.repeat(rng.uniform(0.7, 1.0, size=len(times) // 6 + 1), 6)[: len(times)]
    ghi = clear * days * gusts
    share = np.clip(1.15 - days * gusts, 0.15, 1.0)  # diffuse
    dni = np.where(zenith < 88.0, ghi * (1.0 - share) / np.maximum(cosine, 0.03), 0.0)
    hour = (times.hour + times.minute / 60.0).to_numpy()
    air = 12.0 + 6.0 * np.sin((hour - 9.0) / 24.0 * 2.0 * np.pi)
    columns = {"ghi": ghi, "dni": dni, "dhi": ghi - dni * cosine, "temp_air": air, "wind_speed": 2.0}
    return pd.DataFrame(columns, index=times)


def test_steps_of_five_minutes_and_of_an_hour_agree(robots, tmp_path):
    """One synthetic winter in both: the same energy, and unserved within 1 % of what is asked."""
    site = robots.hill().model_copy(update={"folder": str(tmp_path), "time_zone": "UTC"})
    fine = minutes_of(site, "2019-01-01", "2020-01-01")
    winter = Deployment(start="10-15", end="02-15")  # a third of the steps, all of the trouble
    robot = robots.robot(watts=9.0, work_w=10.0).model_copy(update={"deployment": winter})
    unserved, panel, work = [], [], []
    for name, every in (("fine.csv", "5min"), ("coarse.csv", "60min")):
        there = site.model_copy(update={"weather": written(fine, tmp_path, name, every)})
        chain = Chain(weather_for(there))
        assert chain.weather.step_h == pd.Timedelta(every) / pd.Timedelta("1h")
        balance = chain.run(robot.model_copy(update={"site": there}))
        unserved.append(balance.unserved_wh.sum() / (balance.demand_wh - balance.work_asked_wh).sum())
        panel.append(balance.ledger.panel.sum())
        work.append(1.0 - balance.skipped_wh.sum() / balance.work_asked_wh.sum())
    assert 0.05 < unserved[0] < 0.9
    assert unserved[1] == pytest.approx(unserved[0], abs=0.01)
    # 2 %: within an hour the sun climbs, and cells bend with the light.
    assert panel[1] == pytest.approx(panel[0], rel=0.02)
    assert work[1] == pytest.approx(work[0], abs=0.02)


def test_a_record_with_leap_years_keeps_every_day(robots, tmp_path):
    """Three years around a 29 February: 1,096 days of demand, and each lane its own length."""
    site = robots.hill().model_copy(update={"folder": str(tmp_path), "time_zone": "UTC"})
    record = minutes_of(site, "2019-01-01", "2022-01-01", step="60min")
    there = site.model_copy(update={"weather": written(record, tmp_path, "three.csv", "60min")})
    result = answer(robots.robot().model_copy(update={"site": there}), years=3, trace=True)
    hours = result.lanes.step_h
    assert sorted((hours.sum(axis=0) / 24.0).tolist()) == [365.0, 365.0, 366.0]
    assert sorted(result.lanes.row[hours > 0].tolist()) == list(range(1096 * 24))
    assert result.inputs.years == result.verdict.years == 3
    closes(result)
