"""What several keys of a robot file must hold together."""

from __future__ import annotations

import difflib
import re
from collections.abc import Iterator, Sequence
from itertools import pairwise
from typing import TYPE_CHECKING, Any

from . import sizes
from .fields import Path, Problem

if TYPE_CHECKING:
    from .robot import Battery, Controller, Deployment, Load, Panel, Rail, Robot
    from .window import Window

Row = tuple[Any, ...]
"""From, to, and what holds in these hours."""

DAYS_IN_MONTH = (31, 29, 31, 30, 31, 30, 31, 31, 30, 31, 30, 31)
SHEET_MISMATCH = 0.05
"""How far watts may differ from vmp_v x imp_a; common practice: data sheets round."""
STRING_MISMATCH = 0.10
"""How far the voltages of strings on one tracker may differ; common practice."""
TOUCH_V = 1e-6
"""Voltages this close agree: sums of decimals round."""


def window(window: Window) -> Iterator[Problem]:
    """Room temperatures in order, lamps with hours."""
    if window.room_min_c > window.room_max_c:
        wrong = f"{window.room_min_c:g} is above room_max_c = {window.room_max_c:g}"
        remedy = f"room_min_c = {window.room_max_c:g} and room_max_c = {window.room_min_c:g}"
        yield Problem(("room_min_c",), wrong, remedy, (("room_max_c",),))
    if window.lamp_lux > 0 and not window.lamp_hours:
        wrong = f"are missing although lamp_lux is {window.lamp_lux:g}"
        yield Problem(("lamp_hours",), wrong, "e.g. lamp_hours = [[8, 18]]", (("lamp_lux",),))
    yield from _spans(window.lamp_hours, "lamp_hours")


def deployment(deployment: Deployment) -> Iterator[Problem]:
    """Both days exist in every year."""
    yield from day_of_year("from", deployment.start)
    yield from day_of_year("to", deployment.end)


def day_of_year(name: str, day: str) -> Iterator[Problem]:
    """The day exists in every year."""
    if day == "02-29":
        yield Problem((name,), '"02-29" comes only in leap years', f'{name} = "02-28" or {name} = "03-01"')
    elif month_and_day(day) == (0, 0):
        yield Problem((name,), f'"{day}" is no day of the year', f'month and day as MM-DD, e.g. {name} = "03-15"')


def month_and_day(day: str) -> tuple[int, int]:
    """Month and day of ``MM-DD``; (0, 0) where there is no such day."""
    match = re.fullmatch(r"([0-9]{2})-([0-9]{2})", day)
    month, of_month = (int(match[1]), int(match[2])) if match else (0, 0)
    return (month, of_month) if 1 <= month <= 12 and 1 <= of_month <= DAYS_IN_MONTH[month - 1] else (0, 0)


def panel(panel: Panel) -> Iterator[Problem]:
    """The data sheet is one that a panel can have."""
    yield from sizes.panel(panel)
    for inner, outer in (("vmp_v", "voc_v"), ("imp_a", "isc_a")):
        low, high = getattr(panel, inner), getattr(panel, outer)
        if low is not None and high is not None and low >= high:
            wrong = f"{low:g} is not below {outer} = {high:g}"
            remedy = f"the value at maximum power here and the larger one in {outer}; they seem swapped"
            yield Problem((inner,), wrong, remedy, ((outer,),))
    if panel.vmp_v is not None and panel.imp_a is not None:
        sheet_w = panel.vmp_v * panel.imp_a
        if abs(sheet_w / panel.watts - 1) > SHEET_MISMATCH:
            yield Problem(
                ("watts",),
                f"{panel.watts:g} is not vmp_v x imp_a = {panel.vmp_v:g} x {panel.imp_a:g} = {sheet_w:.4g}",
                "the three as the data sheet of one panel has them (they may differ by 5 %)",
                judged=(("vmp_v",), ("imp_a",)),
            )
    for number, (start, end, _) in enumerate(panel.obstructions):
        if start == end:
            wrong = f"begins and ends at {start:g} deg"
            yield Problem(("obstructions", number), wrong, "from and to, clockwise, e.g. [170, 190, 60]")
    yield from _spans(panel.tilt_hours, "tilt_hours")


def controller(controller: Controller) -> Iterator[Problem]:
    """An efficiency curve is complete and rises in its shares."""
    curve = controller.efficiency_curve
    if curve is None:
        return
    if controller.rated_w is None:
        wrong = "is missing; efficiency_curve is given in shares of it"
        yield Problem(("rated_w",), wrong, "e.g. rated_w = 75", (("efficiency_curve",),))
    shares = [share for share, _ in curve]
    rising = all(b > a for a, b in pairwise(shares))
    if not curve or not rising or min(shares) < 0 or not all(0 < efficiency <= 1 for _, efficiency in curve):
        yield Problem(
            ("efficiency_curve",),
            "is no curve: its shares must rise from 0 or more, its efficiencies lie above 0 and up to 1",
            "e.g. efficiency_curve = [[0.05, 0.85], [0.3, 0.95], [1, 0.94]]",
        )


def battery(battery: Battery) -> Iterator[Problem]:
    """Thresholds and temperature window in order."""
    yield from sizes.battery(battery)
    if battery.cutoff_soc >= battery.restart_soc:
        yield Problem(
            ("restart_soc",),
            f"{battery.restart_soc:g} is not above cutoff_soc = {battery.cutoff_soc:g}",
            f"a restart_soc above {battery.cutoff_soc:g}, or both left out for the usual shares of {battery.chemistry}",
            judged=(("cutoff_soc",),),
        )
    low, high = battery.charge_min_c, battery.charge_max_c
    if low is not None and high is not None and low >= high:
        wrong = f"{low:g} is not below charge_max_c = {high:g}"
        yield Problem(("charge_min_c",), wrong, "the colder of the two here", (("charge_max_c",),))


def rail(rail: Rail) -> Iterator[Problem]:
    """A converter has a voltage, a straight rail has none."""
    if rail.kind == "none" and rail.volts is not None:
        wrong = f'{rail.volts:g} is given for kind "none", which has the battery\'s voltage'
        yield Problem(("volts",), wrong, 'nothing here, or kind = "step-down"', (("kind",),))
    if rail.kind != "none" and rail.volts is None:
        yield Problem(("volts",), f'is missing; kind "{rail.kind}" needs it', "e.g. volts = 5.0", (("kind",),))


def load(load: Load) -> Iterator[Problem]:
    """One way to say the power, hours that run forward, lists without gaps or doubles."""
    yield from sizes.load(load)
    given = [name for name in ("watts", "amps", "traction") if getattr(load, name) is not None]
    if not given:
        yield Problem(
            ("watts",),
            "is missing, and so are amps and traction",
            "one of the three, e.g. watts = 4.0",
            (("amps",), ("traction",)),
        )
    if len(given) > 1:
        wrong = f"stands beside {given[0]}, and both say what it draws"
        yield Problem((given[1],), wrong, f"only one of {' and '.join(given)}", tuple((name,) for name in given))
    if load.hours is not None:
        yield from _spans(load.hours, "hours", required=True)
    for name, values in (("months", load.months), ("weekdays", load.weekdays)):
        doubles = [value for value in dict.fromkeys(values) if values.count(value) > 1]
        if not values:
            yield Problem(
                (name,), "is empty, so the load would never work", f"at least one, or leave {name} out for all"
            )
        if doubles:
            yield Problem((name,), f"names {doubles[0]} twice", f"each of the {name} once")


def _spans(spans: Sequence[Row], name: str, required: bool = False) -> Iterator[Problem]:
    """Spans of the day lie within it, run forward and do not overlap; what stands behind the hours is kept in words."""
    if required and not spans:
        yield Problem((name,), "is empty, so the load would never work", f"e.g. {name} = [[9, 17]], or leave it out")
    outside = [number for number, (start, end, *_) in enumerate(spans) if not (0 <= start <= 24 and 0 <= end <= 24)]
    for number in outside:
        wrong = f"{_row(spans[number])} is outside the day"
        yield Problem((name, number), wrong, "hours from 0 to 24, e.g. 9 and 17, or 9.5 and 11.25")
    backward = [span for span in spans if span[0] >= span[1]]
    if outside or backward:
        if not outside:
            wrong = f"{_row(backward[0])} does not run forward within the day"
            yield Problem((name,), wrong, f"{name} = {in_words(_within_days(spans))}")
        return
    for first, second in pairwise(sorted(spans, key=lambda span: span[:2])):
        if second[0] < first[1]:
            end = max(first[1], second[1])
            one = f"them as one, e.g. [{first[0]:g}, {end:g}]" if len(first) == 2 else "each hour in one of them only"
            yield Problem((name,), f"{_row(first)} and {_row(second)} overlap", one)


def _within_days(spans: Sequence[Row]) -> list[Row]:
    """The same spans, those across midnight cut there; a span without length is taken as the whole day."""
    cut: list[Row] = []
    for start, end, *rest in spans:
        parts = [(0.0, 24.0)] if start == end else [(start, end)] if start < end else [(start, 24.0), (0.0, end)]
        cut += [(a, b, *rest) for a, b in parts if a < b]
    return cut


def _row(row: Row) -> str:
    shown = (f'"{item}"' if isinstance(item, str) else f"{item:g}" for item in row if item is not None)
    return f"[{', '.join(shown)}]"


def in_words(rows: Sequence[Row]) -> str:
    """Rows as the file writes them."""
    return f"[{', '.join(map(_row, rows))}]"


def robot(robot: Robot) -> Iterator[Problem]:
    """Names are unique, loads have rails, rails fit the battery, panels fit the controller, hours do not overlap."""
    yield from _headings(robot)
    yield from _on_a_route(robot)
    for kind, parts in (("panel", robot.panels), ("rail", robot.rails), ("load", robot.loads)):
        yield from _unique(kind, [part.name for part in parts])
    yield from _load_rails(robot)
    for number, rail in enumerate(robot.rails):
        yield from _rail_voltage(rail, number, robot.battery)
    yield from _panels_on_controller(robot)
    yield from sizes.robot(robot)


def _headings(robot: Robot) -> Iterator[Problem]:
    """Headings by hours: an angle behind "fixed" and behind nothing else."""
    yield from _spans(robot.headings, "headings")
    for number, row in enumerate(robot.headings):
        *hours, heading, angle = row
        without = _row((*hours, heading))
        if heading == "fixed" and angle is None:
            wrong = f"{without} does not say where the nose points"
            fixed = _row((*hours, heading, 135))
            yield Problem(("headings", number), wrong, f"the degrees from north, clockwise, behind it, e.g. {fixed}")
        if heading != "fixed" and angle is not None:
            wrong = f'{_row(row)} has an angle, which only "fixed" has'
            yield Problem(("headings", number), wrong, f"{without}, or {_row((*hours, 'fixed', angle))}")


def _on_a_route(robot: Robot) -> Iterator[Problem]:
    """What only a robot that keeps its place can have."""
    if not robot.site.stops:
        return
    if robot.window is not None:
        wrong = "is given, and the site file has a route"
        yield Problem(("window",), wrong, "no [window], or a site without stops", (("site",),))
    for number, load in enumerate(robot.loads):
        if load.clock == "solar":
            wrong = '"solar" is the time of one meridian, and the site file has a route'
            yield Problem(("load", number, "clock"), wrong, 'clock = "local"', (("site",),))


def _unique(kind: str, names: list[str]) -> Iterator[Problem]:
    for number, name in enumerate(names):
        first = names.index(name)
        if first < number:
            wrong = f'"{name}" is the name of {kind} {first + 1} already'
            free = next(f"{name} {n}" for n in range(2, len(names) + 2) if f"{name} {n}" not in names)
            yield Problem(
                (kind, number, "name"), wrong, f'another name, e.g. name = "{free}"', ((kind, first, "name"),)
            )


def _load_rails(robot: Robot) -> Iterator[Problem]:
    names = [rail.name for rail in robot.rails]
    judged: tuple[Path, ...] = (("rail",),) if not names else tuple(("rail", n, "name") for n in range(len(names)))
    for number, load in enumerate(robot.loads):
        if load.rail not in names:
            near = difflib.get_close_matches(load.rail, names, n=1, cutoff=0.5)
            choices = " or ".join(f'"{name}"' for name in near + [name for name in names if name not in near])
            remedy = f"rail = {choices}" if names else f'a [[rail]] with name = "{load.rail}" and its kind'
            yield Problem(("load", number, "rail"), f'"{load.rail}" is no rail of this file', remedy, judged)


def _rail_voltage(rail: Rail, number: int, battery: Battery) -> Iterator[Problem]:
    """A regulator can hold its voltage over the whole working range of the battery at rest."""
    if rail.volts is None:
        return
    of_rail: tuple[Path, ...] = tuple(("rail", number, name) for name in ("kind", "dropout_v", "diode_drop_v"))
    judged = of_rail + tuple(("battery", name) for name in ("chemistry", "cells_in_series", "cutoff_soc"))
    reach_v = battery.lowest_v - rail.diode_drop_v - rail.dropout_v
    floor_v = battery.highest_v - rail.diode_drop_v
    pack = f"the battery ({battery.in_words})"
    diode = f" less {rail.diode_drop_v:g} V of diode" if rail.diode_drop_v else ""
    if rail.kind in ("step-down", "linear") and rail.volts > reach_v + TOUCH_V:
        wrong = (
            f'{rail.volts:g} is out of reach of kind "{rail.kind}": {pack} sinks to {battery.lowest_v:.2f} V at'
            f" cutoff_soc = {battery.cutoff_soc:g}{diode} less {rail.dropout_v:g} V dropout, which leaves {reach_v:.2f}"
        )
        yield Problem(
            ("rail", number, "volts"), wrong, f'kind = "step-up", volts below {reach_v:.2f}, or more cells', judged
        )
    if rail.kind == "step-up" and rail.volts < floor_v - TOUCH_V:
        wrong = (
            f'{rail.volts:g} is out of reach of kind "step-up": {pack} has {battery.highest_v:.2f} V when full{diode}'
        )
        yield Problem(("rail", number, "volts"), wrong, f'kind = "step-down", or volts above {floor_v:.2f}', judged)


def _panels_on_controller(robot: Robot) -> Iterator[Problem]:
    kind, shared = robot.controller.kind, robot.controller.trackers == "shared"
    strings = [(n, p.vmp_v * p.in_series) for n, p in enumerate(robot.panels) if p.vmp_v is not None]
    for number, panel in enumerate(robot.panels):
        if panel.vmp_v is None and kind != "mppt":
            wrong = f'is missing; a "{kind}" controller holds the panel at the battery, so its voltage decides'
            remedy = "vmp_v from the data sheet, e.g. vmp_v = 18.0"
            yield Problem(("panel", number, "vmp_v"), wrong, remedy, (("controller", "kind"),))
    if not shared or not strings:
        return
    (first, first_v), *others = strings
    for number, string_v in others:
        if max(first_v, string_v) / min(first_v, string_v) - 1 > STRING_MISMATCH:
            names = robot.panels[number].name, robot.panels[first].name
            yield Problem(
                ("panel", number, "in_series"),
                f'strings of "{names[0]}" at {string_v:g} V and of "{names[1]}" at {first_v:g} V share one tracker',
                'trackers = "per-panel" in [controller], or in_series so that their voltages agree within 10 %',
                judged=(("panel", number, "vmp_v"), ("panel", first, "vmp_v"), ("controller", "trackers")),
            )
