"""Conversions whose factor is a definition."""

from __future__ import annotations

WH_PER_MJ = 1e6 / 3600.0
"""Watt-hours in a megajoule."""

KELVIN_AT_0_C = 273.15
