"""Where the energy of recorded steps went: sums over the rows that `step` wrote."""

from __future__ import annotations

import numpy as np

from ..types import FloatArray, IntArray
from .block import Block, Record, Tallies
from .layout import OverVolts
from .window import Parts, Window

Sums = dict[str, FloatArray]
PARTS = ("loads", "rails", "wire", "idle")


class Rows:
    """The record of a window as arrays (n_steps, n_lanes), and what is read from the tables there."""

    def __init__(self, block: Block, window: Window, record: Record) -> None:
        self.block, self.window, self.record = block, window, record
        n, shape = window.n, block.layout.shape

        def flat(rows: list[FloatArray]) -> FloatArray:
            whole = rows[0].base
            return (np.array(rows) if whole is None else whole).reshape(len(rows), -1)

        def lanes(values: FloatArray) -> FloatArray:
            return np.broadcast_to(values, (n, *shape)).reshape(n, -1)

        self.u = flat(record.u)
        self.power, self.amps, self.out = flat(record.power), flat(record.amps), flat(record.out)
        self.served = [flat(level) for level in record.served]
        self.hours = lanes(block.layout.over_years(window.hours_y))
        self.cut = bool(self.out.any())
        self.lanes = lanes
        place = self.u[:-1] * block.pack.places_per_wh_ah
        self.half_v = block.half_v.at(place)
        even = block.pack.even_efficiency
        self.efficiency = block.pack.efficiency.at(place) if even is None else np.full(1, even)

    def per_year(self, values: FloatArray) -> FloatArray:
        """(n_steps, n_years) as rows."""
        return self.lanes(self.block.layout.over_years(values))

    def place(self, table: OverVolts, *, demand: bool) -> FloatArray:
        """Where the lanes lie between the voltages of a table; unused where it has one."""
        grid = self.block.demand_v if demand else self.block.supply_v
        return self.half_v if table.slope is None else self.half_v * grid.per_half_v - grid.offset

    def read(self, table: OverVolts, *, column: int | None = None) -> FloatArray:
        """A table at every step and lane; ``column`` None reads the supply at the lane's watts."""
        start = table.start(self.block.year, self.block.watts if column is None else column)
        return table.at(slice(None), start, place=self.place(table, demand=column is not None))


def add_flows(sums: Sums, rows: Rows) -> Sums:
    """Add up harvest, spilled and lost energy, own use, heater and draw of the cut robot [Wh/Ah]; returns the rows."""
    flows = _pack_flows(rows) | _steady_flows(rows)
    flows |= _supply_flows(rows)
    for s, lanes, values in rows.record.cuts:
        for name, energies in values.items():
            if name in flows:
                flows[name][s, lanes] = energies
    for name, energies in flows.items():
        sums[name] = sums.get(name, 0.0) + energies.sum(axis=0)
    lowest = rows.u.min(axis=0)
    for _, lanes, values in rows.record.cuts:
        if "low" in values:
            lowest[lanes] = np.minimum(lowest[lanes], values["low"])
    sums["lowest_u"] = np.minimum(sums.get("lowest_u", np.inf), lowest)
    return flows


def trace_rows(rows: Rows, flows: Sums, *, lanes: IntArray) -> Sums:
    """The steps of some lanes, (n_steps, n_lanes), as in `Trace`."""
    block, window = rows.block, rows.window
    per_h = np.divide(1.0, rows.hours, out=np.zeros(rows.hours.shape), where=rows.hours > 0)
    essential_x, extra_w = (values[block.design] for values in (block.designs.essential_x, block.designs.extra_w))
    essential = rows.read(window.essential.total, column=0) * essential_x + extra_w
    demand, served = essential.copy(), essential * (1.0 - rows.out)
    for level, done in enumerate(rows.served):
        work_x = block.designs.work_x[window.month - 1, level][block.design]
        demand += rows.read(window.work.total, column=level) * work_x
        served += done * block.ah_l * per_h
    every = {
        "harvest_w": flows["harvest"] * block.ah_l * per_h,
        "spilled_w": flows["spilled"] * block.ah_l * per_h,
        "demand_w": demand,
        "served_w": served,
        "soc": block.pack.soc.at(_before_boots(rows) * block.pack.places_per_wh_ah),
        "box_temp_c": np.where(rows.out > 0, rows.per_year(window.box_y), rows.per_year(window.warm_box_y)),
        "on": 1.0 - rows.out,
    }
    return {name: values[:, lanes] for name, values in every.items()}


def _before_boots(rows: Rows) -> FloatArray:
    """Stored energy at the end of each step [Wh/Ah], before the next one begins with a boot."""
    u = rows.u[1:].copy()
    for s, lanes in rows.record.boots:
        if s > 0:
            u[s - 1, lanes] += rows.block.pack.boot_wh / rows.block.ah_l[lanes]
    return u


def _mixed(rows: Rows, name: str) -> FloatArray:
    """A condition of the pack at every step and lane: warm where loads are on and a heater holds the box."""
    cold = rows.per_year(getattr(rows.window.cold_pack, name))
    if rows.window.warm_pack is None:
        return cold
    warm = rows.per_year(getattr(rows.window.warm_pack, name))
    return np.where(rows.out > 0, cold, warm) if rows.cut else warm


def _pack_flows(rows: Rows) -> Sums:
    """What is refused at the terminals, lost in the pack, and self-discharged [Wh/Ah]."""
    amps, v = rows.amps, 2.0 * rows.half_v
    heat = 0.25 * _mixed(rows, "r4") * amps**2
    stored = v * amps
    spilled = np.where(rows.power > 0, np.maximum(rows.power - stored - heat, 0.0), 0.0)
    loss = heat + np.maximum(stored, 0.0) * (1.0 - rows.efficiency)
    return {
        "spilled": spilled * rows.hours,
        "loss": loss * rows.hours,
        "fade": _mixed(rows, "fade") * rows.u[:-1] * rows.hours,
    }


def _steady_flows(rows: Rows) -> Sums:
    """Own use, heater and the draw of a cut robot [Wh/Ah]."""
    block, window = rows.block, rows.window
    per_ah = 1.0 / np.broadcast_to(block.ah, block.layout.shape).ravel()
    flows: Sums = {"own": block.own_use_w * per_ah * rows.hours}
    if block.pack.off_draw_w > 0:
        flows["off_draw"] = block.pack.off_draw_w * per_ah * rows.hours * rows.out
    if window.heated_y is not None:
        on = rows.hours * (1.0 - rows.out) * rows.per_year(window.heated_y)
        flows["heater"] = block.pack.heater_w * per_ah * on
    return flows


def _supply_flows(rows: Rows) -> Sums:
    """Harvest offered, and what leaves the panel and its wires [Wh/Ah]."""
    light = np.broadcast_to(rows.block.light, rows.block.layout.shape).ravel()
    window = rows.window
    tables = {"harvest": window.offer, "panel": window.panel, "panel_wire": window.wire}
    return {name: rows.read(table) * light * rows.hours for name, table in tables.items() if table is not None}


def add_demand(sums: Sums, rows: Rows, tallies: Tallies) -> None:
    """Energy asked and not served by the essential loads before the design's factor, and work served, by part [Wh].

    Work parts are per Ah of the pack. Keys: essential_<part>, lost_<part>, work_<part>; fills the tallies' sums.
    """
    shape = rows.block.layout.shape
    tallies.out_h += (rows.out * rows.hours).sum(axis=0).reshape(shape)
    for part in ("total", *PARTS):
        table = getattr(rows.window.essential, part)
        if table is None:
            continue
        energy = rows.read(table, column=0) * rows.hours
        sums[f"essential_{part}"] = sums.get(f"essential_{part}", 0.0) + energy.sum(axis=0)
        if rows.cut:
            sums[f"lost_{part}"] = sums.get(f"lost_{part}", 0.0) + (energy * rows.out).sum(axis=0)
    for level, served in enumerate(rows.served):
        if any(level in due for due in rows.window.due):
            tallies.served_wh_ah[level] += served.sum(axis=0).reshape(shape)
            _add_work(sums, rows, rows.window.work, level=level)


def _add_work(sums: Sums, rows: Rows, work: Parts, *, level: int) -> None:
    """Work served of one level by part."""
    total = rows.read(work.total, column=level)
    share = np.divide(rows.served[level], total, out=np.zeros_like(total), where=total > 0)
    for part in PARTS:
        table = getattr(work, part)
        if table is not None:
            energy = (rows.read(table, column=level) * share).sum(axis=0)
            sums[f"work_{part}"] = sums.get(f"work_{part}", 0.0) + energy
