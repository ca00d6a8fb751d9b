"""The robot file: panels, controller, battery, rails and loads."""

from __future__ import annotations

from typing import Literal

from .chemistries import Chemistry
from .fields import Flag, Number, Part, Text, Twelve, Whole, key
from .site import Site

Weekday = Literal["mon", "tue", "wed", "thu", "fri", "sat", "sun"]


class Target(Part):
    """What counts as success."""

    survival: Number = key(0.95, "share of years in which the essential loads are served", gt=0, le=1)
    hours_out: Number = key(0.0, "outage a year may have and still count", unit="h", ge=0)
    work_done: Number = key(0.90, "share of the skippable work done in the worst month", ge=0, le=1)


class Deployment(Part):
    """The part of the year the robot is out; month-day, both included."""

    start: Text = key(..., "first day, MM-DD", alias="from")
    end: Text = key(..., "last day, MM-DD", alias="to")


class Wire(Part):
    """A pair of copper wires; the length is one way, the current flows out and back."""

    length_m: Number = key(0.0, "one way", unit="m", ge=0)
    area_mm2: Number = key(1.5, "copper cross-section", unit="mm2", gt=0)


class Panel(Part):
    """One kind of panel with its data sheet and how it is mounted."""

    name: Text = key(..., "what people call it")
    watts: Number = key(..., "name-plate power of one panel at standard test conditions", unit="W", gt=0)
    vmp_v: Number | None = key(None, "voltage at maximum power", unit="V", gt=0)
    imp_a: Number | None = key(None, "current at maximum power", unit="A", gt=0)
    voc_v: Number | None = key(None, "open-circuit voltage", unit="V", gt=0)
    isc_a: Number | None = key(None, "short-circuit current", unit="A", gt=0)
    voc_pct_per_k: Number = key(-0.30, "change of open-circuit voltage", unit="%/K")
    isc_pct_per_k: Number = key(0.05, "change of short-circuit current", unit="%/K")
    shunt_ohm: Number | None = key(None, "shunt resistance of one panel, where the data sheet tells", unit="ohm", gt=0)
    in_series: Whole = key(1, "panels in series", ge=1)
    in_parallel: Whole = key(1, "such strings in parallel", ge=1)
    tilt_deg: Number = key(..., "0 flat, 90 upright", unit="deg", ge=0, le=90)
    azimuth_deg: Number = key(0.0, "which way it leans, clockwise from the nose", unit="deg", ge=-360, le=360)
    rear: Literal["open", "deck", "insulated"] = key("deck", "how its rear sheds heat")
    dirt_loss: Twelve = key((0.03,) * 12, "share of light lost to dirt; one value or twelve")
    wire: Wire | None = key(None, "panel to controller")
    obstructions: tuple[tuple[Number, Number, Number], ...] = key((), "[from_deg, to_deg, elevation_deg] from the nose")
    bypass_groups: Whole = key(1, "cell groups with a bypass diode", ge=1)
    mass_kg: Number | None = key(None, "of the size written", unit="kg", gt=0)
    price: Number | None = key(None, "of the size written", ge=0)

    @property
    def total_watts(self) -> float:
        """Name-plate power of all its panels [W]."""
        return self.watts * self.in_series * self.in_parallel


class Controller(Part):
    """The charge controller."""

    kind: Literal["mppt", "pwm", "direct"] = key("mppt", "how it couples panel and battery")
    efficiency: Number = key(0.95, "of an mppt converter", gt=0, le=1)
    efficiency_curve: tuple[tuple[Number, Number], ...] | None = key(None, "[share of rated_w, efficiency] pairs")
    rated_w: Number | None = key(None, "power the efficiency curve refers to", unit="W", gt=0)
    trackers: Literal["shared", "per-panel"] = key("shared", "one tracker for all panels, or one each")
    own_use_w: Number = key(0.05, "drawn from the battery day and night", unit="W", ge=0)
    start_up_w: Number = key(0.0, "panel power below which nothing is converted", unit="W", ge=0)
    headroom_v: Number = key(1.0, "how far the panel must stand above the battery, mppt", unit="V", ge=0)
    step_up: Flag = key(False, "true: an mppt that also lifts a lower panel voltage")
    diode_drop_v: Number = key(0.4, "of the blocking diode, direct", unit="V", ge=0)
    max_charge_a: Number | None = key(None, "output current limit", unit="A", gt=0)
    max_input_v: Number | None = key(None, "highest panel voltage it survives", unit="V", gt=0)


class Battery(Part):
    """The pack; capacity is of the pack when new, at 25 degC."""

    chemistry: Chemistry = key(..., "cell chemistry")
    cells_in_series: Whole = key(..., "cells in series; 6 for a 12 V lead-acid", ge=1)
    capacity_ah: Number = key(..., "of the pack, new, at 25 C", unit="Ah", gt=0)
    start_soc: Number = key(1.0, "charge at the start", ge=0, le=1)
    cutoff_soc: Number | None = key(None, "loads are dropped here; default by chemistry", ge=0, lt=1)
    restart_soc: Number | None = key(None, "loads come back here; default by chemistry", gt=0, le=1)
    boot_wh: Number = key(0.0, "what one restart costs", unit="Wh", ge=0)
    off_draw_w: Number = key(0.0, "drawn while the loads are cut", unit="W", ge=0)
    resistance_mohm: Number | None = key(None, "of the pack, new; default by chemistry", unit="mohm", gt=0)
    max_charge_c: Number | None = key(None, "charge current over capacity; default by chemistry", unit="1/h", gt=0)
    charge_efficiency: Number | None = key(None, "charge out over charge in; default by chemistry", gt=0, le=1)
    self_discharge_pct_month: Number | None = key(None, "at 20 C; default by chemistry", unit="%", ge=0, lt=100)
    charge_min_c: Number | None = key(None, "coldest at which it may be charged; default by chemistry", unit="degC")
    charge_max_c: Number | None = key(None, "warmest at which it may be charged; default by chemistry", unit="degC")
    box_rise_c: Number = key(0.0, "how much warmer than the air its box is", unit="K")
    box_lag_h: Number = key(2.0, "thermal lag of the box", unit="h", ge=0)
    heater_w: Number = key(0.0, "heater that holds the box above heater_on_below_c", unit="W", ge=0)
    heater_on_below_c: Number = key(1.0, "box temperature the heater holds", unit="degC")
    worn_capacity: Number = key(0.8, "share of capacity left when the battery is judged", gt=0, le=1)
    mass_kg: Number | None = key(None, "of the size written", unit="kg", gt=0)
    price: Number | None = key(None, "of the size written", ge=0)


class Rail(Part):
    """A supply between the battery and some loads."""

    name: Text = key(..., "what loads call it")
    volts: Number | None = key(None, "not for kind none", unit="V", gt=0)
    kind: Literal["step-down", "step-up", "linear", "none"] = key(..., "how the voltage is made")
    efficiency: Number = key(0.90, "step-down and step-up", gt=0, le=1)
    idle_w: Number = key(0.0, "drawn by the converter itself", unit="W", ge=0)
    idle_a: Number = key(0.0, "ground current of a linear regulator", unit="A", ge=0)
    dropout_v: Number | None = key(None, "least drop across it; default 0.5 step-down, 2 linear", unit="V", ge=0)
    tolerance_pct: Number = key(5.0, "how far the voltage may sag at the load", unit="%", gt=0, lt=100)
    wire: Wire | None = key(None, "after the converter")
    diode_drop_v: Number = key(0.0, "before the converter", unit="V", ge=0)


class Traction(Part):
    """Drive power from mass, speed and ground."""

    mass_kg: Number = key(..., "of the robot", unit="kg", gt=0)
    speed_m_s: Number = key(..., "while driving", unit="m/s", gt=0)
    rolling_resistance: Number = key(..., "resistance over weight", gt=0)
    slope_deg: Number = key(0.0, "mean climb", unit="deg", ge=0, lt=45)
    drivetrain_efficiency: Number = key(..., "mechanical out over electrical in", gt=0, le=1)


class Load(Part):
    """One thing that draws power, and when."""

    name: Text = key(..., "what people call it")
    rail: Text = key(..., "which rail feeds it")
    watts: Number | None = key(None, "at the load while it works", unit="W", ge=0)
    amps: Number | None = key(None, "instead of watts", unit="A", ge=0)
    traction: Traction | None = key(None, "instead of watts: drive power from mass, speed and ground")
    idle_watts: Number = key(0.0, "the rest of the time", unit="W", ge=0)
    peak_a: Number | None = key(None, "start or stall current, for the brown-out check", unit="A", gt=0)
    hours: tuple[tuple[Number, Number], ...] | None = key(None, "[from, to] spans of the clock; default always")
    clock: Literal["local", "solar"] = key("local", "which clock hours means")
    on_fraction: Number = key(1.0, "share of the time within those hours", ge=0, le=1)
    months: tuple[Whole, ...] = key(tuple(range(1, 13)), "months in which it works")
    weekdays: tuple[Weekday, ...] = key(("mon", "tue", "wed", "thu", "fri", "sat", "sun"), "days on which it works")
    moves: Flag = key(False, "true: the robot changes place while this is due")
    skip_below_soc: Number | None = key(None, "present: skippable work, skipped below this charge", ge=0, lt=1)


class Robot(Part):
    """A robot with the site it lives at."""

    name: Text = key(..., "what people call it")
    site: Site = key(..., "site file, relative to this one")
    heading: Literal["fixed", "roams", "turns-to-sun"] = key("fixed", "which way the nose points")
    heading_deg: Number = key(0.0, "of the nose from north, clockwise; for fixed", unit="deg", ge=-360, le=360)
    parked: Literal["random", "mean", "worst"] = key("random", "for roams: where it stands while nothing moves it")
    target: Target = key(Target(), "what counts as success")
    deployment: Deployment | None = key(None, "the part of the year the robot is out; absent: all year")
    panels: tuple[Panel, ...] = key(..., "panels", alias="panel", min_length=1)
    controller: Controller = key(Controller(), "charge controller")
    battery: Battery = key(..., "battery")
    rails: tuple[Rail, ...] = key((), "supplies between battery and loads", alias="rail")
    loads: tuple[Load, ...] = key(..., "what draws power", alias="load", min_length=1)

    @property
    def watts(self) -> float:
        """Name-plate power of all panels [W]."""
        return sum(panel.total_watts for panel in self.panels)
