"""A long track taken in fewer stays, so that its weather can be made."""

from __future__ import annotations

import numpy as np

from ..inputs.site import Stop
from ..types import Caution, IntArray

MOST_LEGS = 24
"""Each stay costs the weather of all years once: a quarter of a second for 50 years."""
LEG_KM = 25.0
"""A track of more points is taken in legs no longer than this, or than it takes to come out with 24."""
KM_PER_DEG = 111.2


def legs_of(stops: tuple[Stop, ...]) -> tuple[tuple[Stop, ...], tuple[Caution, ...]]:
    """The stops as they are, up to 24; of more, neighbours joined, each leg standing where its middle point is.

    Stops with a climate or a horizon of their own are never joined. A caution tells how long the legs are.
    """
    if len(stops) <= MOST_LEGS:
        return stops, ()
    own = sum(stop.climate is not None or bool(stop.horizon) for stop in stops)
    reach_km, legs = LEG_KM, _joined(stops, LEG_KM)
    while len(legs) > max(MOST_LEGS, 2 * own + 1):
        reach_km *= 1.25
        legs = _joined(stops, reach_km)
    text = (
        f"Its {len(stops)} points are taken as {len(legs)} legs, none with a point further than {reach_km:.0f} km from "
        "its first; the robot counts as standing at the middle point of each."
    )
    return legs, (Caution("track-in-legs", "route", text),)


def stop_on(stops: tuple[Stop, ...], month: IntArray, day_of_month: IntArray) -> IntArray:
    """Which stop the robot is at on each day; before the first date of the year it is still at the last one."""
    starts = [31 * first_month + first_day for first_month, first_day in (stop.first for stop in stops)]
    return np.asarray((np.searchsorted(starts, 31 * month + day_of_month, side="right") - 1) % len(stops))


def _joined(stops: tuple[Stop, ...], reach_km: float) -> tuple[Stop, ...]:
    """Runs of stops no further from the first of them than ``reach_km``, as one stop each."""
    groups: list[list[Stop]] = []
    for stop in stops:
        own = stop.climate is not None or bool(stop.horizon)
        last = groups[-1][0] if groups else None
        joins = last is not None and not own and last.climate is None and not last.horizon
        if joins and last is not None and distance_km(last, stop) <= reach_km:
            groups[-1].append(stop)
        else:
            groups.append([stop])
    return tuple(group[len(group) // 2].model_copy(update={"start": group[0].start}) for group in groups)


def distance_km(one: Stop, other: Stop) -> float:
    """Along the great circle."""
    here, there = np.radians([one.latitude, one.longitude]), np.radians([other.latitude, other.longitude])
    half = np.sin((there - here) / 2.0) ** 2
    across = half[0] + np.cos(here[0]) * np.cos(there[0]) * half[1]
    return float(2.0 * np.degrees(np.arcsin(np.sqrt(min(across, 1.0)))) * KM_PER_DEG)
