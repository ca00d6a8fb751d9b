"""One step of the balance for a block of lanes: the only physics of time. Everything is per Ah of the lane's pack."""

from __future__ import annotations

import numpy as np

from ..types import BoolArray, FloatArray, IntArray
from .block import Block, Record, Tallies
from .cut import cut, run_empty
from .layout import OverVolts
from .pack import Table
from .window import Coefs, Window


def step(block: Block, window: Window, s: int, *, record: Record, tallies: Tallies) -> None:
    """Move every lane of the block through step ``s`` of the window.

    Order within a step: a restart is decided; harvest meets the loads, skippable work takes what lies above its
    threshold; the rest charges within acceptance or discharges; a lane that falls below cut-off is cut within the
    step and coasts through what is left of it.
    """
    u, power, amps = record.u[s], record.power[s], record.amps[s]
    if block.n_off:
        _restart(block, window, s, record=record, tallies=tallies)
    coefs = _coefs(block, window, s)
    _look_up(block, u)
    _net_power(block, window, s, power=power)
    if window.due[s]:
        _serve(block, window, s, coefs=coefs, record=record, tallies=tallies)
    failed = _current(block, coefs, power=power, amps=amps)
    if window.bright[s]:
        _accept(block, window, coefs, u=u, amps=amps)
    _book(block, window, s, coefs=coefs, record=record)
    if block.n_off:
        _tally_off(block, window, s, record=record, tallies=tallies)
    _end(block, window, s, coefs=coefs, failed=failed, record=record, tallies=tallies)


def _restart(block: Block, window: Window, s: int, *, record: Record, tallies: Tallies) -> None:
    """Loads come back where the charge allows, and pay for the boot."""
    u, cold, mask, mask2 = record.u[s], window.cold[s], block.mask, block.mask2
    np.greater_equal(u, cold.restart, out=mask)
    np.logical_and(mask, block.off, out=mask)
    if not np.count_nonzero(mask):
        return
    np.subtract(u, block.boot, out=block.a)
    np.greater(block.a, cold.cutoff, out=mask2)
    np.logical_and(mask, mask2, out=mask)
    real = window.real[s]
    if real is not None:
        np.logical_and(mask, real, out=mask)
    lanes = np.flatnonzero(mask)
    if lanes.size:
        np.copyto(u, block.a, where=mask)
        block.off[mask] = False
        block.off_x[mask] = 0.0
        block.n_off -= lanes.size
        tallies.boots.reshape(-1)[lanes] += 1
        if record.rows:
            record.boots.append((s, lanes))
        if tallies.outages is not None:
            tallies.outages.end(lanes, at_h=window.elapsed_y[s][block.year[lanes]])


def _coefs(block: Block, window: Window, s: int) -> Coefs:
    """The pack in this step: as warm as the heater holds it where the loads are on."""
    cold = window.cold[s]
    if not window.heated or window.heated[s] is None:
        return cold
    warm = window.warm[s]
    if not block.n_off:
        return warm
    off = block.off
    names = ("r", "keep", "cutoff", "restart", "max_c", "two_per_r", "half_top", "half_fill")
    return warm._replace(**{name: np.where(off, getattr(cold, name), getattr(warm, name)) for name in names})


def _look_up(block: Block, u: FloatArray) -> None:
    """Half the rest voltage of every lane, and where it lies between the tables' voltages."""
    np.multiply(u, block.pack.places_per_wh_ah, out=block.place)
    _read(block.half_v, block, out=block.v)
    grid = block.supply_v
    if grid.n > 1:
        np.multiply(block.v, grid.per_half_v, out=block.supply_at)
        np.subtract(block.supply_at, grid.offset, out=block.supply_at)
    grid = block.demand_v
    if grid.n > 1:
        np.multiply(block.v, grid.per_half_v, out=block.demand_at)
        np.subtract(block.demand_at, grid.offset, out=block.demand_at)


def _read(table: Table, block: Block, *, out: FloatArray) -> None:
    """A table at ``block.place``; overwrites scratch a."""
    np.copyto(block.k, block.place, casting="unsafe")
    table.base.take(block.k, out=out, mode="clip")
    table.slope.take(block.k, out=block.a, mode="clip")
    np.multiply(block.a, block.place, out=block.a)
    np.add(out, block.a, out=out)


def _read_volts(block: Block, table: OverVolts, s: int, *, start: IntArray, at: FloatArray, out: FloatArray) -> None:
    """A table over voltage at fractional nodes ``at``; overwrites scratch a."""
    if table.slope is None:
        table.base[s].take(start, out=out, mode="clip")
        return
    np.copyto(block.node, at, casting="unsafe")
    np.add(block.node, start, out=block.node)
    table.base[s].take(block.node, out=out, mode="clip")
    table.slope[s].take(block.node, out=block.a, mode="clip")
    np.multiply(block.a, at, out=block.a)
    np.add(out, block.a, out=out)


def _net_power(block: Block, window: Window, s: int, *, power: FloatArray) -> None:
    """Harvest less essential loads, own use and heater; while cut, less own use and the draw of the cut robot."""
    draw, table = block.draw, window.essential.total
    if block.essential_rows is not None:
        np.multiply(block.essential_rows[s], block.essential, out=draw)
    else:
        _read_volts(block, table, s, start=block.essential_start, at=block.demand_at, out=block.ess)
        np.multiply(block.ess, block.essential, out=draw)
    np.add(draw, block.fixed, out=draw)
    heated = window.heated[s] if window.heated else None
    if heated is not None:
        np.add(draw, heated * block.heater, out=draw)
    if block.n_off:
        np.copyto(draw, block.coast_draw, where=block.off)
    if not window.bright[s]:
        np.negative(draw, out=power)
        return
    _offer(block, window, s, out=power)
    np.subtract(power, draw, out=power)


def _offer(block: Block, window: Window, s: int, *, out: FloatArray) -> None:
    """Harvest offered [W/Ah]."""
    table = window.offer
    if block.offer_rows is not None:
        np.multiply(block.offer_rows[s], block.light, out=out)
        return
    _read_volts(block, table, s, start=block.offer_start, at=block.supply_at, out=out)
    np.multiply(out, block.light, out=out)


def _ask(block: Block, window: Window, s: int, *, level: int, tallies: Tallies, out: FloatArray) -> None:
    """Energy a skippable load asks for in the step [Wh/Ah]."""
    table, hours = window.work.total, window.hours[s]
    if block.work_rows is not None:
        np.multiply(block.work_rows[level][s], block.work_x[level], out=out)
        np.multiply(out, hours, out=out)
        return
    _read_volts(block, table, s, start=block.work_starts[level], at=block.demand_at, out=out)
    np.multiply(out, hours, out=out)
    tallies.asked_wh[level] += out
    np.multiply(out, block.work_x[level], out=out)


def _serve(block: Block, window: Window, s: int, *, coefs: Coefs, record: Record, tallies: Tallies) -> None:
    """Skippable work takes what lies above its threshold, lowest threshold first; lowers the net power by it.

    What a pack can give above a threshold is the energy there less I²R of drawing it within the step.
    """
    power, room, gone = record.power[s], block.b, block.c
    np.multiply(power, window.hours[s], out=room)
    np.multiply(record.u[s], coefs.keep, out=block.kept)
    np.multiply(block.v, block.v, out=block.loss_x)
    np.divide(coefs.r, block.loss_x, out=block.loss_x)
    np.multiply(block.loss_x, np.multiply(window.per_h[s], 0.25), out=block.loss_x)
    gone[...] = 0.0
    for level in window.due[s]:
        served = record.served[level][s]
        _ask(block, window, s, level=level, tallies=tallies, out=served)
        _above(block, coefs.skip[level], out=block.a)
        np.add(block.a, room, out=block.a)
        np.maximum(block.a, 0.0, out=block.a)
        np.minimum(served, block.a, out=served)
        if block.n_off:
            served[block.off] = 0.0
        np.subtract(room, served, out=room)
        np.add(gone, served, out=gone)
        if not record.rows:
            tallies.served_wh_ah[level] += served
    np.multiply(gone, window.per_h[s], out=gone)
    np.subtract(power, gone, out=power)


def _above(block: Block, skip: FloatArray, *, out: FloatArray) -> None:
    """Energy at the terminals that takes the charge down to a threshold; negative below it [Wh/Ah]."""
    drawn = block.drawn
    np.subtract(block.kept, skip, out=out)
    np.maximum(out, 0.0, out=drawn)
    if block.may_choke:
        # Past half of what the resistance lets through, more current brings less power.
        limit = np.divide(0.5, block.loss_x, out=np.zeros_like(drawn), where=block.loss_x > 0)
        np.minimum(drawn, limit, out=drawn)
    np.multiply(drawn, drawn, out=drawn)
    np.multiply(drawn, block.loss_x, out=drawn)
    np.subtract(out, drawn, out=out)


def _current(block: Block, coefs: Coefs, *, power: FloatArray, amps: FloatArray) -> BoolArray | None:
    """Current that brings the net power to or from the terminals; returns where the pack cannot give it."""
    a, v = block.a, block.v
    np.multiply(power, coefs.r, out=a)
    np.multiply(v, v, out=amps)
    np.add(a, amps, out=a)
    failed = None
    if block.may_fail:
        failed = a < 0.0
        np.maximum(a, 0.0, out=a)
    np.sqrt(a, out=a)
    np.add(a, v, out=a)
    np.divide(power, a, out=amps)
    return failed


def _accept(block: Block, window: Window, coefs: Coefs, *, u: FloatArray, amps: FloatArray) -> None:
    """Hold the current to what the pack takes: rate, voltage at its top, and the tail near full."""
    most, by_v = block.b, block.c
    np.subtract(block.full, u, out=most)
    np.multiply(most, coefs.half_fill, out=most)
    np.divide(most, block.v, out=most)
    if block.pack.even_efficiency is None:
        _read(block.pack.efficiency, block, out=by_v)
        np.divide(most, by_v, out=most)
    np.minimum(most, coefs.max_c, out=most)
    if block.pack.kind.top_v < np.inf:
        np.subtract(coefs.half_top, block.v, out=by_v)
        np.multiply(by_v, coefs.two_per_r, out=by_v)
        np.minimum(most, by_v, out=most)
        if window.floor_at_top:
            np.maximum(most, 0.0, out=most)
    np.minimum(amps, most, out=amps)


def _book(block: Block, window: Window, s: int, *, coefs: Coefs, record: Record) -> None:
    """The stored energy at the end of the step."""
    a, b, u_next, hours = block.b, block.c, record.u[s + 1], window.hours[s]
    np.multiply(record.amps[s], block.v, out=a)
    if window.bright[s]:
        # Only charging loses: for a current out of the pack the lesser is the current itself.
        if block.pack.even_efficiency is None:
            _read(block.pack.efficiency, block, out=b)
            np.multiply(a, b, out=b)
        else:
            np.multiply(a, block.pack.even_efficiency, out=b)
        np.minimum(a, b, out=a)
    np.multiply(a, 2.0 * hours, out=a)
    np.multiply(record.u[s], coefs.keep, out=u_next)
    np.add(u_next, a, out=u_next)


def _tally_off(block: Block, window: Window, s: int, *, record: Record, tallies: Tallies) -> None:
    """Time and essential energy lost in lanes that are cut all through the step."""
    if record.rows:
        np.copyto(record.out[s], block.off_x)
        return
    np.multiply(block.off_x, window.hours[s], out=block.a)
    np.add(tallies.out_h, block.a, out=tallies.out_h)
    essential = block.ess if block.essential_rows is None else block.essential_rows[s]
    np.multiply(block.a, essential, out=block.a)
    np.add(tallies.out_essential_wh, block.a, out=tallies.out_essential_wh)


def _end(
    block: Block, window: Window, s: int, *, coefs: Coefs, failed: BoolArray | None, record: Record, tallies: Tallies
) -> None:
    """Find the lanes in which the plain step does not hold to its end, and mend them."""
    mask, u_next = block.mask, record.u[s + 1]
    was_off = block.n_off > 0
    if was_off:
        # Lanes already cut must not run below empty; taken before new cuts change who is off.
        np.less(u_next, 0.0, out=block.mask2)
        if failed is not None:
            np.logical_or(block.mask2, failed, out=block.mask2)
        np.logical_and(block.mask2, block.off, out=block.mask2)
    np.less(u_next, coefs.cutoff, out=mask)
    if failed is not None:
        np.logical_or(mask, failed, out=mask)
    if was_off:
        np.greater(mask, block.off, out=mask)
    if was_off and np.count_nonzero(block.mask2):
        run_empty(block, window, s, lanes=_real(window, s, block.mask2), record=record)
    if np.count_nonzero(mask):
        lanes = _real(window, s, mask)
        cut(block, window, s, lanes=lanes, failed=failed, record=record, tallies=tallies)


def _real(window: Window, s: int, mask: BoolArray) -> IntArray:
    """Lanes of the mask that are not in a padding step."""
    real = window.real[s]
    return (mask if real is None else mask & real).ravel().nonzero()[0]
