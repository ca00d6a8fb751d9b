"""Resistance of copper leads, for panel wires and rail wires alike."""

from __future__ import annotations

CLASS_5_OHM_PER_KM = {0.5: 39.0, 0.75: 26.0, 1.0: 19.5, 1.5: 13.3, 2.5: 7.98, 4.0: 4.95, 6.0: 3.30}
"""Flexible plain copper at 20 °C by cross-section [mm²]. Published: IEC 60228, class 5."""

COPPER_OHM_MM2_M = 0.017241
"""Annealed copper at 20 °C. Published: IEC 60028."""

COPPER_PER_K = 0.004
"""Growth of resistance per kelvin from 20 °C. Common practice, rounded (the standard has 0.00393)."""


def resistance_ohm(length_m: float, area_mm2: float, *, temp_c: float = 20.0) -> float:
    """Resistance of a pair of copper wires, out and back.

    Parameters
    ----------
    length_m : float
        One way [m], at least 0.
    area_mm2 : float
        Copper cross-section [mm²], above 0. At the sizes of the flexible-cable table its values hold,
        at others (gauge sizes) those of solid copper.
    temp_c : float
        Temperature of the copper [°C].

    Raises
    ------
    ValueError
        length_m below 0 or area_mm2 not above 0.

    Source
    ------
    Published: IEC 60228 class 5 (0.5 to 6 mm²); IEC 60028 for other sizes.
    """
    if not length_m >= 0.0 or not area_mm2 > 0.0:
        raise ValueError(f"a wire of {length_m} m and {area_mm2} mm2 is none")
    per_km = CLASS_5_OHM_PER_KM.get(float(area_mm2), 1000.0 * COPPER_OHM_MM2_M / area_mm2)
    return 2.0 * length_m * per_km / 1000.0 * (1.0 + COPPER_PER_K * (temp_c - 20.0))
