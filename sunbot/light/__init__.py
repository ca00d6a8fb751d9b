"""W/m2 that reach the cells: weather and a panel in, `Light` per heading out."""

from .carriers import Light, LightYield, Sun
from .lighting import lights_on, parked_otherwise
from .sun import sun_over

__all__ = ["Light", "LightYield", "Sun", "lights_on", "parked_otherwise", "sun_over"]
