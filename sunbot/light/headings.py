"""Where the nose points, and for what share of each step."""

from __future__ import annotations

from dataclasses import dataclass

import numpy as np

from ..calendar import Clock, duty_share, local_clock, standard_clock
from ..inputs.robot import Panel, Robot
from ..sky.weather import Weather
from ..types import FloatArray, IntArray
from .carriers import Sun, number_kind
from .hours import share_between
from .view import Run

N_HEADINGS = 16
"""Headings a roaming robot is taken to show equally often."""
_STREAM = 48_271  # keeps the draw of headings apart from the draws of weather


def noses(robot: Robot, sun: Sun) -> FloatArray:
    """Where the nose points, from north, clockwise [deg]; (n_rows or 1, n_headings).

    Columns: the 16 of a robot that roams, then each fixed heading, then the one that follows the sun; those it never
    takes are left out. A robot that turns to the sun does so with the side its panels lean to.
    """
    axis = _axis(robot)
    steady = np.array([[*(np.arange(axis.n_roaming) * (360.0 / N_HEADINGS)), *axis.fixed_deg]])
    if not axis.turns:
        return steady
    to_sun = (sun.azimuth_deg[:, None] - _leaning_deg(robot.panels)) % 360.0
    return np.hstack([np.repeat(steady, len(to_sun), axis=0), to_sun])


def heading_matters(panel: Panel) -> bool:
    """Whether the light on a panel depends on where the nose points."""
    return panel.steepest_deg > 0.0 or bool(panel.obstructions)


def heading_weight(
    robot: Robot, weather: Weather, *, cells_w_m2: list[FloatArray], runs: list[Run], seed: int
) -> FloatArray:
    """Share of each step spent under each heading of ``noses``; (n_times or 1, n_headings), rows sum to 1.

    ``robot.headings`` say which rule holds by the hours, ``robot.heading`` which holds in all others. While a robot
    roams and a load that moves it is due, every heading counts alike. Else it stands as ``robot.parked`` says: every
    heading alike ("mean"), one heading each local day drawn from the seed ("random"), facing the sun ("to-sun"), or
    the heading that brings the month's least light, of all years together ("worst").

    cells_w_m2 : (n_times, n_headings) light on the cells of each panel for which heading matters, times its watts. A
    column for the sun that this robot does not need may be there too.
    """
    axis, n_headings = _axis(robot), cells_w_m2[0].shape[1]
    shares = _rule_shares(robot, weather)
    if not axis.n_roaming:
        rules: tuple[str | float, ...] = (*axis.fixed_deg, "turns-to-sun")
        by_row = np.stack([shares[rule] for rule in rules if rule in shares], axis=1)
        return by_row[weather.row] if len(by_row) > 1 else by_row
    roaming = shares["roams"]
    parked = _parked_share(robot, weather, roaming)
    by_row = np.zeros((len(parked), n_headings), dtype=number_kind(n_headings))
    by_row[:, :N_HEADINGS] = ((roaming - parked) / N_HEADINGS)[:, None]
    for column, nose_deg in enumerate(axis.fixed_deg, start=N_HEADINGS):
        by_row[:, column] = shares[nose_deg]
    if axis.turns:
        by_row[:, -1] = shares.get("turns-to-sun", 0.0) + (parked if robot.parked == "to-sun" else 0.0)
    if robot.parked == "mean":
        by_row[:, :N_HEADINGS] += parked[:, None] / N_HEADINGS
    if robot.parked in ("mean", "to-sun") or parked.max() <= 0.0:
        alike = (by_row == by_row[0]).all()
        return by_row[:1] if alike else by_row[weather.row]
    weight = by_row[weather.row]
    stands = _stands(robot, weather, cells_w_m2=cells_w_m2, runs=runs, seed=seed)
    weight[np.arange(len(weight)), stands] += parked[weather.row]
    return weight


@dataclass(frozen=True)
class _Axis:
    """The headings a robot takes: 16 or none for roaming, the fixed ones, one that turns to the sun or none."""

    n_roaming: int
    fixed_deg: tuple[float, ...]
    turns: bool


def _axis(robot: Robot) -> _Axis:
    rules = _rules(robot)
    fixed = tuple(dict.fromkeys(rule for rule in rules if isinstance(rule, float)))
    turns = "turns-to-sun" in rules or (robot.roams and robot.parked == "to-sun")
    return _Axis(N_HEADINGS if robot.roams else 0, fixed, turns)


def _rules(robot: Robot) -> list[str | float]:
    """The rule of each entry of ``headings``, then the one that holds in all other hours; a fixed one as its angle."""
    entries = [*((heading, angle) for _, _, heading, angle in robot.headings), (robot.heading, robot.heading_deg)]
    return [float(angle or 0.0) if heading == "fixed" else heading for heading, angle in entries]


def _rule_shares(robot: Robot, weather: Weather) -> dict[str | float, FloatArray]:
    """Share of each reference step under each rule; (n_rows,), or (1,) where one rule always holds."""
    *by_hours, otherwise = _rules(robot)
    if not by_hours:
        return {otherwise: np.ones(1)}
    shares: dict[str | float, FloatArray] = {}
    left = np.ones(len(weather.ref_times))
    for rule, (start, end, *_) in zip(by_hours, robot.headings, strict=True):
        share = share_between(((start, end),), weather)
        shares[rule] = shares.get(rule, 0.0) + share
        left = left - share
    shares[otherwise] = shares.get(otherwise, 0.0) + np.maximum(left, 0.0)
    return shares


def _parked_share(robot: Robot, weather: Weather, roaming: FloatArray) -> FloatArray:
    """Share of each reference step in which a roaming robot stands; (n_rows,).

    Within a step the duty that moves it and the hours in which it roams are taken to coincide.
    """
    return np.asarray(roaming - np.minimum(moving_share(robot, weather), roaming))


def _stands(robot: Robot, weather: Weather, *, cells_w_m2: list[FloatArray], runs: list[Run], seed: int) -> IntArray:
    """The heading under which the robot stands in each step, drawn or the worst of the month; (n_times,)."""
    if robot.parked == "random":
        clock = local_clock(weather.ref_times, weather.place.time_zone, reference=weather.kind != "record")
        return _drawn_by_day(clock, runs, seed=seed, n_times=len(weather.times))
    month = standard_clock(weather.ref_times, weather.place.time_zone).month
    return np.asarray(_worst_by_month(month, cells_w_m2, runs=runs)[month - 1][weather.row])


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
            total += in_month[run.rows].T @ cells[run.times, :N_HEADINGS]
    return np.asarray(np.argmin(total, axis=1), dtype=np.int64)


def _leaning_deg(panels: tuple[Panel, ...]) -> float:
    """The side the panels lean to together, clockwise from the nose; where they balance, that of the first one."""
    lean_w = np.array([panel.total_watts * np.sin(np.radians(panel.steepest_deg)) for panel in panels])
    azimuth = np.radians([panel.azimuth_deg for panel in panels])
    right, ahead = float(lean_w @ np.sin(azimuth)), float(lean_w @ np.cos(azimuth))
    if np.hypot(right, ahead) > 1e-6 * lean_w.sum():
        return float(np.degrees(np.arctan2(right, ahead)))
    return next((panel.azimuth_deg for panel in panels if panel.steepest_deg > 0.0), 0.0)
