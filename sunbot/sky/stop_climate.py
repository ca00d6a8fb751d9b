"""Which climate a stop of a route has."""

from __future__ import annotations

import numpy as np

from ..errors import Fault, InputError
from ..inputs.site import Climate, Site, Stop
from ..types import Caution
from .legs import distance_km
from .world import ALWAYS_DARK_KWH, first_climate, monthly_extraterrestrial_kwh

SITE_REACH_KM = 200.0
"""So far the site's climate is taken to hold. Common practice: mean light changes little over that."""
MOST_KWH = 12.0


def climate_at(site: Site, stop: Stop) -> tuple[Climate | None, tuple[Caution, ...]]:
    """The climate of a stop and what to know of it.

    Its own; else that of the site within 200 km; else that of the world table; else, where the table has no data, that
    of the site from afar. The site's is carried as clearness, so that latitude acts in full. Under a clear sky it only
    gives the air, and may be missing.

    Raises
    ------
    InputError
        There is none of these.
    """
    name = name_of(stop)
    if stop.climate is not None:
        return stop.climate, ()
    far_km = distance_km(Stop(start="01-01", latitude=site.latitude, longitude=site.longitude), stop)
    if site.climate is not None and (far_km <= SITE_REACH_KM or site.weather.source == "clear-sky"):
        return _carried(site.climate, site.latitude, stop.latitude), ()
    if site.weather.source == "clear-sky":
        return None, ()
    try:
        first = first_climate(stop.latitude, stop.longitude)
    except InputError as error:
        if site.climate is None:
            remedy = "[stop.climate] with twelve monthly means of the place"
            raise InputError(Fault(f"site.toml: {name}: climate", error.faults[0].wrong, remedy)) from None
        text = (
            "There is no climate for it: clearness and temperatures of the site, over 200 km away, are taken at its "
            "latitude. Write [stop.climate]."
        )
        return _carried(site.climate, site.latitude, stop.latitude), (Caution("climate-from-afar", name, text),)
    text = (
        "Its light is read off a coarse table of the world: most months lie within 15 %, coasts and mountains further "
        "off. Write [stop.climate]."
    )
    coarse = Climate(
        ghi_kwh_m2_day=first.ghi_kwh_m2_day, temp_min_c=first.temp_min_c, temp_max_c=first.temp_max_c, coarse=True
    )
    return coarse, (Caution("coarse-stop", name, text),)


def name_of(stop: Stop) -> str:
    """What people call it, else its date."""
    return stop.name or f"stop from {stop.start}"


def _carried(climate: Climate, from_latitude: float, to_latitude: float) -> Climate:
    """The climate with its light at another latitude, under a sky as clear in every month."""
    if from_latitude == to_latitude:
        return climate
    here, there = monthly_extraterrestrial_kwh(from_latitude), monthly_extraterrestrial_kwh(to_latitude)
    lit = here > ALWAYS_DARK_KWH
    clearness = np.asarray(climate.ghi_kwh_m2_day)[lit] / here[lit]
    # a month dark at the site takes the least of the others
    whole = np.full(12, clearness.min())
    whole[lit] = clearness
    light = np.minimum(whole * there, MOST_KWH)
    return climate.model_copy(update={"ghi_kwh_m2_day": tuple(float(value) for value in light)})
