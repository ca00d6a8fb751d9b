"""What a cell of each chemistry takes, loses and allows, where the robot file does not say."""

from __future__ import annotations

from dataclasses import dataclass
from math import inf

HOURS_A_MONTH = 365.25 * 24.0 / 12.0


@dataclass(frozen=True)
class CellKind:
    """Defaults of one chemistry, per cell.

    resistance_ohm_ah : resistance times capacity of a new cell at 25 °C [ohm Ah]
    max_charge_c : charge current over capacity [1/h]; cold_charge_c : the same below 15 °C
    top_v, top_v_per_k : voltage at which charging is held, at 25 °C, and its change with temperature [V, V/K]
    tail_h : time constant of the missing charge at the end of charging, at 25 °C; doubles at 0 °C [h]
    efficiency : charge out over charge in, (charge, share) pairs joined linearly
    fade_pct_month : self-discharge at 20 °C [%/month]
    charge_min_c, charge_max_c : temperatures between which it may be charged [°C]
    work_min_c, work_max_c : temperatures between which it is made to be discharged [°C]
    cold_capacity : (temperature, usable share of the capacity) pairs, ascending, the first slope goes on below
    """

    resistance_ohm_ah: float
    max_charge_c: float
    cold_charge_c: float
    top_v: float
    top_v_per_k: float
    tail_h: float
    efficiency: tuple[tuple[float, float], ...]
    fade_pct_month: float
    charge_min_c: float
    charge_max_c: float
    work_min_c: float
    work_max_c: float
    cold_capacity: tuple[tuple[float, float], ...]


# From memory: 0.8 at 0 °C and 0.55 at -20 °C, full at 25 °C.
_COLD = ((-20.0, 0.55), (0.0, 0.8), (25.0, 1.0))

# Resistance, charge rates, tails and temperature windows are common practice; top voltages of lithium are those of
# the published curves' windows, 2.40 V and -4 mV/K of lead-acid common practice; efficiencies published in part
# (NiMH and lead-acid lose most near full), in part from memory; self-discharge from memory.
CELL_KINDS: dict[str, CellKind] = {
    "lifepo4": CellKind(
        resistance_ohm_ah=0.060,
        max_charge_c=0.5,
        cold_charge_c=0.2,
        top_v=3.60,
        top_v_per_k=0.0,
        tail_h=0.3,
        efficiency=((0.0, 0.99), (1.0, 0.99)),
        fade_pct_month=2.5,
        charge_min_c=0.0,
        charge_max_c=45.0,
        work_min_c=-20.0,
        work_max_c=60.0,
        cold_capacity=_COLD,
    ),
    "li-ion": CellKind(
        resistance_ohm_ah=0.060,
        max_charge_c=0.5,
        cold_charge_c=0.5,
        top_v=4.20,
        top_v_per_k=0.0,
        tail_h=0.5,
        efficiency=((0.0, 0.99), (1.0, 0.99)),
        fade_pct_month=2.5,
        charge_min_c=0.0,
        charge_max_c=45.0,
        work_min_c=-20.0,
        work_max_c=60.0,
        cold_capacity=_COLD,
    ),
    "nimh": CellKind(
        resistance_ohm_ah=0.120,
        max_charge_c=0.5,
        cold_charge_c=0.5,
        top_v=inf,
        top_v_per_k=0.0,
        tail_h=0.0,
        efficiency=((0.0, 0.90), (0.7, 0.90), (1.0, 0.66)),
        fade_pct_month=20.0,
        charge_min_c=0.0,
        charge_max_c=45.0,
        work_min_c=-20.0,
        work_max_c=60.0,
        cold_capacity=_COLD,
    ),
    "lead-acid": CellKind(
        resistance_ohm_ah=0.040,
        max_charge_c=0.25,
        cold_charge_c=0.25,
        top_v=2.40,
        top_v_per_k=-0.004,
        tail_h=1.0,
        efficiency=((0.0, 0.95), (0.8, 0.95), (1.0, 0.85)),
        fade_pct_month=3.0,
        charge_min_c=-15.0,
        charge_max_c=45.0,
        work_min_c=-20.0,
        work_max_c=50.0,
        cold_capacity=((0.0, 0.75), (25.0, 1.0)),
    ),
}
"""By the chemistry's name in the robot file."""

COLD_CHARGE_BELOW_C = 15.0
"""Below this `cold_charge_c` holds. Common practice: data sheets cut the current below 10 to 15 °C."""

LEAST_COLD_CAPACITY = 0.05
"""However cold, this share of the capacity stays usable; keeps the slope from passing zero."""

WORN_RESISTANCE = 2.0
"""Resistance of a worn pack over a new one. Common practice."""

RESISTANCE_DOUBLES_PER_K = 35.0
"""Resistance doubles from 25 °C to -10 °C. Common practice."""

TAIL_DOUBLES_PER_K = 25.0
"""The charging tail doubles from 25 °C to 0 °C. Common practice."""

FADE_DOUBLES_PER_K = 10.0
"""Self-discharge doubles per 10 K, both ways from 20 °C. From memory."""

ROOM_C = 25.0
FADE_AT_C = 20.0
