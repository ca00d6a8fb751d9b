"""W/m2 that reach the cells: weather and a panel in, `Light` per heading out."""

from .carriers import Light, LightYield, Sun, mean_plane_w_m2
from .cautions import ground_cautions
from .headings import heading_matters
from .level import light_on_level
from .lighting import lights_on, parked_otherwise
from .room import room_air_c, weather_in_room
from .sun import sun_over
from .sun_field import SunField, sun_field
from .window_light import WindowLight, window_cautions, window_light

__all__ = [
    "Light",
    "LightYield",
    "Sun",
    "SunField",
    "WindowLight",
    "ground_cautions",
    "heading_matters",
    "light_on_level",
    "lights_on",
    "mean_plane_w_m2",
    "parked_otherwise",
    "room_air_c",
    "sun_field",
    "sun_over",
    "weather_in_room",
    "window_cautions",
    "window_light",
]
