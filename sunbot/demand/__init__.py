"""Duty cycle and rails: loads in, `Demand` at the battery out."""

from .audit import rail_cautions
from .bursts import burst_cautions
from .carriers import Asked, Demand
from .loads import demand
from .traction import traction_w

__all__ = ["Asked", "Demand", "burst_cautions", "demand", "rail_cautions", "traction_w"]
