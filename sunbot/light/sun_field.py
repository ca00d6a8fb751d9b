"""When the sun is up over a site, and when its horizon or the robot's own parts stand before it."""

from __future__ import annotations

from dataclasses import dataclass

import numpy as np
import pandas as pd

from ..calendar import REFERENCE_YEAR, standard_offset_h
from ..inputs.robot import Robot
from ..inputs.site import Site, Stop
from ..sky.legs import stop_on
from ..types import BoolArray, FloatArray, IntArray
from .carriers import Sun
from .headings import noses
from .horizon import beam_lost, horizon_at
from .plane import angles_of, direction, on_slope
from .sun import sun_position
from .view import slope_of

_STEP_MIN = 10


@dataclass(frozen=True, eq=False)
class SunField:
    """The sun by day of the year and hour of the site's standard clock; geometry alone, whatever the weather.

    hour : (n_hours,) middles of the steps. month : (365,). up : (365, n_hours) above the level horizon.
    behind_horizon : (365, n_hours) up, but below the site's horizon.
    behind_robot : (365, n_hours) share of the first panel's direct light that masts and arms take while the sun is
    clear of the horizon; mean over all headings it may take. Else 0.
    """

    hour: FloatArray
    month: IntArray
    up: BoolArray
    behind_horizon: BoolArray
    behind_robot: FloatArray

    def hours_a_day(self, part: FloatArray | BoolArray) -> FloatArray:
        """Hours a day of ``part``, mean over each calendar month; (12,)."""
        per_day = part.sum(axis=1) * 24.0 / len(self.hour)
        days = np.bincount(self.month, minlength=13)[1:]
        return np.asarray(np.bincount(self.month, weights=per_day, minlength=13)[1:] / days)


def sun_field(robot: Robot) -> SunField:
    """The sun over the robot's site (on a route, its stops) through one year of 10-minute steps, on the first panel."""
    site, per_day = robot.site, 24 * 60 // _STEP_MIN
    hour = (np.arange(per_day) + 0.5) * 24.0 / per_day
    days = pd.date_range(f"{REFERENCE_YEAR}-01-01", periods=365, freq="D", tz="UTC", unit="s")
    since_h = np.arange(365)[:, None] * 24.0 + hour - standard_offset_h(site.time_zone)
    times = pd.DatetimeIndex(days[0] + pd.to_timedelta((since_h.ravel() * 3600.0).astype(np.int64), unit="s"))
    zenith_deg, azimuth_deg, horizon_deg = (np.zeros(times.size) for _ in range(3))
    for here, at in _places(site, days):
        rows = np.repeat(at, per_day)
        zenith_deg[rows], azimuth_deg[rows] = sun_position(times[rows], here.latitude, longitude=here.longitude)
        horizon_deg[rows] = horizon_at(here.horizon, azimuth_deg[rows])
    up = zenith_deg < 90.0
    hidden = up & (90.0 - zenith_deg < horizon_deg)
    taken = np.zeros(up.size)
    lit = up & ~hidden
    taken[lit] = _taken(robot, zenith_deg[lit], azimuth_deg[lit])
    shape = (365, per_day)
    month = np.asarray(days.month, dtype=np.int64)
    return SunField(hour, month, up.reshape(shape), hidden.reshape(shape), taken.reshape(shape))


def _places(site: Site, days: pd.DatetimeIndex) -> list[tuple[Site | Stop, BoolArray]]:
    """The site, or each stop of its route, with the days spent there."""
    if not site.stops:
        return [(site, np.ones(len(days), dtype=bool))]
    number = stop_on(site.stops, days.month.to_numpy(dtype=np.int64), days.day.to_numpy(dtype=np.int64))
    return [(stop, number == n) for n, stop in enumerate(site.stops) if (number == n).any()]


def _taken(robot: Robot, zenith_deg: FloatArray, azimuth_deg: FloatArray) -> FloatArray:
    """Share of the first panel's direct light lost to the robot's own parts, mean over headings; (n,)."""
    panel = robot.panels[0]
    if not panel.obstructions or robot.window is not None:
        return np.zeros(zenith_deg.size)
    nothing = np.zeros(zenith_deg.size)
    nose_deg = noses(robot, Sun(zenith_deg, azimuth_deg, nothing, nothing, nothing))
    slope_deg, aspect_deg = slope_of(robot.site)
    rays = direction(azimuth_deg[:, None], 90.0 - zenith_deg[:, None])
    seen_deg, elevation_deg = angles_of(on_slope(rays, -slope_deg, aspect_deg=aspect_deg))
    lost = beam_lost(
        panel.obstructions, seen_deg - nose_deg, sun_elevation_deg=elevation_deg, bypass_groups=panel.bypass_groups
    )
    return np.asarray(lost.mean(axis=1))
