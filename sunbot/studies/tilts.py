"""Which tilt, and for a fixed robot which way the panel leans, carries the worst month best."""

from __future__ import annotations

from collections.abc import Iterable
from dataclasses import dataclass, replace

import numpy as np

from ..calendar import Lanes
from ..inputs.robot import Robot
from ..sky import Weather
from ..types import FloatArray
from .chain import Chain
from .months import month_hours, month_sums

LOOK_YEARS = 5
"""Generated years on which mounts are compared: means by month settle long before survival does."""

_TILTS_DEG = tuple(range(0, 91, 10))
_FINE_TILT_DEG = 5.0
_LEANS_DEG = tuple(range(-180, 180, 45))
_FINE_LEAN_DEG = 15.0
_LOOK_TILT_DEG = 50.0
"""Tilt at which the way to lean is looked for first: a flat panel does not care."""


@dataclass(frozen=True)
class BestMount:
    """The mount of the first panel with the best worst month.

    azimuth_deg : clockwise from the nose, as in the robot file; that of the file where the heading is not fixed.
    worst_ratio, worst_ratio_filed : harvest over demand in the worst month, there and as filed.
    """

    tilt_deg: float
    azimuth_deg: float
    worst_ratio: float
    worst_ratio_filed: float


def tilted(robot: Robot, tilt_deg: float, azimuth_deg: float | None = None) -> Robot:
    """The robot with its first panel at another tilt (and azimuth)."""
    update = {"tilt_deg": float(tilt_deg)} | ({} if azimuth_deg is None else {"azimuth_deg": float(azimuth_deg)})
    panels = (robot.panels[0].model_copy(update=update), *robot.panels[1:])
    return robot.model_copy(update={"panels": panels})


def best_mount(chain: Chain, robot: Robot, *, years: int = LOOK_YEARS) -> BestMount | None:
    """Tilt (and azimuth, if the heading is fixed) of the first panel with the best worst month, found on a few years.

    Best is the largest harvest over demand in the worst month, to 5 deg of tilt and 15 deg of azimuth. A robot that
    parks anywhere counts with the mean of its headings. None behind a window, whose opening decides, and where no
    load asks for anything.
    """
    if robot.window is not None:
        return None
    mounts = _Mounts(chain, robot, years=years)
    filed = robot.panels[0]
    as_filed = mounts.worst_ratio(filed.tilt_deg, filed.azimuth_deg)
    if np.isnan(as_filed):
        return None
    tilt, azimuth = mounts.best_both() if robot.heading == "fixed" else (None, filed.azimuth_deg)
    tilt = mounts.best_tilt(azimuth) if tilt is None else tilt
    best = mounts.worst_ratio(tilt, azimuth)
    if best <= as_filed:
        tilt, azimuth, best = filed.tilt_deg, filed.azimuth_deg, as_filed
    return BestMount(tilt, azimuth, best, as_filed)


class _Mounts:
    """Mounts of the first panel held against each other on a few years."""

    def __init__(self, chain: Chain, robot: Robot, *, years: int) -> None:
        self._chain = few_years(chain, years)
        self._robot = robot.model_copy(update={"parked": "mean"}) if robot.parked == "random" else robot
        self._known: dict[tuple[float, float], float] = {}

    def worst_ratio(self, tilt_deg: float, azimuth_deg: float) -> float:
        """Harvest over demand in the worst month at a mount."""
        mount = (tilt_deg, azimuth_deg)
        if mount not in self._known:
            self._known[mount] = worst_ratio(self._chain, tilted(self._robot, *mount))
        return self._known[mount]

    def best_tilt(self, azimuth_deg: float) -> float:
        """To 5 deg, the lowest of equals."""
        coarse = self._best((tilt, azimuth_deg) for tilt in _TILTS_DEG)[0]
        fine = (coarse + step for step in (-_FINE_TILT_DEG, 0.0, _FINE_TILT_DEG))
        return self._best((tilt, azimuth_deg) for tilt in fine if 0.0 <= tilt <= 90.0)[0]

    def best_both(self) -> tuple[float, float]:
        """Tilt to 5 deg and azimuth to 15: the way to lean, then the tilt, then both once more, finer."""
        filed = self._robot.panels[0].azimuth_deg
        _, azimuth = self._best((_LOOK_TILT_DEG, _turned(filed + lean)) for lean in _LEANS_DEG)
        tilt = self.best_tilt(azimuth)
        leans = (azimuth + _FINE_LEAN_DEG * step for step in (-2, -1, 0, 1, 2))
        _, azimuth = self._best((tilt, _turned(lean)) for lean in leans)
        fine = (tilt + step for step in (-_FINE_TILT_DEG, 0.0, _FINE_TILT_DEG))
        return self._best((tilt, azimuth) for tilt in fine if 0.0 <= tilt <= 90.0)

    def _best(self, mounts: Iterable[tuple[float, float]]) -> tuple[float, float]:
        tilt, azimuth = max(mounts, key=lambda mount: self.worst_ratio(*mount))
        return float(tilt), float(azimuth)


def worst_ratio(chain: Chain, robot: Robot) -> float:
    """Harvest offered over demand asked in the worst month of the robot's year; NaN where nothing is ever asked."""
    ratios = month_ratios(chain, robot)
    return float("nan") if np.isnan(ratios).all() else float(np.nanmin(ratios))


def month_ratios(chain: Chain, robot: Robot) -> FloatArray:
    """Harvest offered over demand asked by calendar month, (12,); NaN where nothing is asked."""
    lanes = _lanes(chain, robot)
    asked_wh = month_sums(chain.asked_w(robot), lanes)
    harvest_wh = month_sums(chain.offer_w(robot, accounts=False), lanes)
    return np.asarray(np.divide(harvest_wh, asked_wh, out=np.full(12, np.nan), where=asked_wh > 0))


def month_harvest_wh(chain: Chain, robot: Robot) -> FloatArray:
    """Harvest offered on a mean day of each calendar month [Wh], (12,); NaN in months the robot is not out."""
    lanes = _lanes(chain, robot)
    harvest_wh, hours = month_sums(chain.offer_w(robot, accounts=False), lanes), month_hours(lanes)
    return np.asarray(np.divide(harvest_wh, hours / 24.0, out=np.full(12, np.nan), where=hours > 0))


def few_years(chain: Chain, years: int) -> Chain:
    """A chain over the first years of generated weather; a typical year or a record is taken whole."""
    weather = chain.weather
    if weather.kind != "generated" or years >= weather.n_years:
        return chain
    return Chain(_first_years(weather, years), seed=chain.seed)


def _lanes(chain: Chain, robot: Robot) -> Lanes:
    """Years from January on: sums by month are the same wherever the energy year begins."""
    return chain.lanes(robot, first_month=1)


def _turned(azimuth_deg: float) -> float:
    """The same direction within -180 to below 180."""
    return (azimuth_deg + 180.0) % 360.0 - 180.0


def _first_years(weather: Weather, years: int) -> Weather:
    rows = years * len(weather.ref_times)
    covered = weather.snow_covered
    return replace(
        weather,
        table=weather.table.iloc[:rows],
        row=weather.row[:rows],
        snow_covered=None if covered is None else covered[:rows],
    )
