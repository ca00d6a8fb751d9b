"""From the loads of a robot file to what they ask for at the battery."""

from __future__ import annotations

from collections.abc import Sequence

import numpy as np
import pandas as pd

from ..errors import Fault, InputError
from ..inputs.robot import Load, Rail, Robot
from ..types import FloatArray
from ..wires import resistance_ohm
from .carriers import Asked, Demand
from .duty import running_share, serving_order
from .rails import added_wire_loss_w, battery_per_output, output_v
from .traction import traction_w


def demand(robot: Robot, times: pd.DatetimeIndex, *, battery_v: FloatArray, reference: bool = True) -> Demand:
    """What the loads of a robot ask for at the battery, step by step.

    Parameters
    ----------
    robot : Robot
        Loads, rails and site.
    times : (n_rows,)
        Middles of the steps, UTC.
    battery_v : (n_volts,)
        Battery voltages to work out [V].
    reference : bool
        The times are of the 2001 calendar, with the daylight saving of today.

    Idle draws of converters and of all loads are essential. The work of a load is what it takes beyond its idle
    draw; each skippable load is a level of its own, and pays for the wire loss it adds to that of the loads served
    before it. Raises ``InputError`` where a diode takes the whole battery voltage.
    """
    shares = [running_share(load, times, site=robot.site, reference=reference) for load in robot.loads]
    return demand_of(robot, shares, battery_v=battery_v)


def demand_of(robot: Robot, shares: Sequence[FloatArray], *, battery_v: FloatArray) -> Demand:
    """What the loads ask for at the battery where each works a known share of the time.

    shares : one (n_rows,) per load, 0 to 1. The rest as in `demand`.
    """
    battery_v = np.atleast_1d(np.asarray(battery_v, dtype=np.float64))
    essential, levels = serving_order(robot.loads)
    n_rows = len(shares[0])
    base = np.zeros((4, n_rows, battery_v.size))
    work = np.zeros((4, n_rows, len(levels), battery_v.size))
    for rail in robot.rails:
        supply = _Feed(rail, battery_v)
        fed = [place for place in essential + levels if robot.loads[place].rail == rail.name]
        idle_w = sum(robot.loads[place].idle_watts for place in fed)
        base += supply.idle()
        base[[3, 1, 2]] += supply.add(np.full_like(battery_v, idle_w), np.ones(n_rows))
        for place in fed:
            load = robot.loads[place]
            watts = _work_w(load, supply.volts)
            parts = supply.add(watts, shares[place], constant_current=load.amps is not None)
            target = base if place in essential else work[:, :, levels.index(place)]
            target[:3] += parts
    return Demand(
        battery_v=battery_v,
        essential=_asked(base),
        work=_asked(work),
        skip_below_soc=np.array([robot.loads[place].skip_below_soc for place in levels], dtype=np.float64),
        level_loads=tuple(robot.loads[place].name for place in levels),
    )


def load_w(load: Load, volts: FloatArray) -> FloatArray:
    """Power of a load while it works, on a rail of ``volts`` [W]; shape of ``volts``."""
    if load.amps is not None:
        return load.amps * volts
    if load.traction is not None:
        return np.full_like(volts, traction_w(**load.traction.model_dump()))
    if load.watts is None:
        raise ValueError(f'load "{load.name}" has none of watts, amps and traction')
    return np.full_like(volts, load.watts)


def _work_w(load: Load, volts: FloatArray) -> FloatArray:
    """What a load takes beyond its idle draw while it works [W]."""
    watts = load_w(load, volts)
    if watts.min() < load.idle_watts:
        wrong = f"{load.idle_watts:g} is more than the {watts.min():g} W it takes while it works"
        raise InputError(Fault(f'load "{load.name}": idle_watts', wrong, f"a value from 0 to {watts.min():g}"))
    return watts - load.idle_watts


def wire_ohm(rail: Rail) -> float:
    """Resistance of the wire behind a rail, out and back [ohm]; 0 where none is given."""
    return 0.0 if rail.wire is None else resistance_ohm(rail.wire.length_m, rail.wire.area_mm2)


class _Feed:
    """One rail, to which loads are added in the order in which they are served."""

    def __init__(self, rail: Rail, battery_v: FloatArray) -> None:
        if battery_v.min() <= rail.diode_drop_v:
            wrong = f"{rail.diode_drop_v:g} is not below the lowest battery voltage, {battery_v.min():.2f} V"
            raise InputError(
                Fault(f'rail "{rail.name}": diode_drop_v', wrong, "the drop of the diode in volts, e.g. 0.4")
            )
        self.rail = rail
        self.battery_v = battery_v
        self.volts = output_v(rail.kind, battery_v, volts=rail.volts, diode_drop_v=rail.diode_drop_v)
        self.per_output = battery_per_output(
            rail.kind, battery_v, volts=rail.volts, efficiency=rail.efficiency, diode_drop_v=rail.diode_drop_v
        )
        self.wire_ohm = wire_ohm(rail)
        self.flowing: list[tuple[FloatArray, FloatArray]] = []

    def idle(self) -> FloatArray:
        """Loads, rails, wire and idle power of the converter alone [W]; (4, 1, n_volts)."""
        own_w = self.rail.idle_w + self.battery_v * self.rail.idle_a
        diode_w = self.rail.idle_w * self.rail.diode_drop_v / (self.battery_v - self.rail.diode_drop_v)
        return np.stack([np.zeros_like(own_w), diode_w, np.zeros_like(own_w), own_w])[:, None, :]

    def add(self, watts: FloatArray, share: FloatArray, *, constant_current: bool = False) -> FloatArray:
        """Mean power at the load, lost in the rail and in its wire [W], of one load more; (3, n_times, n_volts)."""
        amps = watts / self.volts
        wire_w = added_wire_loss_w(share, amps, resistance_ohm=self.wire_ohm, others=self.flowing)
        self.flowing.append((share, amps))
        load_w = share[:, None] * watts
        if constant_current:  # such a load draws no more for the wire, it gets less
            wire_w = np.minimum(wire_w, load_w)
            load_w = load_w - wire_w
        return np.stack([load_w, (self.per_output - 1.0) * (load_w + wire_w), wire_w])


def _asked(parts: FloatArray) -> Asked:
    """Loads, rails, wire and idle power with their sum."""
    loads_w, rails_w, wire_w, idle_w = parts
    return Asked(
        total_w=loads_w + rails_w + wire_w + idle_w, loads_w=loads_w, rails_w=rails_w, wire_w=wire_w, idle_w=idle_w
    )
