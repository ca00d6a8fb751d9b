"""Sizes no robot has: what only a slip of the unit, or a voltage in place of a count, explains."""

from __future__ import annotations

from collections.abc import Iterator
from typing import TYPE_CHECKING

from ..wires import resistance_ohm
from .chemistries import REST_VOLTAGES, rest_voltage_v
from .fields import Path, Problem

if TYPE_CHECKING:
    from .robot import Battery, Load, Panel, Rail, Robot, Wire

MOST_AH = 1000.0
"""Common practice: larger stores are built at a higher voltage; 1000 Ah of 12 V lead-acid weigh over 300 kg."""
MOST_PANEL_W = 5000.0
"""Common practice: the largest single panels have some 700 W."""
MOST_LOAD_W, MOST_LOAD_A = 10_000.0, 500.0
"""Common practice: what low-voltage wiring carries ends near here."""
MOST_DROP_SHARE = 0.5
"""Common practice: wires are laid for a few per cent; past one half a load of constant power cannot be fed at all."""
LONG_WIRE_M = 20.0
"""From here on a length of wire on a robot may have been meant in millimetres; common practice."""
PACK_VOLTS = (12, 24, 36, 48)
"""What packs are called by; common practice."""
CLASS_12_OPEN_V = 22.0
"""Open-circuit voltage of a panel made for 12 V batteries; common practice."""
OPEN_OVER_VMP = 1.25
"""Open-circuit voltage over that at maximum power, on the high side of data sheets; common practice."""


def battery(battery: Battery) -> Iterator[Problem]:
    """A capacity in milliampere-hours."""
    if battery.capacity_ah > MOST_AH:
        volts = battery.cells_in_series * REST_VOLTAGES[battery.chemistry].nominal_v
        wrong = f"{battery.capacity_ah:g} Ah at {volts:g} V is {battery.capacity_ah * volts / 1000:.3g} kWh, "
        wrong += f"and up to {MOST_AH:g} Ah are believed"
        remedy = f"{battery.capacity_ah / 1000:g} if these were milliampere-hours"
        yield Problem(("capacity_ah",), wrong, remedy, (("chemistry",), ("cells_in_series",)))


def panel(panel: Panel) -> Iterator[Problem]:
    """A power in milliwatts."""
    yield from _too_large(("watts",), panel.watts, MOST_PANEL_W, unit="W", of="for one panel", slip="milliwatts")


def load(load: Load) -> Iterator[Problem]:
    """A power in milliwatts, a current in milliamperes."""
    for name in ("watts", "idle_watts"):
        yield from _too_large((name,), getattr(load, name), MOST_LOAD_W, unit="W", of="for a load", slip="milliwatts")
    for name in ("amps", "peak_a"):
        yield from _too_large((name,), getattr(load, name), MOST_LOAD_A, unit="A", of="for a load", slip="milliamperes")


def _too_large(at: Path, value: float | None, most: float, *, unit: str, of: str, slip: str) -> Iterator[Problem]:
    if value is not None and value > most:
        wrong = f"{value:g} {unit} is not believed {of}, where up to {most:g} {unit} are"
        yield Problem(at, wrong, f"{value / 1000:g} if these were {slip}")


def robot(robot: Robot) -> Iterator[Problem]:
    """Wires that could carry nothing, and cells counted in volts."""
    for number, panel in enumerate(robot.panels):
        yield from _panel_wire(panel, number, robot.battery)
    for number, rail in enumerate(robot.rails):
        yield from _rail_wire(robot, rail, number)
    yield from _cells(robot)


def _panel_wire(panel: Panel, number: int, pack: Battery) -> Iterator[Problem]:
    if panel.wire is None:
        return
    vmp_v = panel.vmp_v or (panel.watts / panel.imp_a if panel.imp_a else None)
    string_v = vmp_v and vmp_v * panel.in_series
    # Where the sheet is silent, a string that clears the full pack, as one that charges it must.
    volts = string_v or (_open_v(panel) or max(CLASS_12_OPEN_V, 1.6 * pack.highest_v)) / OPEN_OVER_VMP
    where: Path = ("panel", number, "wire")
    yield from _drop(panel.wire, where, volts, panel.total_watts / volts, of="the panel's", at="in full sun")


def _rail_wire(robot: Robot, rail: Rail, number: int) -> Iterator[Problem]:
    if rail.wire is None:
        return
    volts = rail.volts or robot.battery.lowest_v - rail.diode_drop_v
    fed = [load for load in robot.loads if load.rail == rail.name]
    if volts > 0:
        amps = sum(load.amps or (load.watts or 0.0) / volts for load in fed)
        yield from _drop(rail.wire, ("rail", number, "wire"), volts, amps, of="the rail's", at="with its loads on")


def _drop(wire: Wire, path: Path, volts: float, amps: float, *, of: str, at: str) -> Iterator[Problem]:
    """A wire that takes over half the voltage that stands before it."""
    drop_v = amps * resistance_ohm(wire.length_m, wire.area_mm2)
    if drop_v <= MOST_DROP_SHARE * volts:
        return
    wrong = f"{wire.length_m:g} m of {wire.area_mm2:g} mm2, out and back, would take {drop_v:.3g} V of {of} {volts:.3g}"
    wrong += f" V {at} ({amps:.3g} A)"
    remedy = "a wire that takes a few per cent: metres of length, mm2 of copper"
    if wire.length_m >= LONG_WIRE_M:
        remedy = f"{wire.length_m / 1000:g} if these were millimetres; else {remedy}"
    home = path[:-1]
    judged = (
        (*path, "area_mm2"),
        *((*home, name) for name in ("watts", "vmp_v", "imp_a", "voc_v", "volts", "in_series")),
        ("load",),
    )
    yield Problem((*path, "length_m"), wrong, remedy, judged)


def _cells(robot: Robot) -> Iterator[Problem]:
    """As many cells as the pack has volts, which no panel of the robot can charge."""
    pack, controller = robot.battery, robot.controller
    if pack.cells_in_series not in PACK_VOLTS or (controller.kind == "mppt" and controller.step_up):
        return
    opened = [_open_v(panel) for panel in robot.panels]
    known = [volts for volts in opened if volts is not None]
    if not known or max(known) > rest_voltage_v(pack.chemistry, 0.5, pack.cells_in_series):
        return
    cell_v = REST_VOLTAGES[pack.chemistry].nominal_v
    cells = max(1, round(pack.cells_in_series / cell_v))
    wrong = f"{pack.cells_in_series} cells of {pack.chemistry} are {pack.cells_in_series * cell_v:g} V, and the panels "
    wrong += f"reach {max(known):g} V with nothing on them"
    remedy = f"the count of cells, {cells} for a pack of {pack.cells_in_series} V, or panels (in_series) that reach it"
    panels = tuple(("panel", number) for number in range(len(robot.panels)))
    yield Problem(("battery", "cells_in_series"), wrong, remedy, (("battery", "chemistry"), ("controller",), *panels))


def _open_v(panel: Panel) -> float | None:
    """Open-circuit voltage of a string [V], where the file tells."""
    if panel.voc_v is not None:
        return panel.voc_v * panel.in_series
    return None if panel.vmp_v is None else OPEN_OVER_VMP * panel.vmp_v * panel.in_series
