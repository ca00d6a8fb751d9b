"""Light on the level under the site's horizon: what a place offers before anyone tilts a panel."""

from __future__ import annotations

import numpy as np

from ..inputs.site import Site
from ..sky.weather import Weather
from ..types import FloatArray
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
    if not site.horizon:
        return ghi
    row = weather.row
    steps = Sun(**{name: values[row] for name, values in vars(sun).items()})
    sky = sky_parts(ghi, dni, dhi=dhi, sun=steps, albedo=np.zeros(len(ghi)))
    height = np.maximum(np.cos(np.radians(sun.zenith_deg)), 0.0)
    clears = 90.0 - sun.zenith_deg >= horizon_at(site.horizon, sun.azimuth_deg)
    up = direction(0.0, 90.0)[:, None]
    share = float(sky_shares(up, horizon_at(site.horizon, AZIMUTHS_DEG)[None, :])[0][0])
    hidden = sky.direct * (height * ~clears)[row] + sky.isotropic * (1.0 - share)
    return np.asarray(np.maximum(ghi - hidden, 0.0))
