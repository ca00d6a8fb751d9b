"""Other years of the same climate, to hold an answer against that was sized on the first ones."""

from __future__ import annotations

from ..inputs.site import Site
from .climate import generated_weather
from .route import route_weather
from .weather import Weather


def other_years(weather: Weather, site: Site, *, seed: int) -> Weather | None:
    """As many years again of generated weather, none of them in ``weather``; None where the weather has no others."""
    if weather.kind != "generated":
        return None
    if site.stops:
        return route_weather(site, years=weather.n_years, seed=seed, skip=weather.n_years)
    return generated_weather(site, years=weather.n_years, seed=seed, skip=weather.n_years)
