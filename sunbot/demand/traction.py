"""Drive power from mass, speed and ground."""

from __future__ import annotations

from math import cos, radians, sin

STANDARD_GRAVITY_M_S2 = 9.80665
"""Published: ISO 80000-3."""


def traction_w(
    mass_kg: float, speed_m_s: float, *, rolling_resistance: float, slope_deg: float, drivetrain_efficiency: float
) -> float:
    """Electrical power to drive at a steady speed on even ground [W].

    rolling_resistance is resistance over weight: asphalt 0.010-0.015, rolled gravel 0.01-0.02, loose gravel
    0.04-0.08, sand 0.1-0.4; sources disagree, and small wheels take two to four times as much: measure it.

    Source
    ------
    Published: m g (c cos a + sin a) v / efficiency, first principles; coefficients of car-size wheels from Carvill,
    Mechanical Engineer's Data Handbook (1993). Small wheels: common practice.
    """
    slope = radians(slope_deg)
    force_n = mass_kg * STANDARD_GRAVITY_M_S2 * (rolling_resistance * cos(slope) + sin(slope))
    return force_n * speed_m_s / drivetrain_efficiency
