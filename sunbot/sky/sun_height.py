"""How high the sun stands over the steps of a file: which are lit, and how strong a beam can be."""

from __future__ import annotations

from dataclasses import dataclass, replace

import numpy as np
import pandas as pd
import pvlib

from ..types import BoolArray, FloatArray, IntArray, Place
from .record import LIGHT
from .sun_arc import sun_arc

# Common practice: refraction 0.57 and half the disc 0.27 degrees; below it no part of the sun shows.
LIMB_DEG = -0.833
YEAR_S = 365.25 * 86400.0


@dataclass(frozen=True, eq=False)
class SunHeight:
    """The sun over steps; arrays (n_times,).

    sine : of its true elevation at the middle of the step.
    extra_w_m2 : what arrives above the air on a plane that faces it.
    lit : some part of the sun shows at the start, the middle or the end of the step.
    """

    times: pd.DatetimeIndex
    place: Place
    sine: FloatArray
    extra_w_m2: FloatArray
    lit: BoolArray

    def take(self, rows: IntArray) -> SunHeight:
        """The sun over some of the steps."""
        return replace(
            self, times=self.times[rows], sine=self.sine[rows], extra_w_m2=self.extra_w_m2[rows], lit=self.lit[rows]
        )

    @property
    def zenith_deg(self) -> FloatArray:
        """True zenith angle at the middle of the step."""
        return np.asarray(np.degrees(np.arccos(np.clip(self.sine, -1.0, 1.0))))


def sun_height(times: pd.DatetimeIndex, step_h: float, place: Place) -> SunHeight:
    """The sun over steps of ``step_h`` hours with their middles at ``times`` (UTC)."""
    arc = sun_arc(times, place)
    lit = arc.highest_in(step_h) > np.sin(np.radians(LIMB_DEG))
    return SunHeight(times, place, arc.cos_zenith(), arc.extra_w_m2, lit)


def clear_sky(sun: SunHeight, turbidity: FloatArray) -> dict[str, FloatArray]:
    """ghi, dni, dhi [W/m²] of a clear sky of Linke ``turbidity`` with the sun at the middles, 0 while it is down.

    Source
    ------
    Published: Ineichen & Perez, Solar Energy 73 (2002) 151, as in pvlib.
    """
    up = np.flatnonzero(sun.sine > 1e-6)
    zenith = sun.zenith_deg[up]
    pressure = pvlib.atmosphere.alt2pres(sun.place.altitude_m)
    airmass = pvlib.atmosphere.get_absolute_airmass(pvlib.atmosphere.get_relative_airmass(zenith), pressure)
    altitude, extra = sun.place.altitude_m, sun.extra_w_m2[up]
    sky = pvlib.clearsky.ineichen(zenith, airmass, turbidity[up], altitude=altitude, dni_extra=extra)
    light = {name: np.zeros(len(sun.sine)) for name in LIGHT}
    for name in LIGHT:
        light[name][up] = sky[name]
    return light


def mean_turbidity(times: pd.DatetimeIndex, place: Place) -> FloatArray:
    """Linke turbidity of the place, joined linearly between the monthly means that pvlib ships; (n_times,)."""
    middles = pd.to_datetime([f"2001-{month:02d}-15" for month in range(1, 13)]).tz_localize("UTC")
    monthly = pvlib.clearsky.lookup_linke_turbidity(middles, place.latitude, place.longitude, interp_turbidity=False)
    year = times.year.to_numpy().astype(str).astype("datetime64[Y]").astype("datetime64[s]").astype(np.int64)
    month = (times.as_unit("s").asi8 - year) / YEAR_S * 12.0 - 0.5
    return np.asarray(np.interp(month, np.arange(12), np.asarray(monthly), period=12.0), dtype=np.float64)


def beam_limit_w_m2(sun: SunHeight) -> FloatArray:
    """The strongest beam a step can have [W/m²]: 1.1 x the clear sky's, at most what arrives above the air.

    Common practice: the tenth over the clear sky leaves room for air cleaner than the monthly mean.
    """
    return np.minimum(1.1 * clear_sky(sun, mean_turbidity(sun.times, sun.place))["dni"], sun.extra_w_m2)
