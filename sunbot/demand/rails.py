"""Supplies between battery and loads: what they take, lose in wires and burn as heat."""

from __future__ import annotations

from collections.abc import Sequence
from typing import Literal

import numpy as np

from ..types import FloatArray

RailKind = Literal["step-down", "step-up", "linear", "none"]

JUNCTION_LIMIT_C = 125.0
"""Hottest junction of a linear regulator. Published: data sheets of three-terminal regulators."""

FREE_AIR_K_PER_W = 65.0
"""Junction above air for a TO-220 package without a heatsink. Published: 54 to 65 in two makers' data sheets."""


def output_v(kind: RailKind, battery_v: FloatArray, *, volts: float | None, diode_drop_v: float = 0.0) -> FloatArray:
    """Voltage a rail gives while its regulator holds; with kind "none" that of the battery behind the diode."""
    if kind == "none" or volts is None:
        return battery_v - diode_drop_v
    return np.full_like(battery_v, volts)


def battery_per_output(
    kind: RailKind, battery_v: FloatArray, *, volts: float | None, efficiency: float, diode_drop_v: float = 0.0
) -> FloatArray:
    """Power drawn from the battery per power at the rail's output, idle draws left out; shape of ``battery_v``.

    A converter takes its output over its efficiency, at the voltage behind the diode; a linear regulator passes the
    current on, so that it takes battery over output voltage (never less than 1); "none" loses in the diode alone.
    """
    if kind == "linear" and volts is not None:
        return np.maximum(battery_v, volts + diode_drop_v) / volts
    behind_diode = battery_v / (battery_v - diode_drop_v)
    return behind_diode if kind == "none" else behind_diode / efficiency


def linear_heat_w(in_v: float, out_v: float, *, amps: float, ground_a: float = 0.0) -> float:
    """Heat in a linear regulator [W]: (in - out) x current + in x ground current."""
    return (in_v - out_v) * amps + in_v * ground_a


def bare_regulator_limit_w(air_temp_c: float) -> float:
    """Heat a TO-220 regulator without a heatsink sheds to air of ``air_temp_c`` at its hottest junction [W]."""
    return (JUNCTION_LIMIT_C - air_temp_c) / FREE_AIR_K_PER_W


def added_wire_loss_w(
    share: FloatArray,
    amps: FloatArray,
    *,
    resistance_ohm: float,
    others: Sequence[tuple[FloatArray, FloatArray]],
) -> FloatArray:
    """Mean loss in a shared wire that one load adds to what flows already [W]; (n_times, n_volts).

    Parameters
    ----------
    share, amps : (n_times,), (n_volts,)
        Share of each step in which the load runs, and its full current [A].
    resistance_ohm : float
        Of the wire, out and back [ohm].
    others : sequence of (share, amps)
        The loads whose currents flow already. Loads run together as far as their shares allow.

    Source
    ------
    Published: Joule's law. The losses added in turn sum to R times the mean square of the whole current.
    """
    amps_squared = share[:, None] * amps**2
    for other_share, other_amps in others:
        amps_squared = amps_squared + 2.0 * np.minimum(share, other_share)[:, None] * (amps * other_amps)
    return np.asarray(resistance_ohm * amps_squared)


def sagged_v(
    rest_v: FloatArray, *, resistance_ohm: float, amps: float, watts: FloatArray, diode_drop_v: FloatArray
) -> FloatArray:
    """Battery voltage under load [V]; 0 where it cannot give the power.

    Parameters
    ----------
    rest_v : (n,)
        Rest voltage [V].
    resistance_ohm : float
        Of the battery [ohm].
    amps : float
        Current drawn whatever the voltage [A].
    watts, diode_drop_v : (n_rails,)
        Power [W] drawn at the battery's voltage less the drop of a diode [V].

    Source
    ------
    Published: Ohm's law, v = rest - R (amps + sum of watts/(v - diode)), the upper of its roots.
    """
    lost_v = float(np.max(diode_drop_v, initial=0.0)) + 1e-6
    v = rest_v
    for _ in range(500):  # falls monotonically to the upper root, or through the floor
        room_v = np.maximum(v, lost_v)[:, None] - diode_drop_v
        fallen = rest_v - resistance_ohm * (amps + (watts / np.maximum(room_v, 1e-6)).sum(axis=1))
        if np.allclose(fallen, v, rtol=0.0, atol=1e-9):
            break
        v = fallen
    return np.where(fallen > lost_v, fallen, 0.0)


def margin_v(
    in_v: FloatArray, *, volts: float, dropout_v: float | None, wire_drop_v: FloatArray | float, tolerance_pct: float
) -> FloatArray:
    """How far a regulated rail is from a brown-out [V]; below 0 it is in one. Shape of ``in_v``.

    The lesser of the regulator's input over output and dropout (None: a step-up rail has no such limit), and of the
    voltage at the load over the lowest it tolerates.
    """
    held_v = np.full_like(in_v, volts) if dropout_v is None else np.clip(in_v - dropout_v, 0.0, volts)
    at_load = held_v - wire_drop_v - volts * (1.0 - tolerance_pct / 100.0)
    return at_load if dropout_v is None else np.minimum(at_load, in_v - volts - dropout_v)
