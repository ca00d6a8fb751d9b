"""Hours of the local clock that say how a robot stands or a lid leans, as shares of steps."""

from __future__ import annotations

from dataclasses import dataclass

import numpy as np

from ..calendar import duty_share
from ..inputs.robot import Panel
from ..sky.weather import Weather
from ..types import FloatArray


@dataclass(frozen=True)
class _EveryDay:
    """Hours of the local clock, all days of the year."""

    hours: tuple[tuple[float, float], ...]
    clock: str = "local"
    months: tuple[int, ...] = tuple(range(1, 13))
    weekdays: tuple[str, ...] = ("mon", "tue", "wed", "thu", "fri", "sat", "sun")


def share_between(spans: tuple[tuple[float, float], ...], weather: Weather) -> FloatArray:
    """Share of each reference step that lies in the spans of the local clock, daylight saving included; (n_rows,)."""
    place = weather.place
    return duty_share(
        weather.ref_times,
        _EveryDay(spans),
        zone=place.time_zone,
        longitude=place.longitude,
        step_h=weather.step_h,
        reference=weather.kind != "record",
    )


def tilt_shares(panel: Panel, weather: Weather) -> dict[float, FloatArray]:
    """Share of each reference step at each tilt a panel has [deg]; (n_rows,), or (1,) where it has but one."""
    if not panel.tilt_hours:
        return {panel.tilt_deg: np.ones(1)}
    shares: dict[float, FloatArray] = {}
    left = np.ones(len(weather.ref_times))
    for start, end, tilt_deg in panel.tilt_hours:
        share = share_between(((start, end),), weather)
        shares[tilt_deg] = shares.get(tilt_deg, 0.0) + share
        left = left - share
    shares[panel.tilt_deg] = shares.get(panel.tilt_deg, 0.0) + np.maximum(left, 0.0)
    return shares
