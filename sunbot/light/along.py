"""A site as a robot on a route meets it: the same ground under one horizon after the other."""

from __future__ import annotations

import numpy as np

from ..inputs.site import Site
from ..sky.weather import Weather
from ..types import FloatArray


def horizons_along(site: Site, weather: Weather) -> list[tuple[Site, FloatArray]]:
    """The site under each horizon it has, with the share of each reference row under it; (n_rows,), (1,) for one."""
    if weather.stay is None:
        return [(site, np.ones(1))]
    horizons = dict.fromkeys(stay.horizon for stay in weather.stays)
    if len(horizons) == 1:
        return [(site.model_copy(update={"horizon": next(iter(horizons))}), np.ones(1))]
    found = []
    for horizon in horizons:
        these = [number for number, stay in enumerate(weather.stays) if stay.horizon == horizon]
        share = np.isin(weather.stay, these).astype(np.float64)
        found.append((site.model_copy(update={"horizon": horizon}), share))
    return found
