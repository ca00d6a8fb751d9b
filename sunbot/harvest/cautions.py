"""What to know about panels, wires and controller before trusting a harvest."""

from __future__ import annotations

from collections.abc import Iterator, Sequence

import numpy as np

from ..inputs.robot import Robot
from ..light.carriers import Light
from ..sky.weather import Weather
from ..types import BoolArray, Caution
from .carriers import Supply
from .cells import STC_C, STC_W_M2, current_a
from .controller import cold_voc_v
from .panels import Array, above_battery_v, arrays_of, battery_v

WIRE_DROP_NOTED = 0.03
"""Share of the panel's voltage lost in its wire at full sun. Common practice."""

SPARE_VOLTS_X = 1.6
"""Voltage of a string over that of the full battery from where coupling them directly wastes much. Common practice: the
36 cells made for it stand at 1.3 to 1.4 times."""

DIM_W_M2 = 50.0
"""Below it the efficiency of cells differs from maker to maker and is seldom on a data sheet. Common practice."""


def supply_cautions(
    robot: Robot,
    weather: Weather,
    *,
    lights: Sequence[Light] = (),
    supply: Supply | None = None,
    within: BoolArray | None = None,
) -> tuple[Caution, ...]:
    """What is doubtful or dangerous about the harvest side of a robot.

    Parameters
    ----------
    robot : Robot
        As filed.
    weather : Weather
        For its coldest air.
    lights : one per panel, optional
        Adds what dim light does.
    supply : Supply, optional
        For the robot's own watts first; adds whether the controller eats more than it gives.
    within : (n_times,), optional
        Steps in which the robot is out; left out, all.

    Raises
    ------
    InputError
        As `supply` does.
    """
    arrays = arrays_of(robot)
    out = slice(None) if within is None else within
    coldest_c = float(weather.table["temp_air"].to_numpy()[out].min())
    found = [caution for array in arrays for caution in (*_of_panel(array, robot), *_of_spare_volts(array, robot))]
    found.extend(_of_controller(robot, arrays, coldest_c=coldest_c))
    if lights:
        found.extend(_of_dim_light(lights, arrays, out))
    if supply is not None:
        found.extend(_of_own_use(supply, out))
    return tuple(found)


def _of_panel(array: Array, robot: Robot) -> Iterator[Caution]:
    """Data sheet, wire and voltage of one panel."""
    sheet, panel = array.sheet, array.panel
    where = f"panel {panel.name}"
    if sheet.assumed:
        figures = {"vmp_v": sheet.vmp_v, "imp_a": sheet.imp_a, "voc_v": sheet.voc_v, "isc_a": sheet.isc_a}
        said = ", ".join(f"{key} {figures[key]:.3g}" for key in sheet.assumed)
        yield Caution(
            "assumed-datasheet",
            where,
            f"The file leaves out figures of the data sheet; assumed: {said}. Write them in.",
        )
    if panel.wire is None:
        yield Caution(
            "no-panel-wire",
            where,
            "No wire to the controller is given, so none of its loss is counted. Write wire = { length_m, area_mm2 }.",
        )
    drop = array.watts / array.vmp_v**2 * array.wire_ohm
    if drop > WIRE_DROP_NOTED:
        yield Caution(
            "panel-wire-drop",
            where,
            f"In full sun its wire takes {100 * drop:.0f} % of the panel's voltage. Take a thicker or a shorter one.",
        )
    full_v = battery_v(robot, 1.0) + above_battery_v(robot)
    if array.vmp_v - drop * array.vmp_v < full_v:
        yield Caution(
            "panel-voltage",
            where,
            f"At its best the panel stands at {array.vmp_v * (1 - drop):.1f} V behind its wire, a full battery asks "
            f"for {full_v:.1f} V: much of its power is lost, more on hot days. Take a panel of more volts.",
        )


def _of_spare_volts(array: Array, robot: Robot) -> Iterator[Caution]:
    """A string that a controller without a converter drags far down to the battery's voltage."""
    held_v = battery_v(robot, 1.0) + above_battery_v(robot)
    if robot.controller.kind == "mppt" or array.vmp_v <= SPARE_VOLTS_X * battery_v(robot, 1.0):
        return
    sun, temp_c = np.array([STC_W_M2]), np.array([STC_C])
    kept_w = held_v * float(current_a(array.cell, sun, temp_c, volts=held_v, extra_ohm=array.wire_ohm)[0])
    parallel = "wire them in parallel" if array.panel.in_series > 1 else "take a panel of fewer volts"
    yield Caution(
        "spare-volts",
        f"panel {array.panel.name}",
        f"Its string gives most at {array.vmp_v:.1f} V, a controller of kind {robot.controller.kind} holds it at the "
        f"{held_v:.1f} V of the battery: about {100 * (1 - kept_w / array.watts):.0f} % of its power is lost; "
        f"{parallel}, or take mppt.",
    )


def _of_controller(robot: Robot, arrays: Sequence[Array], *, coldest_c: float) -> Iterator[Caution]:
    """Limits of the controller."""
    controller = robot.controller
    if controller.kind == "direct":
        yield Caution(
            "no-charge-control",
            "controller",
            "A blocking diode does not stop charging. The answer takes the battery to be disconnected when it is full: "
            "something must do that, or it overcharges (lithium: fire).",
        )
    missing = [key for key in ("max_charge_a", "max_input_v") if getattr(controller, key) is None]
    if missing and controller.kind != "direct":
        yield Caution(
            "no-limits",
            "controller",
            f"{' and '.join(missing)} not given, so nothing is held against it. "
            "Write it from the controller's data sheet.",
        )
    for array in arrays:
        cold_v = cold_voc_v(array.voc_v, voc_pct_per_k=array.panel.voc_pct_per_k, coldest_c=coldest_c)
        if controller.max_input_v is not None and cold_v > controller.max_input_v:
            assumed = " (voc_v assumed on the safe side)" if "voc_v" in array.sheet.assumed else ""
            yield Caution(
                "cold-voc",
                f"panel {array.panel.name}",
                f"At {coldest_c:.0f} °C in full sun its string stands at {cold_v:.1f} V open{assumed}; the controller "
                f"survives {controller.max_input_v:g} V. It would be destroyed: put fewer in series or take another.",
            )


def _of_dim_light(lights: Sequence[Light], arrays: Sequence[Array], out: BoolArray | slice) -> Iterator[Caution]:
    """Whether most of the energy comes at a light for which data sheets say nothing."""
    dim = total = 0.0
    for light, array in zip(lights, arrays, strict=True):
        cells_w_m2 = light.cells_w_m2[out]
        weight = np.ones((1, 1)) if cells_w_m2.shape[1] != light.weight.shape[1] else light.weight
        weight = weight if len(weight) == 1 else weight[out]
        weight = np.broadcast_to(weight, cells_w_m2.shape)
        at_dim = np.where(cells_w_m2 < DIM_W_M2, cells_w_m2, 0.0)
        # summed by step first: the tables may be in single precision
        total += array.watts * float(np.einsum("th,th->t", cells_w_m2, weight).sum(dtype=np.float64))
        dim += array.watts * float(np.einsum("th,th->t", at_dim, weight).sum(dtype=np.float64))
    if dim > 0.5 * total:
        yield Caution(
            "dim-light",
            "panels",
            f"{100 * dim / total:.0f} % of the light comes below {DIM_W_M2:.0f} W/m², where cells of one name-plate "
            "differ several-fold. Measure the panel there, or write its shunt_ohm.",
        )


def _of_own_use(supply: Supply, out: BoolArray | slice) -> Iterator[Caution]:
    """Whether the controller draws more than it hands over."""
    middle = supply.offer_w[out, 0, len(supply.battery_v) // 2]
    mean_w = float(np.mean(middle))
    if mean_w <= supply.own_use_w:
        yield Caution(
            "controller-hungry",
            "controller",
            f"It hands over {1000 * mean_w:.0f} mW on average over the year and draws {1000 * supply.own_use_w:.0f} mW "
            "day and night itself. Take one that draws less, or a larger panel.",
        )
