"""Where the nose points, and for what share of each step."""

from __future__ import annotations

import numpy as np

from ..calendar import Clock, duty_share, local_clock, standard_clock
from ..inputs.robot import Panel, Robot
from ..sky.weather import Weather
from ..types import FloatArray, IntArray
from .carriers import Sun
from .view import Run

N_HEADINGS = 16
"""Headings a roaming robot is taken to show equally often."""
_STREAM = 48_271  # keeps the draw of headings apart from the draws of weather


def noses(robot: Robot, sun: Sun) -> FloatArray:
    """Where the nose points, from north, clockwise [deg]; (n_rows or 1, n_headings).

    A robot that turns to the sun does so with the side its panels lean to.
    """
    if robot.heading == "fixed":
        return np.array([[robot.heading_deg]])
    if robot.heading == "roams":
        return np.asarray(np.arange(N_HEADINGS)[None, :] * (360.0 / N_HEADINGS), dtype=np.float64)
    return (sun.azimuth_deg[:, None] - _leaning_deg(robot.panels)) % 360.0


def heading_matters(panel: Panel) -> bool:
    """Whether the light on a panel depends on where the nose points."""
    return panel.tilt_deg > 0.0 or bool(panel.obstructions)


def heading_weight(
    robot: Robot, weather: Weather, *, cells_w_m2: list[FloatArray], runs: list[Run], seed: int
) -> FloatArray:
    """Share of each step spent under each heading of a roaming robot; (n_times or 1, 16), rows sum to 1.

    While a load that moves it is due every heading counts alike. Else it stands as ``robot.parked`` says: every heading
    alike ("mean"), one heading each local day drawn from the seed ("random"), or the heading that brings the month's
    least light, of all years together ("worst").

    cells_w_m2 : (n_times, 16) light on the cells of each panel for which heading matters, times its watts.
    """
    if robot.parked == "mean":
        return np.full((1, N_HEADINGS), 1.0 / N_HEADINGS)
    moving = moving_share(robot, weather)
    if moving.min() >= 1.0:
        return np.full((1, N_HEADINGS), 1.0 / N_HEADINGS)
    if robot.parked == "random":
        clock = local_clock(weather.ref_times, weather.place.time_zone, reference=weather.kind != "record")
        parked = _drawn_by_day(clock, runs, seed=seed, n_times=len(weather.times))
    else:
        month = standard_clock(weather.ref_times, weather.place.time_zone).month
        parked = _worst_by_month(month, cells_w_m2, runs=runs)[month - 1][weather.row]
    share = moving[weather.row]
    weight = np.repeat(share[:, None] / N_HEADINGS, N_HEADINGS, axis=1)
    weight[np.arange(len(parked)), parked] += 1.0 - share
    return weight


def moving_share(robot: Robot, weather: Weather) -> FloatArray:
    """Share of each reference step in which a load that moves the robot is due; (n_rows,).

    Of several loads the longest counts: they are taken to run together.
    """
    share = np.zeros(len(weather.ref_times))
    for load in robot.loads:
        if load.moves:
            due = duty_share(
                weather.ref_times,
                load,
                zone=weather.place.time_zone,
                longitude=weather.place.longitude,
                step_h=weather.step_h,
                reference=weather.kind != "record",
            )
            np.maximum(share, due, out=share)
    return share


def _drawn_by_day(clock: Clock, runs: list[Run], *, seed: int, n_times: int) -> IntArray:
    """One heading for each day of the clock, drawn year by year, so that no year depends on how many there are."""
    new_year = (clock.year - 1970).astype("datetime64[Y]").astype("datetime64[D]").astype(np.int64)
    day_of_year = clock.day - new_year
    drawn: dict[int, IntArray] = {}
    parked = np.empty(n_times, dtype=np.int64)
    for run in runs:
        years = clock.year[run.rows] + run.turn
        for year in np.unique(years):
            if year not in drawn:
                drawn[year] = np.random.default_rng([seed, _STREAM, year]).integers(0, N_HEADINGS, size=366)
            these = years == year
            parked[run.times][these] = drawn[year][day_of_year[run.rows][these]]
    return parked


def _worst_by_month(month: IntArray, cells_w_m2: list[FloatArray], *, runs: list[Run]) -> IntArray:
    """The heading with the least light in each month, January first; (12,)."""
    in_month = (month[:, None] == np.arange(1, 13)).astype(np.float64)
    total = np.zeros((12, N_HEADINGS))
    for cells in cells_w_m2:
        for run in runs:
            total += in_month[run.rows].T @ cells[run.times]
    return np.asarray(np.argmin(total, axis=1), dtype=np.int64)


def _leaning_deg(panels: tuple[Panel, ...]) -> float:
    """The side the panels lean to together, clockwise from the nose; where they balance, that of the first one."""
    lean_w = np.array([panel.total_watts * np.sin(np.radians(panel.tilt_deg)) for panel in panels])
    azimuth = np.radians([panel.azimuth_deg for panel in panels])
    right, ahead = float(lean_w @ np.sin(azimuth)), float(lean_w @ np.cos(azimuth))
    if np.hypot(right, ahead) > 1e-6 * lean_w.sum():
        return float(np.degrees(np.arctan2(right, ahead)))
    return next((panel.azimuth_deg for panel in panels if panel.tilt_deg > 0.0), 0.0)
