"""Light on the level under the site's horizon: what a place offers before anyone tilts a panel."""

from __future__ import annotations

import numpy as np

from ..inputs.site import Site
from ..sky.weather import Weather
from ..types import FloatArray
from .along import horizons_along
from .carriers import Sun
from .horizon import AZIMUTHS_DEG, horizon_at, sky_shares
from .plane import direction, sky_parts


def light_on_level(site: Site, weather: Weather, sun: Sun) -> FloatArray:
    """Light on a flat plane at the site [W/m2], after its horizon, before any glass; (n_times,).

    Parameters
    ----------
    site : Site
        Its horizon and albedo.
    weather, sun : Weather, Sun
        ``sun`` as ``sun_over(weather)`` gives it.

    Source
    ------
    The sky's parts as for every panel (`sky_parts`); what the horizon hides of them is taken off ghi.
    """
    ghi, dni, dhi = (weather.table[column].to_numpy(dtype=np.float64) for column in ("ghi", "dni", "dhi"))
    along = horizons_along(site, weather)
    if not any(here.horizon for here, _ in along):
        return ghi
    row = weather.row
    steps = Sun(**{name: values[row] for name, values in vars(sun).items()})
    sky = sky_parts(ghi, dni, dhi=dhi, sun=steps, albedo=np.zeros(len(ghi)))
    hidden = np.zeros(len(ghi))
    for here, days in along:
        beam, share = _hidden(here, sun)
        hidden += (sky.direct * beam[row] + sky.isotropic * share) * days[row if len(days) > 1 else 0]
    return np.asarray(np.maximum(ghi - hidden, 0.0))


def _hidden(site: Site, sun: Sun) -> tuple[FloatArray, float]:
    """What the horizon hides from a flat plane: of the sun by reference row, over light that faces it; of the sky."""
    height = np.maximum(np.cos(np.radians(sun.zenith_deg)), 0.0)
    clears = 90.0 - sun.zenith_deg >= horizon_at(site.horizon, sun.azimuth_deg)
    up = direction(0.0, 90.0)[:, None]
    share = float(sky_shares(up, horizon_at(site.horizon, AZIMUTHS_DEG)[None, :])[0][0])
    return height * ~clears, 1.0 - share
