"""The best mount for the worst month."""

import numpy as np
import pytest

from sunbot.inputs.site import Site
from sunbot.sky import weather_for
from sunbot.studies.chain import Chain
from sunbot.studies.tilts import (
    best_mount,
    few_years,
    month_harvest_wh,
    month_ratios,
    tilted,
    worst_ratio,
)


def clear_place(robots, latitude):
    """A robot under a clear sky all year: the sun's path alone decides."""
    site = Site(**(robots.HILL | {"latitude": latitude, "weather": {"source": "clear-sky"}}))
    return robots.robot(site=site)


@pytest.mark.parametrize("latitude", [46.0, -46.0])
def test_under_a_clear_sky_the_midwinter_noon_decides(robots, latitude):
    """Best is the tilt on which the noon sun of midwinter falls square, leaning to the equator, on both halves."""
    # Published: geometry of the solstice, declination 23.45 deg (Cooper, Solar Energy 12 (1969) 333). 10 deg: scattered
    # light, the hours off noon and the weeks off the solstice pull either way, and the optimum is flat.
    robot = clear_place(robots, latitude)
    mount = best_mount(Chain(weather_for(robot.site)), robot)
    assert mount.tilt_deg == pytest.approx(abs(latitude) + 23.45, abs=10.0)
    from_north = (robot.heading_deg + mount.azimuth_deg) % 360.0
    assert (from_north - (180.0 if latitude > 0 else 0.0) + 180.0) % 360.0 - 180.0 == pytest.approx(0.0, abs=15.0)


def test_no_mount_of_a_plain_grid_beats_it(robots):
    """All tilts by 15 deg in all directions by 45 deg: none does better, to 1 % for the mesh of the search."""
    robot = robots.robot(heading_deg=100.0)
    chain = Chain(robots.quick_weather(robot.site, years=2, every=2))
    mount = best_mount(chain, robot)
    tried = [worst_ratio(chain, tilted(robot, tilt, lean)) for tilt in range(0, 91, 15) for lean in range(0, 360, 45)]
    assert mount.worst_ratio >= 0.99 * max(tried)
    assert mount.worst_ratio_filed == worst_ratio(chain, robot)
    assert mount.worst_ratio >= mount.worst_ratio_filed


def test_a_roaming_robot_keeps_its_lean_and_gets_a_tilt(robots):
    """No way to lean is better than another where it parks anywhere; its tilt is judged on the mean of headings."""
    robot = robots.robot(heading="roams")
    chain = Chain(robots.quick_weather(robot.site, years=1, every=3))
    mount = best_mount(chain, robot)
    assert mount.azimuth_deg == 0.0
    # Parked anywhere: what counts is the mean of all headings.
    mean = robot.model_copy(update={"parked": "mean"})
    assert mount.worst_ratio == worst_ratio(chain, tilted(mean, mount.tilt_deg))
    tried = [worst_ratio(chain, tilted(mean, tilt)) for tilt in range(0, 91, 15)]
    assert mount.worst_ratio >= 0.99 * max(tried)


def test_ratios_are_harvest_over_demand_month_by_month(robots):
    """Agrees with the month table that the balance makes."""
    from sunbot.studies.checking import check_on

    robot = robots.robot(work_w=10.0)
    chain = Chain(robots.quick_weather(robot.site, years=2))
    months = check_on(chain, robot, years=2, seed=1).months
    # 1 %: with a rail straight from the battery, demand follows its voltage in the balance.
    assert month_ratios(chain, robot) == pytest.approx(months["harvest_over_demand"].to_numpy(), rel=0.01)
    assert month_harvest_wh(chain, robot) == pytest.approx(months["harvest_wh_day"].to_numpy(), rel=1e-6)


def test_a_deployment_counts_its_own_months_only(robots):
    """Out in May and June, it has ratios and harvest in those months and in no other."""
    robot = robots.robot(deployment={"from": "05-01", "to": "06-30"})
    chain = Chain(robots.quick_weather(robot.site, years=1))
    assert np.flatnonzero(~np.isnan(month_ratios(chain, robot))).tolist() == [4, 5]
    assert np.flatnonzero(~np.isnan(month_harvest_wh(chain, robot))).tolist() == [4, 5]


def test_a_few_years_are_the_first_ones(robots):
    """The light of the first years, untouched; a chain with no more than that is itself."""
    weather = robots.quick_weather(robots.hill(), years=3)
    few = few_years(Chain(weather), 2)
    assert few.weather.n_years == 2
    assert few.weather.table.equals(weather.table.iloc[: len(few.weather.table)])
    chain = Chain(weather)
    assert few_years(chain, 3) is chain
