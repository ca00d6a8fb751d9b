"""Weather above the site: a site's source (file, climate, clear sky) in, whole years of `Weather` out."""

from .source import audit_of, reading_for, weather_for, weather_of
from .weather import Weather

__all__ = ["Weather", "audit_of", "reading_for", "weather_for", "weather_of"]
