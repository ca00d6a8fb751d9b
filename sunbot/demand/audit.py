"""Rails at the worst moment: brown-out at start currents, hot regulators, thin wires."""

from __future__ import annotations

from collections.abc import Iterator
from dataclasses import dataclass

import numpy as np

from ..inputs.robot import Load, Rail, Robot
from ..types import BoolArray, Caution, FloatArray
from .loads import load_w, wire_ohm
from .rails import (
    JUNCTION_LIMIT_C,
    bare_regulator_limit_w,
    linear_heat_w,
    margin_v,
    output_v,
    sagged_v,
)

WIRE_DROP_SHARE = 0.03
"""Share of a rail's voltage its wire may take before it is worth a word. Common practice."""


def rail_cautions(
    robot: Robot,
    *,
    lowest_v: float,
    highest_v: float,
    resistance_ohm: float,
    soc_nodes: FloatArray,
    rest_v_nodes: FloatArray,
    hottest_c: float,
) -> tuple[Caution, ...]:
    """What to know about the rails of a robot: brown-outs, regulator heat, wire drop, wires left out.

    Parameters
    ----------
    robot : Robot
        Loads and rails.
    lowest_v, highest_v : float
        Rest voltage of the pack where its loads are cut, and its highest voltage [V].
    resistance_ohm : float
        Of the pack at the worst, worn and cold [ohm].
    soc_nodes, rest_v_nodes : (n,)
        States of charge, ascending, and the pack's rest voltage there [V].
    hottest_c : float
        Hottest air around the regulators [degC].

    Every load is taken to run at once; the start current of one load at a time comes on top of all others.
    """
    pack = _Pack(resistance_ohm=resistance_ohm, soc=soc_nodes, rest_v=rest_v_nodes, lowest_v=lowest_v)
    found = [_brown_out(robot, rail, pack) for rail in robot.rails if rail.kind != "none"]
    for rail in robot.rails:
        found += [_heat(robot, rail, highest_v=highest_v, hottest_c=hottest_c), _wire_drop(robot, rail, lowest_v)]
    found.append(_no_wire(robot))
    return tuple(caution for caution in found if caution is not None)


def rail_margin_v(
    robot: Robot, rail: Rail, *, rest_v: FloatArray, resistance_ohm: float, starting: Load | None = None
) -> FloatArray:
    """Margin of a regulated rail to a brown-out [V], everything running and one load starting; shape of ``rest_v``.

    At most minus the tolerated voltage where the pack cannot give the current at all.
    """
    amps, watts = _drawn(robot, starting)
    diodes = np.array([each.diode_drop_v for each in robot.rails])
    battery_v = sagged_v(rest_v, resistance_ohm=resistance_ohm, amps=amps, watts=watts, diode_drop_v=diodes)
    in_v = np.maximum(battery_v - rail.diode_drop_v, 0.0)
    volts = float(rail.volts or 0.0)
    drop_v = wire_ohm(rail) * _rail_current(robot, rail, volts, starting)
    dropout = None if rail.kind == "step-up" else rail.dropout_v
    margin = margin_v(in_v, volts=volts, dropout_v=dropout, wire_drop_v=drop_v, tolerance_pct=rail.tolerance_pct)
    return np.where(battery_v > 0.0, margin, np.minimum(margin, -volts * (1.0 - rail.tolerance_pct / 100.0)))


@dataclass(frozen=True, eq=False)
class _Pack:
    """The battery as the rails see it."""

    resistance_ohm: float
    soc: FloatArray
    rest_v: FloatArray
    lowest_v: float


def _on(robot: Robot, rail: Rail) -> Iterator[Load]:
    """Loads of a rail that ever run."""
    return (load for load in robot.loads if load.rail == rail.name and load.on_fraction > 0.0 and load.months)


def _amps(load: Load, volts: float) -> float:
    """Current of a running load [A]."""
    return float(load_w(load, np.array([volts]))[0]) / volts


def _rail_current(robot: Robot, rail: Rail, volts: float, starting: Load | None) -> float:
    """Current in a rail with all its loads running, one of them starting [A]."""
    return sum(
        float(load.peak_a) if load is starting and load.peak_a is not None else _amps(load, volts)
        for load in _on(robot, rail)
    )


def _drawn(robot: Robot, starting: Load | None) -> tuple[float, FloatArray]:
    """What all rails draw: current that does not follow the voltage [A], and power by rail behind its diode [W]."""
    amps, watts = 0.0, np.zeros(len(robot.rails))
    for place, rail in enumerate(robot.rails):
        amps += rail.idle_a
        watts[place] = rail.idle_w
        if rail.kind == "linear":
            amps += _rail_current(robot, rail, float(rail.volts or 0.0), starting)
        elif rail.kind != "none":
            volts = float(rail.volts or 0.0)
            watts[place] += _rail_current(robot, rail, volts, starting) * volts / rail.efficiency
        else:
            for load in _on(robot, rail):
                fixed = load.peak_a if load is starting else load.amps
                amps += fixed or 0.0
                watts[place] += float(load_w(load, np.ones(1))[0]) if fixed is None else 0.0
    return amps, watts


def _brown_out(robot: Robot, rail: Rail, pack: _Pack) -> Caution | None:
    """The worst of all starts on this rail, where it is one."""
    if not any(_on(robot, rail)):
        return None
    starts = [None, *(load for each in robot.rails for load in _on(robot, each) if load.peak_a is not None)]
    rest_v = np.concatenate([[pack.lowest_v], pack.rest_v])
    margins = np.stack(
        [rail_margin_v(robot, rail, rest_v=rest_v, resistance_ohm=pack.resistance_ohm, starting=s) for s in starts]
    )
    worst = int(np.argmin(margins[:, 0]))
    if margins[worst, 0] >= 0.0:
        return None
    load = starts[worst]
    up_to = _highest_soc(pack.soc, margins.min(axis=0)[1:])
    when = "with everything running" if load is None else f'when "{load.name}" starts at {load.peak_a:g} A on top'
    text = (
        f"{when} the rail misses its tolerance or its dropout by {-margins[worst, 0]:.2f} V at the lowest battery "
        f"voltage ({pack.lowest_v:.1f} V at rest); this happens up to {100 * up_to:.0f} % charge. Shorten or thicken "
        "its wire, lower the start current, or choose a converter that needs less voltage above its output."
    )
    return Caution("rail-brownout", f"rail {rail.name}", text[0].upper() + text[1:])


def _highest_soc(soc: FloatArray, margin: FloatArray) -> float:
    """Highest state of charge at which the margin is below 0, joined linearly between nodes."""
    below: BoolArray = margin < 0.0
    if not below.any():
        return float(soc[0])
    last = int(np.flatnonzero(below)[-1])
    if last == soc.size - 1:
        return float(soc[-1])
    return float(soc[last] + (soc[last + 1] - soc[last]) * margin[last] / (margin[last] - margin[last + 1]))


def _heat(robot: Robot, rail: Rail, *, highest_v: float, hottest_c: float) -> Caution | None:
    """A linear regulator that needs a heatsink."""
    if rail.kind != "linear" or rail.volts is None:
        return None
    amps = _rail_current(robot, rail, rail.volts, None)
    in_v = highest_v - rail.diode_drop_v
    heat_w, limit_w = (
        linear_heat_w(in_v, rail.volts, amps=amps, ground_a=rail.idle_a),
        bare_regulator_limit_w(hottest_c),
    )
    if heat_w <= limit_w:
        return None
    text = (
        f"With all its loads on it turns {heat_w:.1f} W into heat ({in_v:.1f} V in, {rail.volts:g} V out, "
        f"{amps:.2f} A); without a heatsink a TO-220 case sheds about {max(limit_w, 0.0):.1f} W in air of "
        f"{hottest_c:.0f} C before its junction passes {JUNCTION_LIMIT_C:.0f} C. "
        "Fit a heatsink, or use a step-down converter."
    )
    return Caution("regulator-heat", f"rail {rail.name}", text)


def _wire_drop(robot: Robot, rail: Rail, lowest_v: float) -> Caution | None:
    """A wire that takes a good part of the rail's voltage."""
    volts = float(output_v(rail.kind, np.array([lowest_v]), volts=rail.volts, diode_drop_v=rail.diode_drop_v)[0])
    amps = _rail_current(robot, rail, volts, None)
    drop_v = amps * wire_ohm(rail)
    if rail.wire is None or drop_v <= WIRE_DROP_SHARE * volts:
        return None
    text = (
        f"{rail.wire.length_m:g} m of {rail.wire.area_mm2:g} mm2, out and back, take {drop_v:.2f} V of "
        f"{volts:.1f} V at {amps:.2f} A, more than {100 * WIRE_DROP_SHARE:g} %. Shorten the wire or take a thicker one."
    )
    return Caution("wire-drop", f"rail {rail.name}", text)


def _no_wire(robot: Robot) -> Caution | None:
    """Rails whose wire was left out."""
    bare = [rail.name for rail in robot.rails if not wire_ohm(rail) and any(_on(robot, rail))]
    if not bare:
        return None
    text = (
        "No wire is given here, so none of its loss is counted. "
        "Write wire = { length_m = ..., area_mm2 = ... } to the rail."
    )
    return Caution("no-wire", f"rail{'s' if len(bare) > 1 else ''} {', '.join(bare)}", text)
