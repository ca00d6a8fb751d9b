"""The pack per ampere-hour of capacity: stored energy against charge and voltage, and what temperature does to it."""

from __future__ import annotations

from dataclasses import dataclass
from math import log
from typing import Literal

import numpy as np

from ..inputs.chemistries import REST_VOLTAGES
from ..inputs.robot import Battery
from ..types import FloatArray
from . import chemistry as chem
from .chemistry import CELL_KINDS, CellKind

Age = Literal["worn", "new"]
TABLE_NODES = 513
"""Nodes of the look-up in stored energy; the voltage read from it is within 3 mV per cell of the curve."""


@dataclass(frozen=True, eq=False)
class Curve:
    """Rest voltage and stored energy by charge, exactly: voltage linear between nodes, energy its integral.

    soc, rest_v, energy_wh_ah : (n_nodes,) charge 0 to 1, pack volts, Wh per Ah of capacity.
    """

    soc: FloatArray
    rest_v: FloatArray
    energy_wh_ah: FloatArray

    @property
    def full_wh_ah(self) -> float:
        """Stored energy of a full pack."""
        return float(self.energy_wh_ah[-1])

    def energy_at(self, soc: FloatArray | float) -> FloatArray:
        """Stored energy [Wh/Ah] at a charge from 0 to 1; any shape."""
        at = np.asarray(soc, dtype=float)
        k = np.clip(np.searchsorted(self.soc, at, side="right") - 1, 0, self.soc.size - 2)
        slope = np.diff(self.rest_v) / np.diff(self.soc)
        past = at - self.soc[k]
        energy: FloatArray = self.energy_wh_ah[k] + past * (self.rest_v[k] + 0.5 * slope[k] * past)
        return energy

    def soc_at(self, energy_wh_ah: FloatArray | float) -> FloatArray:
        """Charge at a stored energy from 0 to full: the exact inverse of `energy_at`; any shape."""
        at = np.asarray(energy_wh_ah, dtype=float)
        k = np.clip(np.searchsorted(self.energy_wh_ah, at, side="right") - 1, 0, self.soc.size - 2)
        slope = np.diff(self.rest_v) / np.diff(self.soc)
        past, volts = at - self.energy_wh_ah[k], self.rest_v[k]
        soc: FloatArray = self.soc[k] + 2.0 * past / (volts + np.sqrt(volts**2 + 2.0 * slope[k] * past))
        return soc


@dataclass(frozen=True, eq=False)
class Table:
    """One quantity over stored energy, linear between evenly spaced nodes: value = base[k] + slope[k] * place.

    base, slope : (n_nodes,); place = energy / node spacing, k its whole part. The last node repeats the last slope.
    """

    base: FloatArray
    slope: FloatArray

    @classmethod
    def through(cls, values: FloatArray) -> Table:
        """The table through values at the nodes."""
        slope = np.append(np.diff(values), values[-1] - values[-2])
        return cls(values - slope * np.arange(values.size), slope)

    def at(self, place: FloatArray) -> FloatArray:
        """Values at fractional node numbers, at least 0; any shape."""
        k = np.minimum(place.astype(np.intp), self.base.size - 1)
        value: FloatArray = self.base[k] + self.slope[k] * place
        return value


@dataclass(frozen=True, eq=False)
class Pack:
    """A battery of one age; per ampere-hour (Ah) of its capacity at that age.

    capacity_share : capacity over that when new; places_per_wh_ah : table nodes per Wh/Ah
    soc, rest_v, efficiency : tables over stored energy
    resistance_ohm_ah : at 25 °C. limits in `kind`, overruled by the robot file, are already in the fields below.
    """

    kind: CellKind
    cells: int
    curve: Curve
    places_per_wh_ah: float
    soc: Table
    rest_v: Table
    efficiency: Table
    even_efficiency: float | None
    capacity_share: float
    resistance_ohm_ah: float
    max_charge_c: float
    fade_per_h: float
    charge_min_c: float
    charge_max_c: float
    start_soc: float
    cutoff_soc: float
    restart_soc: float
    boot_wh: float
    off_draw_w: float
    heater_w: float
    heater_on_below_c: float
    box_loss_w_per_k: float | None
    box_lag_h: float
    box_rise_c: float


def curve_of(battery: Battery) -> Curve:
    """The pack's rest voltage and stored energy by charge."""
    rest = REST_VOLTAGES[battery.chemistry]
    soc = np.array(rest.soc)
    volts = battery.cells_in_series * np.array(rest.cell_v)
    steps = np.diff(soc) * 0.5 * (volts[1:] + volts[:-1])
    return Curve(soc, volts, np.concatenate(([0.0], np.cumsum(steps))))


def pack_of(battery: Battery, *, age: Age = "worn") -> Pack:
    """The pack of a robot file, worn (capacity times worn_capacity, twice the resistance) or new."""
    kind, rest, curve = CELL_KINDS[battery.chemistry], REST_VOLTAGES[battery.chemistry], curve_of(battery)
    share = battery.worn_capacity if age == "worn" else 1.0
    soc = curve.soc_at(np.linspace(0.0, curve.full_wh_ah, TABLE_NODES))
    efficiency = _along(kind.efficiency, soc)
    if battery.charge_efficiency is not None:
        efficiency = np.full(TABLE_NODES, battery.charge_efficiency)
    if battery.resistance_mohm is None:
        new_ohm_ah = kind.resistance_ohm_ah * battery.cells_in_series
    else:
        new_ohm_ah = battery.resistance_mohm * 1e-3 * battery.capacity_ah
    return Pack(
        kind=kind,
        cells=battery.cells_in_series,
        curve=curve,
        places_per_wh_ah=(TABLE_NODES - 1) / curve.full_wh_ah,
        soc=Table.through(soc),
        rest_v=Table.through(np.interp(soc, curve.soc, curve.rest_v)),
        efficiency=Table.through(efficiency),
        even_efficiency=float(efficiency[0]) if np.ptp(efficiency) == 0 else None,
        capacity_share=share,
        resistance_ohm_ah=new_ohm_ah * share * (chem.WORN_RESISTANCE if age == "worn" else 1.0),
        max_charge_c=_or(battery.max_charge_c, kind.max_charge_c),
        fade_per_h=-log(1.0 - _or(battery.self_discharge_pct_month, kind.fade_pct_month) / 100.0) / chem.HOURS_A_MONTH,
        charge_min_c=_or(battery.charge_min_c, kind.charge_min_c),
        charge_max_c=_or(battery.charge_max_c, kind.charge_max_c),
        start_soc=battery.start_soc,
        cutoff_soc=_or(battery.cutoff_soc, rest.cutoff_soc),
        restart_soc=_or(battery.restart_soc, rest.restart_soc),
        boot_wh=battery.boot_wh,
        off_draw_w=battery.off_draw_w,
        heater_w=battery.heater_w,
        heater_on_below_c=battery.heater_on_below_c,
        box_loss_w_per_k=battery.box_loss_w_per_k,
        box_lag_h=battery.box_lag_h,
        box_rise_c=battery.box_rise_c,
    )


def _along(pairs: tuple[tuple[float, float], ...], at: FloatArray) -> FloatArray:
    """Linear between (x, y) pairs, level outside."""
    x, y = np.array(pairs).T
    return np.asarray(np.interp(at, x, y))


def _or(given: float | None, default: float) -> float:
    return default if given is None else given


def battery_voltages(pack: Pack, n: int = 9) -> FloatArray:
    """Evenly spaced rest voltages [V] from empty to full, (n,): the nodes of supply and demand tables."""
    return np.linspace(pack.curve.rest_v[0], pack.curve.rest_v[-1], n)


def working_weights(pack: Pack, battery_v: FloatArray) -> FloatArray:
    """Weights of voltage nodes for a mean over the charge from cut-off to full; (n_volts,), their sum is 1.

    battery_v : (n_volts,) ascending rest voltages that span the pack's, or one that stands for all.
    A flat chemistry spends nearly all its charge near one voltage, far above the one it has when nearly empty.
    """
    if battery_v.size == 1:
        return np.ones(1)
    rest_v = np.interp(np.linspace(pack.cutoff_soc, 1.0, 1001), pack.curve.soc, pack.curve.rest_v)
    return np.array([np.interp(rest_v, battery_v, hat).mean() for hat in np.eye(battery_v.size)])


def usable_share(pack: Pack, temp_c: FloatArray | float) -> FloatArray:
    """Share of the capacity that can be drawn at a temperature [°C]: 1 from 25 °C up; any shape.

    Source: From memory, see `CellKind.cold_capacity`.
    """
    temp = np.asarray(temp_c, dtype=float)
    (t0, f0), (t1, f1) = pack.kind.cold_capacity[:2]
    share = _along(pack.kind.cold_capacity, temp)
    share = np.where(temp < t0, f0 + (temp - t0) * (f1 - f0) / (t1 - t0), share)
    return np.maximum(share, chem.LEAST_COLD_CAPACITY)


def threshold_wh_ah(pack: Pack, soc: float, temp_c: FloatArray | float) -> FloatArray:
    """Stored energy [Wh/Ah] at which a threshold in charge lies: the cold locks part of the charge below it."""
    usable = usable_share(pack, temp_c)
    return pack.curve.energy_at(1.0 - usable + usable * soc)


def resistance_ohm_ah(pack: Pack, temp_c: FloatArray | float) -> FloatArray:
    """Resistance times capacity [ohm Ah]; doubles from 25 to -10 °C."""
    cold = np.maximum(chem.ROOM_C - np.asarray(temp_c, dtype=float), 0.0)
    ohm_ah: FloatArray = pack.resistance_ohm_ah * np.exp2(cold / chem.RESISTANCE_DOUBLES_PER_K)
    return ohm_ah


def resistance_ohm(pack: Pack, battery_ah: float, *, temp_c: float = chem.ROOM_C) -> float:
    """Resistance [ohm] of the whole pack of a capacity when new, at a temperature."""
    return float(resistance_ohm_ah(pack, temp_c)) / (battery_ah * pack.capacity_share)


def usable_wh(pack: Pack, battery_ah: float, *, temp_c: float = chem.ROOM_C) -> float:
    """Energy [Wh] between full and cut-off at rest, of a pack of a capacity when new, at a temperature."""
    left = pack.curve.full_wh_ah - float(threshold_wh_ah(pack, pack.cutoff_soc, temp_c))
    return left * battery_ah * pack.capacity_share


@dataclass(frozen=True, eq=False)
class Conditions:
    """What the temperature of each step makes of the pack; all of one shape (..., as the temperatures).

    r4 : four times the resistance [ohm Ah]. per_r : 1 / resistance. max_c : highest charge current [1/h], 0 where it
    may not be charged. top_v : pack voltage at which charging is held. tail_h : of the missing charge [h].
    fade : self-discharge [1/h]. cutoff, restart : thresholds [Wh/Ah]; skip : (n_levels, ...).
    """

    r4: FloatArray
    per_r: FloatArray
    max_c: FloatArray
    top_v: FloatArray
    tail_h: FloatArray
    fade: FloatArray
    cutoff: FloatArray
    restart: FloatArray
    skip: FloatArray


def conditions(pack: Pack, temp_c: FloatArray, *, skip_below_soc: FloatArray) -> Conditions:
    """The pack's coefficients at box temperatures [°C] of any shape."""
    kind = pack.kind
    r = resistance_ohm_ah(pack, temp_c)
    cold_c = min(pack.max_charge_c, kind.cold_charge_c) if kind.cold_charge_c < kind.max_charge_c else pack.max_charge_c
    max_c = np.where(temp_c < chem.COLD_CHARGE_BELOW_C, cold_c, pack.max_charge_c)
    allowed = (temp_c >= pack.charge_min_c) & (temp_c <= pack.charge_max_c)
    cold_k = np.maximum(chem.ROOM_C - temp_c, 0.0)
    levels = [threshold_wh_ah(pack, float(soc), temp_c) for soc in skip_below_soc]
    return Conditions(
        r4=4.0 * r,
        per_r=1.0 / r,
        max_c=np.where(allowed, max_c, 0.0),
        top_v=pack.cells * (kind.top_v + kind.top_v_per_k * (temp_c - chem.ROOM_C)),
        tail_h=kind.tail_h * np.exp2(cold_k / chem.TAIL_DOUBLES_PER_K),
        fade=pack.fade_per_h * np.exp2((temp_c - chem.FADE_AT_C) / chem.FADE_DOUBLES_PER_K),
        cutoff=threshold_wh_ah(pack, pack.cutoff_soc, temp_c),
        restart=threshold_wh_ah(pack, pack.restart_soc, temp_c),
        skip=np.array(levels).reshape((len(levels), *temp_c.shape)),
    )


def filling_per_h(tail_h: FloatArray, hours: FloatArray | float) -> FloatArray:
    """Highest share of the missing charge that goes in per hour, over a step of ``hours`` (above 0) [1/h]."""
    with np.errstate(divide="ignore"):
        share = -np.expm1(-np.asarray(hours) / tail_h)
    rate: FloatArray = share / hours
    return rate
