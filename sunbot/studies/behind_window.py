"""Behind a window: hours of sun on the panel, lux beside W/m², and how far from the glass the robot can live."""

from __future__ import annotations

from collections.abc import Sequence
from dataclasses import dataclass, replace
from typing import Any

import numpy as np
import pandas as pd

from ..calendar import Lanes
from ..errors import Fault, InputError
from ..inputs.robot import Robot
from ..inputs.window import Window
from ..light import window_cautions, window_light
from ..light.window_light import COATED_FACTOR
from ..sky import Weather, weather_for
from ..storage import as_filed
from ..types import Caution, FloatArray
from .chain import Chain
from .inputs_used import InputsUsed, inputs_used
from .months import month_hours, month_sums
from .plain import plain_document
from .verdict import verdict_on

DISTANCES_M = (0.1, 0.2, 0.3, 0.5, 0.75, 1.0, 1.5, 2.0, 3.0)
"""Distances from the glass that are tried beside the robot's own."""
SUNSHINE_W_M2 = 120.0
"""Direct normal light from which on the sun shines. Published: WMO Guide No. 8, part I, ch. 8."""


@dataclass(frozen=True, eq=False)
class BehindWindow:
    """What a window gives a robot.

    months : DataFrame by month 1-12 for the first panel, means over all years. sun_h_day, sun_clear_sky_h_day : hours a
        day with the sun on the panel, in the weather as it is and if every sky were clear (a patch half lit counts
        half). light_wh_m2_day, direct_wh_m2_day, lamp_wh_m2_day : irradiation of its plane, and what of it was direct
        outside or is of the lamps. klux_h_day, brightest_lux : illuminance. lumens_per_w : of all light together.
    distances : DataFrame by distance_m: survival, work_done (NaN where no work is asked), target_met,
        worst_month, the one with the least harvest; harvest_wh_day and light_wh_m2_day (of the first panel) in it.
    farthest_m : the last of the distances tried before the target is missed again, from the nearest at which it is
        met; None where it never is.
    survival_coated : share alive if the glass passes COATED_FACTOR times less; None for clear glass.
    """

    robot: Robot
    inputs: InputsUsed
    months: pd.DataFrame
    distances: pd.DataFrame
    farthest_m: float | None
    survival_coated: float | None
    cautions: tuple[Caution, ...]

    def to_dict(self) -> dict[str, Any]:
        """The JSON document."""
        return plain_document(
            {
                "inputs": self.inputs.to_dict(),
                "months": self.months.reset_index().to_dict(orient="records"),
                "distances": self.distances.reset_index().to_dict(orient="records"),
                "farthest_m": self.farthest_m,
                "survival_coated": self.survival_coated,
                "cautions": [caution.__dict__ for caution in self.cautions],
            }
        )


def behind_window(
    robot: Robot,
    *,
    weather: Weather | None = None,
    years: int = 50,
    seed: int = 1,
    distances_m: Sequence[float] = DISTANCES_M,
) -> BehindWindow:
    """What does its window give ``robot``, and how far from the glass can it live?

    Parameters
    ----------
    weather : Weather, optional
        Light it is held against; left out, ``weather_for(robot.site, years=years, seed=seed)``.
    years, seed : int
        Weather years to try, and the seed of everything drawn.
    distances_m : sequence of float
        Distances of the panel from the glass to try [m], above 0; the robot's own is added.

    Raises
    ------
    InputError
        The robot has no window, or no such robot can be built.
    ValueError
        A distance is not above 0.
    """
    window = robot.window
    if window is None:
        raise InputError(
            Fault("robot file: window", "is missing", "a [window] table with azimuth_deg, width_m and height_m")
        )
    if any(not distance > 0.0 for distance in distances_m):
        raise ValueError(f"distances must be above 0, not {list(distances_m)}")
    weather = weather_for(robot.site, years=years, seed=seed) if weather is None else weather
    chain = Chain(weather, seed=seed)
    table = distance_table(chain, robot, distances_m=sorted({float(window.distance_m), *map(float, distances_m)}))
    return BehindWindow(
        robot=robot,
        inputs=inputs_used(robot, weather, years=years, seed=seed, first_month=chain.first_month(robot)),
        months=months_behind(chain, robot),
        distances=table,
        farthest_m=_farthest_m(table),
        survival_coated=_survival_coated(chain, robot) if window.clear_share < 1.0 else None,
        cautions=(*weather.cautions, *window_cautions(robot, chain.lights(robot))),
    )


def months_behind(chain: Chain, robot: Robot) -> pd.DataFrame:
    """Sun, light and lux on the first panel by month; columns as in `BehindWindow`."""
    weather = chain.weather
    light = window_light(robot.panels[0], robot, weather=weather, sun=chain.sun())
    daylight = light.direct_w_m2 + light.diffuse_w_m2
    shines = weather.table["dni"].to_numpy() > SUNSHINE_W_M2
    steps = np.bincount(chain.months, minlength=13)[1:]

    def per_day(values: FloatArray) -> FloatArray:
        total = np.bincount(chain.months, weights=values, minlength=13)[1:]
        return np.asarray(np.divide(24.0 * total, steps, out=np.full(12, np.nan), where=steps > 0))

    table = pd.DataFrame(
        {
            "sun_h_day": per_day(light.sun_share * shines),
            "sun_clear_sky_h_day": per_day(light.sun_share),
            "light_wh_m2_day": per_day(daylight + light.lamp_w_m2),
            "direct_wh_m2_day": per_day(light.direct_w_m2),
            "lamp_wh_m2_day": per_day(light.lamp_w_m2),
            "klux_h_day": per_day(light.lux) / 1000.0,
            "brightest_lux": [light.lux[chain.months == month].max(initial=0.0) for month in range(1, 13)],
        },
        index=pd.RangeIndex(1, 13, name="month"),
    )
    table["lumens_per_w"] = 1000.0 * table["klux_h_day"] / table["light_wh_m2_day"]
    return table


def distance_table(chain: Chain, robot: Robot, *, distances_m: Sequence[float]) -> pd.DataFrame:
    """Distance against survival; columns as in `BehindWindow`. Every distance is held to the calendar of the robot."""
    lanes = chain.lanes(robot)
    found = []
    for distance_m in distances_m:
        moved = robot.model_copy(update={"window": _moved(robot, distance_m)})
        verdict = verdict_on(chain.run(moved, lanes=lanes, keep="verdict"), robot.target)
        offer_wh = _wh_by_month(chain.offer_w(moved), lanes)
        worst = int(np.nanargmin(offer_wh))
        found.append(
            {
                "distance_m": distance_m,
                "survival": float(verdict.survival[0]),
                "work_done": float(verdict.work_done[0]),
                "target_met": bool(verdict.target_met[0]),
                "worst_month": worst + 1,
                "harvest_wh_day": float(offer_wh[worst]),
                "light_wh_m2_day": float(_wh_by_month(chain.lights(moved)[0].plane_w_m2[:, 0], lanes)[worst]),
            }
        )
    return pd.DataFrame(found).set_index("distance_m")


def _wh_by_month(power_w: FloatArray, lanes: Lanes) -> FloatArray:
    """Energy a day by month, NaN in months that no lane reaches; (12,)."""
    hours = month_hours(lanes)
    energy = month_sums(power_w, lanes)
    return np.asarray(np.divide(24.0 * energy, hours, out=np.full(12, np.nan), where=hours > 0.0))


def _moved(robot: Robot, distance_m: float) -> Window:
    if robot.window is None:
        raise ValueError("the robot has no window")
    return robot.window.model_copy(update={"distance_m": distance_m})


def _farthest_m(table: pd.DataFrame) -> float | None:
    """The last distance before the target is missed again, from the first at which it is met."""
    met = table["target_met"].to_numpy()
    if not met.any():
        return None
    first = int(np.argmax(met))
    missed = np.flatnonzero(~met[first:])
    last = len(met) - 1 if not missed.size else first + int(missed[0]) - 1
    return float(table.index[last])


def _survival_coated(chain: Chain, robot: Robot) -> float:
    """Share of years alive if the glass passes less by the factor coated glass may be off."""
    filed = as_filed(robot, len(chain.demand(robot).level_loads))
    dim = replace(filed, light_x=filed.light_x / COATED_FACTOR)
    return float(verdict_on(chain.run(robot, dim, keep="verdict"), robot.target).survival[0])
