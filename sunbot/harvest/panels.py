"""The robot's panels, ready to be held against light: data sheet completed, cells fitted, wire measured."""

from __future__ import annotations

from dataclasses import dataclass
from functools import cached_property
from math import ceil

from ..errors import Fault, InputError
from ..inputs.chemistries import rest_voltage_v
from ..inputs.robot import Panel, Robot
from ..types import FloatArray
from ..wires import resistance_ohm
from .cells import REAR_HEAT_LOSS, OneDiode, fit_one_diode, with_shunt
from .tables import peak_table

VOC_OVER_VMP, ISC_OVER_IMP = 1.25, 1.08
"""Medians of 257 36-cell modules in the table pvlib ships: 1.249, 1.076."""

COLD_VOC_OVER_VMP = 1.30
"""On the safe side, for the input voltage of a controller. Common practice."""

CLASS_12_VMP_V = 18.0
"""Of 36 crystalline cells, the panel sold for 12 V batteries. Common practice."""


@dataclass(frozen=True)
class Sheet:
    """A complete data sheet of one panel [V, A]; ``assumed`` names the figures its file left out."""

    vmp_v: float
    imp_a: float
    voc_v: float
    isc_a: float
    assumed: tuple[str, ...]


@dataclass(frozen=True)
class Array:
    """All panels of one entry of the file wired together.

    where : as messages name it. watts : name-plate power of all [W]. cell : their common curve.
    vmp_v, voc_v : of a string [V]; voc_v on the safe side where assumed. wire_ohm : to the controller, out and back.
    """

    where: str
    panel: Panel
    sheet: Sheet
    cell: OneDiode
    watts: float
    vmp_v: float
    voc_v: float
    wire_ohm: float

    @property
    def heat_loss(self) -> tuple[float, float]:
        """Still-air heat loss [W/(m² K)] and its growth with the wind of the weather."""
        u0, u1, wind_share = REAR_HEAT_LOSS[self.panel.rear]
        return u0, u1 * wind_share

    @cached_property
    def peak_table(self) -> FloatArray:
        """Maximum power over light at full sun [W], and voltage there [V]."""
        return peak_table(self.cell)


def panel_where(number: int, panel: Panel) -> str:
    """How messages name a panel; numbers start at 1."""
    return f'robot.toml: panel {number} ("{panel.name}")'


def sheet_of(panel: Panel, *, nominal_v: float) -> Sheet:
    """The data sheet with missing figures filled in: from the others, else by typical ratios.

    Parameters
    ----------
    panel : Panel
        As filed.
    nominal_v : float
        Voltage at maximum power of one panel [V] where it follows from nothing.
    """
    given = {key: getattr(panel, key) for key in ("vmp_v", "imp_a", "voc_v", "isc_a")}
    vmp_v, imp_a, voc_v, isc_a = given.values()
    if vmp_v is None and imp_a is not None:
        vmp_v = panel.watts / imp_a
    elif vmp_v is None:
        vmp_v = nominal_v if voc_v is None else voc_v / VOC_OVER_VMP
    imp_a = panel.watts / vmp_v if imp_a is None else imp_a
    return Sheet(
        vmp_v=vmp_v,
        imp_a=imp_a,
        voc_v=VOC_OVER_VMP * vmp_v if voc_v is None else voc_v,
        isc_a=ISC_OVER_IMP * imp_a if isc_a is None else isc_a,
        assumed=tuple(key for key, value in given.items() if value is None),
    )


def nominal_string_v(robot: Robot) -> float:
    """Voltage of a string of unknown panels [V]: that of its neighbour on the tracker, else what clears the battery."""
    known = [panel.vmp_v * panel.in_series for panel in robot.panels if panel.vmp_v is not None]
    if known and robot.controller.trackers == "shared":
        return known[0]
    # 1.25: a hot panel loses a sixth of its voltage, and a battery stands above its rest voltage while it charges.
    clears_v = 0.0 if robot.controller.step_up else 1.25 * battery_v(robot, 0.5) + above_battery_v(robot)
    return CLASS_12_VMP_V * max(1, ceil(clears_v / CLASS_12_VMP_V))


def battery_v(robot: Robot, soc: float) -> float:
    """Rest voltage of the robot's pack [V]."""
    return rest_voltage_v(robot.battery.chemistry, soc, robot.battery.cells_in_series)


def above_battery_v(robot: Robot) -> float:
    """How far a panel's voltage must stand above the battery's [V]; minus infinity for a tracker that steps up."""
    controller = robot.controller
    if controller.kind == "mppt":
        return float("-inf") if controller.step_up else controller.headroom_v
    return controller.diode_drop_v if controller.kind == "direct" else 0.0


def arrays_of(robot: Robot) -> tuple[Array, ...]:
    """The robot's panels as filed, one `Array` per entry.

    Raises
    ------
    InputError
        A data sheet no cell can have, or a voltage that cannot reach the battery; all of them at once.
    """
    faults: list[Fault] = []
    arrays: list[Array] = []
    for number, panel in enumerate(robot.panels, start=1):
        try:
            arrays.append(_array(number, panel, robot))
        except InputError as error:
            faults.extend(error.faults)
    if faults:
        raise InputError(faults)
    return tuple(arrays)


def _array(number: int, panel: Panel, robot: Robot) -> Array:
    """One entry of the file."""
    where = panel_where(number, panel)
    sheet = sheet_of(panel, nominal_v=nominal_string_v(robot) / panel.in_series)
    cell = _shunted(_fitted(panel, sheet, where=where), panel, sheet, where=where)
    cell = cell.wired(panel.in_series, panel.in_parallel)
    safe_voc_v = COLD_VOC_OVER_VMP * sheet.vmp_v if "voc_v" in sheet.assumed else sheet.voc_v
    array = Array(
        where=where,
        panel=panel,
        sheet=sheet,
        cell=cell,
        watts=panel.total_watts,
        vmp_v=sheet.vmp_v * panel.in_series,
        voc_v=safe_voc_v * panel.in_series,
        wire_ohm=0.0 if panel.wire is None else resistance_ohm(panel.wire.length_m, panel.wire.area_mm2),
    )
    _must_reach(array, robot)
    return array


def _fitted(panel: Panel, sheet: Sheet, *, where: str) -> OneDiode:
    """Single-diode parameters of one panel; a data sheet no cell can have is the user's mistake."""
    try:
        return fit_one_diode(
            watts=panel.watts,
            vmp_v=sheet.vmp_v,
            imp_a=sheet.imp_a,
            voc_v=sheet.voc_v,
            isc_a=sheet.isc_a,
            voc_pct_per_k=panel.voc_pct_per_k,
            isc_pct_per_k=panel.isc_pct_per_k,
        )
    except ValueError:
        figures = f"vmp_v {sheet.vmp_v:g}, imp_a {sheet.imp_a:g}, voc_v {sheet.voc_v:g}, isc_a {sheet.isc_a:g}"
        assumed = f" ({', '.join(sheet.assumed)} assumed)" if sheet.assumed else ""
        slopes = f"voc_pct_per_k {panel.voc_pct_per_k:g}, isc_pct_per_k {panel.isc_pct_per_k:g}"
        raise InputError(
            Fault(
                where=where,
                wrong=f"no solar cell has {figures}{assumed} with {slopes}",
                instead="the figures of one data sheet at standard test conditions; usually voc_v is 1.15 to 1.3 times "
                "vmp_v, isc_a 1.04 to 1.12 times imp_a, voc_pct_per_k -0.25 to -0.40",
            )
        ) from None


def _shunted(cell: OneDiode, panel: Panel, sheet: Sheet, *, where: str) -> OneDiode:
    """The cell with the shunt that the file gives for one panel, if it does."""
    if panel.shunt_ohm is None:
        return cell
    try:
        return with_shunt(cell, panel.shunt_ohm)
    except ValueError:
        low = 5.0 * sheet.vmp_v / sheet.imp_a
        raise InputError(
            Fault(
                where=f"{where}: shunt_ohm",
                wrong=f"{panel.shunt_ohm:g} ohm would short so much that {panel.watts:g} W cannot be left",
                instead=f"the resistance of one panel, usually above {low:.0f} ohm for this size, or leave it out",
            )
        ) from None


def _must_reach(array: Array, robot: Robot) -> None:
    """Refuse a panel whose open voltage at 25 °C does not even stand above a half-full battery."""
    open_v = array.sheet.voc_v * array.panel.in_series
    needed_v = battery_v(robot, 0.5) + above_battery_v(robot)
    if open_v > needed_v:
        return
    kind = robot.controller.kind
    lift = ", or step_up = true if the controller lifts the voltage" if kind == "mppt" else ""
    raise InputError(
        Fault(
            where=f"{array.where}: voc_v",
            wrong=f"{open_v:.1f} V in full sun cannot reach the {needed_v:.1f} V that charging a half-full battery "
            f"takes with a controller of kind {kind}",
            instead=f"a panel, or in_series for a string of them, of at least {1.4 * needed_v:.0f} V open{lift}",
        )
    )
