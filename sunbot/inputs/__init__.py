"""What the user writes: a site file and a robot file in, frozen checked models out."""

from .files import files_behind
from .override import site_with_weather
from .reading import load_robot, load_site
from .robot import Robot
from .schema import schema_of
from .site import Site

__all__ = ["Robot", "Site", "files_behind", "load_robot", "load_site", "schema_of", "site_with_weather"]
