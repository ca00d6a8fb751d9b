"""W/m2 that reach the cells: weather and a panel in, `Light` per heading out."""

from .carriers import Light, LightYield, Sun
from .level import light_on_level
from .lighting import lights_on, parked_otherwise
from .sun import sun_over

__all__ = ["Light", "LightYield", "Sun", "light_on_level", "lights_on", "parked_otherwise", "sun_over"]
