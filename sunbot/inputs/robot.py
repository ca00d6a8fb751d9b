"""The robot file: panels, controller, battery, rails and loads."""

from __future__ import annotations

from collections.abc import Iterator
from typing import Annotated, Any, Literal

from pydantic import Field, model_validator

from . import checks
from .chemistries import REST_VOLTAGES, Chemistry, rest_voltage_v
from .fields import (
    Flag,
    Heading,
    HeadingSpans,
    Named,
    Number,
    Part,
    Problem,
    Share,
    Spans,
    Text,
    TiltSpans,
    Turn,
    TwelveShares,
    Whole,
    key,
)
from .site import Site
from .window import Window

Weekday = Literal["mon", "tue", "wed", "thu", "fri", "sat", "sun"]
Month = Annotated[Whole, Field(ge=1, le=12)]
DROPOUT_V = {"step-down": 0.5, "linear": 2.0}
"""Least drop across a converter when the file does not say [V]; common practice."""


class Target(Part):
    """What counts as success."""

    survival: Number = key(
        0.95, "share of years in which the essential loads are served", gt=0, le=1, mark="common practice"
    )
    hours_out: Number = key(0.0, "outage a year may have and still count", unit="h", ge=0, le=8784, example=2)
    work_done: Share = key(0.90, "share of the skippable work done in the worst month", mark="common practice")


class Deployment(Part):
    """The part of the year the robot is out; month-day, both included, across New Year where from is the later."""

    start: Text = key(..., "first day, MM-DD", alias="from", example="03-15")
    end: Text = key(..., "last day, MM-DD", alias="to", example="10-31")

    @property
    def first(self) -> tuple[int, int]:
        """Month and day of the first day."""
        return checks.month_and_day(self.start)

    @property
    def last(self) -> tuple[int, int]:
        """Month and day of the last day."""
        return checks.month_and_day(self.end)

    def problems(self) -> Iterator[Problem]:
        yield from checks.deployment(self)


class Wire(Part):
    """A pair of copper wires; the length is one way, the current flows out and back."""

    length_m: Number = key(0.0, "one way", unit="m", ge=0, le=1000, example=2.0)
    area_mm2: Number = key(1.5, "copper cross-section", unit="mm2", gt=0, le=500, example=1.5)


class Panel(Part):
    """One kind of panel with its data sheet and how it is mounted."""

    name: Named = key(..., "what people call it", example="deck")
    watts: Number = key(
        ..., "name-plate power of one panel at standard test conditions", unit="W", gt=0, le=1e5, example=40
    )
    vmp_v: Number | None = key(None, "voltage at maximum power", unit="V", gt=0, le=1500, example=18.0)
    imp_a: Number | None = key(None, "current at maximum power", unit="A", gt=0, le=1e4, example=2.22)
    voc_v: Number | None = key(None, "open-circuit voltage", unit="V", gt=0, le=1500, example=21.8)
    isc_a: Number | None = key(None, "short-circuit current", unit="A", gt=0, le=1e4, example=2.35)
    voc_pct_per_k: Number = key(
        -0.30, "change of open-circuit voltage", unit="%/K", gt=-1, le=0, mark="common practice", example=-0.30
    )
    isc_pct_per_k: Number = key(
        0.05, "change of short-circuit current", unit="%/K", ge=-0.2, lt=0.5, mark="common practice", example=0.05
    )
    shunt_ohm: Number | None = key(
        None, "shunt resistance of one panel, where the data sheet tells", unit="ohm", gt=0, le=1e9, example=200
    )
    in_series: Whole = key(1, "panels in series", ge=1, le=1000, example=1)
    in_parallel: Whole = key(1, "such strings in parallel", ge=1, le=1000, example=1)
    tilt_deg: Number = key(..., "0 flat, 90 upright", unit="deg", ge=0, le=90, example=10)
    tilt_hours: TiltSpans = key(
        (),
        "a folding lid: [from, to, tilt_deg] by hours of the local clock; tilt_deg holds in all others",
        example=[[8, 17, 60]],
    )
    azimuth_deg: Turn = key(0.0, "which way it leans, clockwise from the nose", unit="deg", example=180)
    rear: Literal["open", "deck", "insulated"] = key("deck", "how its rear sheds heat: open, deck or insulated")
    dirt_loss: TwelveShares = key(
        (0.03,) * 12, "share of light lost to dirt; one value or twelve", mark="common practice", example=0.03
    )
    wire: Wire | None = key(None, "panel to controller", example={"length_m": 1.0, "area_mm2": 1.5})
    obstructions: tuple[tuple[Turn, Turn, Annotated[Number, Field(ge=0, le=90)]], ...] = key(
        (), "mast, arm: [from_deg, to_deg, elevation_deg], clockwise from the nose", example=[[170, 190, 60]]
    )
    bypass_groups: Whole = key(1, "cell groups with a bypass diode", ge=1, le=100, mark="common practice", example=1)
    mass_kg: Number | None = key(None, "of the size written", unit="kg", gt=0, le=1e6, example=2.4)
    price: Number | None = key(None, "of the size written, in any money", ge=0, le=1e9, example=55)

    @property
    def total_watts(self) -> float:
        """Name-plate power of all its panels [W]."""
        return self.watts * self.in_series * self.in_parallel

    @property
    def steepest_deg(self) -> float:
        """The largest tilt it has at any hour [deg]."""
        return max(self.tilt_deg, *(tilt for _, _, tilt in self.tilt_hours), 0.0)

    def problems(self) -> Iterator[Problem]:
        yield from checks.panel(self)


class Controller(Part):
    """The charge controller."""

    kind: Literal["mppt", "pwm", "direct"] = key(
        "mppt", "how it couples panel and battery: mppt, pwm or direct (diode)"
    )
    efficiency: Number = key(0.95, "of an mppt converter", gt=0, le=1, mark="common practice", example=0.95)
    efficiency_curve: tuple[tuple[Number, Number], ...] | None = key(
        None,
        "[share of rated_w, efficiency] pairs, instead of efficiency",
        example=[[0.05, 0.85], [0.3, 0.95], [1, 0.94]],
    )
    rated_w: Number | None = key(None, "power the efficiency curve refers to", unit="W", gt=0, le=1e6, example=75)
    trackers: Literal["shared", "per-panel"] = key("shared", 'one tracker for all panels: "shared", or "per-panel"')
    own_use_w: Number = key(
        0.05, "drawn from the battery day and night", unit="W", ge=0, le=1e4, mark="common practice", example=0.05
    )
    start_up_w: Number = key(0.0, "panel power below which nothing is converted", unit="W", ge=0, le=1e4, example=0.5)
    headroom_v: Number = key(
        1.0, "mppt: how far the panel must stand above the battery", unit="V", ge=0, le=100, mark="common practice"
    )
    step_up: Flag = key(False, "true: an mppt that also lifts a lower panel voltage", example=True)
    diode_drop_v: Number = key(
        0.4, "direct: of the blocking diode", unit="V", ge=0, le=5, mark="common practice", example=0.4
    )
    max_charge_a: Number | None = key(None, "output current limit", unit="A", gt=0, le=1e4, example=10)
    max_input_v: Number | None = key(None, "highest panel voltage it survives", unit="V", gt=0, le=2000, example=50)

    def problems(self) -> Iterator[Problem]:
        yield from checks.controller(self)


class Battery(Part):
    """The pack; capacity is of the pack when new, at 25 degC."""

    chemistry: Chemistry = key(..., "lifepo4, li-ion, nimh or lead-acid", example="lifepo4")
    cells_in_series: Whole = key(
        ..., "cells, not blocks, in series: 4 for a 12.8 V lifepo4, 6 for a 12 V lead-acid", ge=1, le=200, example=4
    )
    capacity_ah: Number = key(..., "of the pack, new, at 25 degC", unit="Ah", gt=0, le=1e5, example=12)
    start_soc: Share = key(1.0, "charge at the start", example=1.0)
    cutoff_soc: Number = key(
        None, "loads are dropped here; default by chemistry", ge=0, lt=1, mark="common practice", example=0.10
    )
    restart_soc: Number = key(
        None, "loads come back here; default by chemistry", gt=0, le=1, mark="common practice", example=0.25
    )
    boot_wh: Number = key(0.0, "what one restart costs", unit="Wh", ge=0, le=1e5, example=0.2)
    off_draw_w: Number = key(0.0, "drawn while the loads are cut", unit="W", ge=0, le=1e5, example=0.02)
    resistance_mohm: Number | None = key(
        None, "of the pack, new; default by chemistry", unit="mohm", gt=0, le=1e5, example=20
    )
    max_charge_c: Number | None = key(
        None, "charge current over capacity; default by chemistry", unit="1/h", gt=0, le=100, example=0.5
    )
    charge_efficiency: Number | None = key(
        None, "charge out over charge in; default by chemistry", gt=0, le=1, example=0.99
    )
    self_discharge_pct_month: Number | None = key(
        None, "at 20 degC; default by chemistry", unit="%", ge=0, lt=100, example=2.5
    )
    charge_min_c: Number | None = key(
        None, "coldest at which it may be charged; default by chemistry", unit="degC", ge=-60, le=80, example=0
    )
    charge_max_c: Number | None = key(
        None, "warmest at which it may be charged; default by chemistry", unit="degC", ge=-60, le=80, example=45
    )
    box_rise_c: Number = key(0.0, "how much warmer than the air its box is", unit="K", ge=-30, le=60, example=3)
    box_lag_h: Number = key(2.0, "thermal lag of the box", unit="h", ge=0, le=240, mark="common practice", example=2)
    heater_w: Number = key(0.0, "heater that holds the box above heater_on_below_c", unit="W", ge=0, le=1e4, example=3)
    heater_on_below_c: Number = key(1.0, "box temperature the heater holds", unit="degC", ge=-60, le=60, example=1)
    box_loss_w_per_k: Number | None = key(
        None,
        "what the box loses per kelvin above the air; left out, any heater holds",
        unit="W/K",
        gt=0,
        le=1e4,
        example=0.2,
    )
    worn_capacity: Number = key(
        0.8, "share of capacity left when the battery is judged", gt=0, le=1, mark="common practice", example=0.8
    )
    mass_kg: Number | None = key(None, "of the size written", unit="kg", gt=0, le=1e6, example=1.6)
    price: Number | None = key(None, "of the size written, in any money", ge=0, le=1e9, example=70)

    @model_validator(mode="before")
    @classmethod
    def _shares_by_chemistry(cls, data: Any) -> Any:
        """Fill cut-off and restart, so that later code always has them."""
        if not isinstance(data, dict) or not isinstance(data.get("chemistry"), str):
            return data
        curve = REST_VOLTAGES.get(data["chemistry"])
        if curve is None:
            return data
        usual = {"cutoff_soc": curve.cutoff_soc, "restart_soc": curve.restart_soc}
        return {**usual, **{name: value for name, value in data.items() if value is not None or name not in usual}}

    @property
    def lowest_v(self) -> float:
        """Rest voltage of the pack where the loads are cut [V]."""
        return rest_voltage_v(self.chemistry, self.cutoff_soc, self.cells_in_series)

    @property
    def highest_v(self) -> float:
        """Rest voltage of the full pack [V]."""
        return rest_voltage_v(self.chemistry, 1.0, self.cells_in_series)

    @property
    def in_words(self) -> str:
        """The pack as people count it, e.g. ``lead-acid, 6 x 2.0 V = 12 V``."""
        cell_v = REST_VOLTAGES[self.chemistry].nominal_v
        return f"{self.chemistry}, {self.cells_in_series} x {cell_v:.1f} V = {self.cells_in_series * cell_v:g} V"

    def problems(self) -> Iterator[Problem]:
        yield from checks.battery(self)


class Rail(Part):
    """A supply between the battery and some loads."""

    name: Named = key(..., "what loads call it", example="logic")
    volts: Number | None = key(None, "at its output; not for kind none", unit="V", gt=0, le=1000, example=5.0)
    kind: Literal["step-down", "step-up", "linear", "none"] = key(
        ...,
        "how the voltage is made: step-down, step-up, linear or none (straight from the battery)",
        example="step-down",
    )
    efficiency: Number = key(0.90, "step-down and step-up", gt=0, le=1, mark="common practice", example=0.90)
    idle_w: Number = key(0.0, "drawn by the converter itself", unit="W", ge=0, le=1e4, example=0.02)
    idle_a: Number = key(0.0, "linear: ground current of the regulator", unit="A", ge=0, le=100, example=0.005)
    dropout_v: Number = key(
        None,
        "least drop across it; default 0.5 step-down, 2 linear",
        unit="V",
        ge=0,
        le=100,
        mark="common practice",
        example=0.5,
    )
    tolerance_pct: Number = key(
        5.0, "how far the voltage may sag at the load", unit="%", gt=0, lt=100, mark="common practice", example=5
    )
    wire: Wire | None = key(None, "after the converter", example={"length_m": 0.3, "area_mm2": 0.5})
    diode_drop_v: Number = key(0.0, "before the converter", unit="V", ge=0, le=20, example=0.4)

    @model_validator(mode="before")
    @classmethod
    def _dropout_by_kind(cls, data: Any) -> Any:
        """Fill the dropout, so that later code always has it."""
        if isinstance(data, dict) and data.get("dropout_v") is None:
            kind = data.get("kind")
            return {**data, "dropout_v": DROPOUT_V.get(kind, 0.0) if isinstance(kind, str) else 0.0}
        return data

    def problems(self) -> Iterator[Problem]:
        yield from checks.rail(self)


class Traction(Part):
    """Drive power from mass, speed and ground."""

    mass_kg: Number = key(..., "of the robot", unit="kg", gt=0, le=1e5, example=20)
    speed_m_s: Number = key(..., "while driving", unit="m/s", gt=0, le=50, example=0.5)
    rolling_resistance: Number = key(
        ..., "resistance over weight: gravel 0.02, loose gravel 0.04-0.08, sand 0.1-0.4", gt=0, le=2, example=0.05
    )
    slope_deg: Number = key(0.0, "mean climb", unit="deg", ge=0, lt=45, example=2)
    drivetrain_efficiency: Number = key(..., "mechanical out over electrical in", gt=0, le=1, example=0.6)


class Load(Part):
    """One thing that draws power, and when."""

    name: Named = key(..., "what people call it", example="computer")
    rail: Named = key(..., "which rail feeds it", example="logic")
    watts: Number | None = key(None, "at the load while it works", unit="W", ge=0, le=1e5, example=4.0)
    amps: Number | None = key(None, "instead of watts", unit="A", ge=0, le=1e4, example=0.8)
    traction: Traction | None = key(
        None,
        "instead of watts: drive power from mass, speed and ground",
        example={"mass_kg": 20, "speed_m_s": 0.5, "rolling_resistance": 0.05, "drivetrain_efficiency": 0.6},
    )
    idle_watts: Number = key(0.0, "the rest of the time", unit="W", ge=0, le=1e5, example=0.1)
    peak_a: Number | None = key(
        None, "start or stall current, for the brown-out check", unit="A", gt=0, le=1e4, example=9.0
    )
    hours: Spans | None = key(None, "[from, to] spans of the clock; default always", example=[[9, 11.5], [14, 16]])
    clock: Literal["local", "solar"] = key("local", "which clock hours means: local or solar")
    on_fraction: Share = key(1.0, "share of the time within those hours", example=0.6)
    months: tuple[Month, ...] = key(
        tuple(range(1, 13)), "months in which it works, 1 to 12", example=[3, 4, 5, 6, 7, 8, 9, 10]
    )
    weekdays: tuple[Weekday, ...] = key(
        ("mon", "tue", "wed", "thu", "fri", "sat", "sun"),
        "days on which it works",
        example=["mon", "tue", "wed", "thu", "fri"],
    )
    moves: Flag = key(False, "true: the robot changes place while this is due", example=True)
    skip_below_soc: Number | None = key(
        None, "present: skippable work, skipped below this charge; absent: essential", ge=0, lt=1, example=0.4
    )

    def problems(self) -> Iterator[Problem]:
        yield from checks.load(self)


class Robot(Part):
    """A robot with the site it lives at."""

    name: Named = key(..., "what people call it", example="Row scout")
    site: Site = key(..., "site file, relative to this one", example="site.toml")
    heading: Heading = key("fixed", "which way the nose points: fixed, roams or turns-to-sun")
    heading_deg: Turn = key(0.0, "fixed: of the nose from north, clockwise", unit="deg", example=90)
    headings: HeadingSpans = key(
        (),
        'another heading by hours of the local clock: [from, to, heading], the nose in degrees behind "fixed"; '
        "heading holds in all others",
        example=[[0, 9, "fixed", 135], [9, 16, "roams"]],
    )
    parked: Literal["random", "mean", "worst", "to-sun"] = key(
        "random", "roams: where it stands while nothing moves it: random, mean, worst or to-sun"
    )
    target: Target = key(Target(), "what counts as success")
    deployment: Deployment | None = key(None, "the part of the year the robot is out; absent: all year")
    panels: tuple[Panel, ...] = key(
        ...,
        "the panels, one table for each kind",
        alias="panel",
        min_length=1,
        max_length=100,
        example=[{"name": "deck", "watts": 40, "vmp_v": 18.0, "tilt_deg": 10}],
    )
    controller: Controller = key(Controller(), "the charge controller")
    battery: Battery = key(
        ..., "the battery", example={"chemistry": "lifepo4", "cells_in_series": 4, "capacity_ah": 12}
    )
    rails: tuple[Rail, ...] = key(
        (),
        "supplies between battery and loads",
        alias="rail",
        max_length=100,
        example=[{"name": "logic", "kind": "step-down", "volts": 5.0}],
    )
    loads: tuple[Load, ...] = key(
        ...,
        "what draws power",
        alias="load",
        min_length=1,
        max_length=200,
        example=[{"name": "computer", "rail": "logic", "watts": 4.0}],
    )
    window: Window | None = key(None, "present: the robot lives behind glass")

    @property
    def watts(self) -> float:
        """Name-plate power of all panels [W]."""
        return sum(panel.total_watts for panel in self.panels)

    @property
    def roams(self) -> bool:
        """Whether it roams at any hour of the day."""
        return self.heading == "roams" or any(heading == "roams" for _, _, heading, _ in self.headings)

    def problems(self) -> Iterator[Problem]:
        yield from checks.robot(self)
