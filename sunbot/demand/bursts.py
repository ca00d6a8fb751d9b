"""What the battery is asked for at one moment: everything that runs together, and one load starting."""

from __future__ import annotations

from collections.abc import Iterator, Mapping, Sequence
from dataclasses import dataclass

import numpy as np
import pandas as pd

from ..inputs.robot import Load, Rail, Robot
from ..types import BoolArray, Caution, FloatArray
from .loads import demand_of
from .together import groups_together

LEAST_V_SHARE = 0.5
"""A start that pulls the battery below this share of its rest voltage is worth a word. Common practice: at half, a
source gives all the power it can; electronics beside it have long gone down."""

NAMED = 4
"""Loads that a text names one by one."""

NAMED_FROM = 0.05
"""Share of the whole from which a text names what is no load."""


def burst_cautions(
    robot: Robot,
    times: pd.DatetimeIndex,
    *,
    reference: bool,
    lowest_v: float,
    resistance_ohm: FloatArray,
    also_w: Mapping[str, float],
) -> tuple[Caution, ...]:
    """Whether the pack can give the full power of all that runs together, one load of it starting.

    The balance sees the mean of a step, where a load that works a fiftieth of the time asks for a fiftieth.

    Parameters
    ----------
    robot : Robot
        Loads and rails.
    times : (n_rows,)
        Middles of the steps in which the robot is out, UTC.
    reference : bool
        The times are of the 2001 calendar.
    lowest_v : float
        Rest voltage of the pack where its loads are cut [V].
    resistance_ohm : (n_rows,)
        Of the worn pack, as cold as it gets in that step of any year [ohm].
    also_w : watts by name
        What else the battery feeds [W].

    Source
    ------
    Published: Ohm's law; a source of resistance R gives V²/(4R) at most. A start asks for current straight from the
    battery or through a linear regulator, for power through a converter.
    """
    groups, ohm = groups_together(robot, times, resistance_ohm, reference=reference)
    pack = _Pack(lowest_v, beside_w=sum(also_w.values()))
    steady = _moments(robot, None, groups, ohm, pack=pack)
    starts = [
        moment
        for place, load in enumerate(robot.loads)
        if load.peak_a is not None
        for moment in _moments(robot, place, groups, ohm, pack=pack)
    ]
    # What cannot even run needs no start to be told.
    for some in (steady, starts):
        beyond = [moment for moment in some if moment.battery_v == 0.0]
        if beyond:
            return (_too_weak(robot, max(beyond, key=lambda moment: moment.asked_x), pack=pack, also_w=also_w),)
    return tuple(_sags(robot, starts, pack=pack))


@dataclass(frozen=True)
class _Pack:
    """The battery at its lowest, and what it feeds beside the loads [V, W]."""

    rest_v: float
    beside_w: float


@dataclass(frozen=True, eq=False)
class _Moment:
    """One group of loads running, one of them starting or none.

    asked_w, most_w : asked of the battery at its rest voltage, and what it gives at most [W]
    battery_v : under the load; 0 where it cannot give it [V]
    """

    starting: Load | None
    running: BoolArray
    asked_w: float
    most_w: float
    battery_v: float
    ohm: float

    @property
    def asked_x(self) -> float:
        """Asked over what can be given."""
        return self.asked_w / self.most_w


def _moments(robot: Robot, starting: int | None, groups: BoolArray, ohm: FloatArray, *, pack: _Pack) -> list[_Moment]:
    """The battery with each group running that holds the load in this place, while it starts; None: none starts."""
    v, amps, load = pack.rest_v, 0.0, None
    if starting is not None:
        load = robot.loads[starting]
        groups, ohm = groups[groups[:, starting]], ohm[groups[:, starting]]
        amps = float(load.peak_a or 0.0) if _rail_of(robot, load).kind in ("none", "linear") else 0.0
    if not len(groups):
        return []
    asked_w = _asked_w(robot, starting, groups, rest_v=v) + pack.beside_w
    left_v = np.maximum(v - ohm * amps, 0.0)
    inside = left_v**2 - 4.0 * ohm * np.maximum(asked_w - amps * v, 0.0)
    battery_v = np.where(inside >= 0.0, 0.5 * (left_v + np.sqrt(np.maximum(inside, 0.0))), 0.0)
    return [
        _Moment(load, groups[k], float(asked_w[k]), float(v**2 / (4.0 * ohm[k])), float(battery_v[k]), float(ohm[k]))
        for k in range(len(groups))
    ]


def _asked_w(robot: Robot, starting: int | None, groups: BoolArray, *, rest_v: float) -> FloatArray:
    """What the loads of each group ask of the battery, all on at once [W]; (n_groups,)."""
    loads = list(robot.loads)
    if starting is not None:
        start = {"amps": loads[starting].peak_a, "watts": None, "traction": None, "idle_watts": 0.0}
        loads[starting] = loads[starting].model_copy(update=start)
    asked = demand_of(
        robot.model_copy(update={"loads": tuple(loads)}),
        [running.astype(np.float64) for running in groups.T],
        battery_v=np.array([rest_v]),
    )
    return np.asarray(asked.essential.total_w[:, 0] + asked.work.total_w[:, :, 0].sum(axis=1))


def _rail_of(robot: Robot, load: Load) -> Rail:
    return next(rail for rail in robot.rails if rail.name == load.rail)


def _too_weak(robot: Robot, moment: _Moment, *, pack: _Pack, also_w: Mapping[str, float]) -> Caution:
    """The pack cannot give what is asked."""
    names = [f'"{load.name}"' for load, runs in zip(robot.loads, moment.running, strict=True) if runs]
    names += [name for name, watts in also_w.items() if watts > NAMED_FROM * moment.asked_w]
    asks = f"Running at once, {_listed(names)} ask" if len(names) > 1 else f"{_listed(names)} alone asks"
    start, remedy = "", ""
    if moment.starting is not None:
        start, remedy = f' while "{moment.starting.name}" starts at {moment.starting.peak_a:g} A', "a lower start, "
    return Caution(
        "pack-too-weak",
        "battery",
        f"{asks} for {_figure(moment.asked_w)} W{start}; worn, nearly empty and at its coldest ({pack.rest_v:.1f} V "
        f"at rest, {_figure(1000.0 * moment.ohm)} mohm) the pack can give {_figure(moment.most_w)} W at most, and goes "
        "down. The answer goes by the mean of a step and need not show it. "
        f"Take {remedy}a larger pack or one of lower resistance.",
    )


def _listed(names: Sequence[str]) -> str:
    if len(names) > NAMED:
        names = [*names[: NAMED - 1], f"{len(names) - NAMED + 1} more"]
    return " and ".join([*([", ".join(names[:-1])] if names[1:] else []), *names[-1:]]) or "The idle draw"


def _figure(value: float) -> str:
    """Three digits, and no powers of ten."""
    return f"{value:.0f}" if value >= 100.0 else f"{value:.3g}"


def _sags(robot: Robot, starts: Sequence[_Moment], *, pack: _Pack) -> Iterator[Caution]:
    """The worst start of each rail straight from the battery, where it pulls the battery far down."""
    for rail in robot.rails:
        here = [(each.battery_v, each.ohm, each.starting) for each in starts if each.starting is not None]
        here = [(v, ohm, load) for v, ohm, load in here if load.rail == rail.name and rail.kind == "none"]
        volts, ohm, load = min(here, key=lambda found: found[0], default=(pack.rest_v, 0.0, robot.loads[0]))
        if volts < LEAST_V_SHARE * pack.rest_v:
            yield Caution(
                "start-sag",
                f"rail {rail.name}",
                f'When "{load.name}" starts at {load.peak_a:g} A on top of all that runs with it, the pack, worn, '
                f"nearly empty and at its coldest ({_figure(1000.0 * ohm)} mohm), falls from {pack.rest_v:.1f} to "
                f"{volts:.1f} V, less than half, and takes all that hangs on it down. Take a lower start, a larger "
                "pack or one of lower resistance.",
            )
