"""One step of the balance for a block of lanes: the only physics of time. Everything is per Ah of the lane's pack."""

from __future__ import annotations

from dataclasses import dataclass, field

import numpy as np

from ..types import AnyArray, BoolArray, FloatArray, IntArray
from .carriers import Designs
from .layout import Layout, OverVolts, Volts
from .pack import Pack, Table, filling_per_h
from .window import Coefs, Window


@dataclass(eq=False)
class Record:
    """Where the steps of a window write, one array of lanes per step; without ``rows`` the same few over and over.

    u : stored energy at the start of each step and after the last [Wh/Ah], after a boot is paid
    power : harvest less everything served, at the terminals [W/Ah]. amps : into the pack [A/Ah]
    served : by level [Wh/Ah]. out : share of the step in which the loads are cut
    cuts : per event what the plain sums over the rows would get wrong, (step, lanes, values by name)
    """

    u: list[FloatArray]
    power: list[FloatArray]
    amps: list[FloatArray]
    served: list[list[FloatArray]]
    out: list[FloatArray]
    rows: bool
    cuts: list[tuple[int, IntArray, dict[str, FloatArray]]] = field(default_factory=list)

    @classmethod
    def of(cls, n: int, shape: tuple[int, ...], *, n_levels: int, rows: bool) -> Record:
        """Room for ``n`` steps."""

        def room(count: int) -> list[FloatArray]:
            return list(np.zeros((count, *shape))) if rows else [np.zeros(shape)] * count

        pair = [np.zeros(shape), np.zeros(shape)]
        u = room(n + 1) if rows else [pair[s % 2] for s in range(n + 1)]
        return cls(u, room(n), room(n), [room(n) for _ in range(n_levels)], room(n), rows)


class Outages:
    """Outages of every lane by the month piece they began in, (n_pieces, lanes); first: step of the lane, -1 none."""

    def __init__(self, n_pieces: int, shape: tuple[int, ...]) -> None:
        self.count, self.longest_h = np.zeros((n_pieces, *shape)), np.zeros((n_pieces, *shape))
        self.first = np.full((n_pieces, *shape), -1, dtype=np.intp)
        self.cut_at_h, self.cut_in = np.zeros(shape), np.zeros(shape, dtype=np.intp)

    def begin(self, piece: int, lanes: IntArray, *, at_h: FloatArray, step: int) -> None:
        """Loads of some lanes are cut, so many hours into the lane."""
        self.cut_at_h.reshape(-1)[lanes], self.cut_in.reshape(-1)[lanes] = at_h, piece
        self.count[piece].reshape(-1)[lanes] += 1
        first = self.first[piece].reshape(-1)
        first[lanes] = np.where(first[lanes] < 0, step, first[lanes])

    def end(self, lanes: IntArray, *, at_h: FloatArray) -> None:
        """Loads of some lanes come back, or their lane ends."""
        piece = self.cut_in.reshape(-1)[lanes]
        longest = self.longest_h.reshape(self.longest_h.shape[0], -1)
        lasted_h = at_h - self.cut_at_h.reshape(-1)[lanes]
        longest[piece, lanes] = np.maximum(longest[piece, lanes], lasted_h)


class Tallies:
    """Sums over a month piece, each the shape of lanes.

    out_h : hours cut. out_essential_wh : essential energy not served, before the design's factor
    served_wh_ah, asked_wh : by level; asked before the design's factor, only where it depends on voltage
    failed : asked for more than the pack can give. boots : restarts. outages : None where no one asked.
    """

    def __init__(self, shape: tuple[int, ...], *, n_levels: int, piece: int, outages: Outages | None) -> None:
        self.out_h, self.out_essential_wh, self.boots = np.zeros(shape), np.zeros(shape), np.zeros(shape)
        self.served_wh_ah, self.asked_wh = np.zeros((n_levels, *shape)), np.zeros((n_levels, *shape))
        self.failed = np.zeros(shape, dtype=bool)
        self.piece, self.outages = piece, outages


class Block:
    """Lanes that step together: their state, what sets their designs apart, and room to work in.

    off : loads are cut; off_x the same as 0 or 1, n_off how many lanes.
    """

    def __init__(self, pack: Pack, designs: Designs, layout: Layout, *, grids: tuple[Volts, Volts], own_use_w: float):
        over, ah = layout.over_designs, designs.battery_ah * pack.capacity_share
        self.pack, self.layout, self.designs, self.ah = pack, layout, designs, over(ah)
        self.light = over(designs.light_x / ah)
        self.essential = over(designs.essential_x / ah)
        self.fixed = over((designs.extra_w + own_use_w) / ah)
        self.coast_draw = over((own_use_w + pack.off_draw_w) / ah)
        self.boot = over(pack.boot_wh / ah)
        self.heater = over(pack.heater_w / ah)
        self.work = over(designs.work_x / ah)
        self.own_use_w = own_use_w
        self.full = pack.curve.full_wh_ah
        self.supply_v, self.demand_v = grids
        self.one_watts = int(designs.watts_at[0]) if np.ptp(designs.watts_at) == 0 else None
        self.half_v = Table(0.5 * pack.rest_v.base, 0.5 * pack.rest_v.slope)
        shape = layout.shape
        self.off, self.off_x, self.n_off = np.zeros(shape, dtype=bool), np.zeros(shape), 0
        self.k, self.node = np.empty(shape, dtype=np.intp), np.empty(shape, dtype=np.intp)
        self.place, self.v, self.a, self.b, self.c, self.draw, self.ess = (np.empty(shape) for _ in range(7))
        self.supply_at, self.demand_at = np.empty(shape), np.empty(shape)
        self.mask, self.mask2 = np.empty(shape, dtype=bool), np.empty(shape, dtype=bool)
        self.year, self.design = layout.year_of, layout.design_of
        self.watts = designs.watts_at[self.design]
        self.pieces_run = 0

    def enter(self, window: Window) -> None:
        """Prepare what stays the same over a window."""
        shape = self.layout.shape
        self.offer_rows = None
        if window.offer.slope is None and self.one_watts is not None:
            self.offer_rows = window.offer_of(self.one_watts)
        self.offer_start = window.offer.start(self.year, self.watts).reshape(shape)
        self.essential_rows = window.essential_of() if window.essential.total.slope is None else None
        self.essential_start = window.essential.total.start(self.year, 0).reshape(shape)
        levels = range(window.work.total.n_columns)
        self.work_rows = [window.work_of(k) for k in levels] if window.work.total.slope is None else None
        self.work_starts = [window.work.total.start(self.year, k).reshape(shape) for k in levels]
        self.work_x = self.work[window.month - 1]
        self.may_fail = self._may_fail(window)

    def _may_fail(self, window: Window) -> bool:
        """Whether some lane could ask for more than the pack can give."""
        most = window_top(window.essential.total.base, window.essential.total.slope) * self.essential.max()
        most += self.fixed.max() + self.heater.max() + self.coast_draw.max()
        if self.work_x.size:
            most += window_top(window.work.total.base, window.work.total.slope) * self.work_x.max() * len(self.work_x)
        half_low = 0.5 * float(self.pack.curve.rest_v[0])
        return bool(most * 0.25 * window.cold_pack.r4.max() > 0.9 * half_low**2)


def window_top(base: FloatArray, slope: FloatArray | None) -> float:
    """A bound on the values of a table over voltage."""
    if base.size == 0:
        return 0.0
    if slope is None:
        return float(base.max())
    return float(np.abs(base).max() + np.abs(slope).max() * 1000.0)


def step(block: Block, window: Window, s: int, *, record: Record, tallies: Tallies) -> None:
    """Move every lane of the block through step ``s`` of the window.

    Order within a step: a restart is decided; harvest meets the loads, skippable work takes what lies above its
    threshold; the rest charges within acceptance or discharges; a lane that falls below cut-off is cut within the
    step and coasts through what is left of it.
    """
    u, power, amps = record.u[s], record.power[s], record.amps[s]
    if block.n_off:
        _restart(block, window, s, u=u, tallies=tallies)
    coefs = _coefs(block, window, s)
    _look_up(block, u)
    _net_power(block, window, s, power=power)
    if window.due[s]:
        _serve(block, window, s, record=record, tallies=tallies)
    failed = _current(block, coefs, power=power, amps=amps)
    if window.bright[s]:
        _accept(block, window, coefs, u=u, amps=amps)
    _book(block, window, s, coefs=coefs, record=record)
    if block.n_off:
        _tally_off(block, window, s, record=record, tallies=tallies)
    _end(block, window, s, coefs=coefs, failed=failed, record=record, tallies=tallies)


def _restart(block: Block, window: Window, s: int, *, u: FloatArray, tallies: Tallies) -> None:
    """Loads come back where the charge allows, and pay for the boot."""
    cold, mask, mask2 = window.cold[s], block.mask, block.mask2
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


def _serve(block: Block, window: Window, s: int, *, record: Record, tallies: Tallies) -> None:
    """Skippable work takes the energy above its threshold, lowest threshold first; lowers the net power by it."""
    power, room, gone = record.power[s], block.b, block.c
    coefs = window.cold[s] if not window.heated or window.heated[s] is None else window.warm[s]
    np.multiply(power, window.hours[s], out=room)
    np.add(room, record.u[s], out=room)
    gone[...] = 0.0
    for level in window.due[s]:
        served = record.served[level][s]
        _ask(block, window, s, level=level, tallies=tallies, out=served)
        np.subtract(room, coefs.skip[level], out=block.a)
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
        _empty(block, window, s, lanes=_real(window, s, block.mask2), record=record)
    if np.count_nonzero(mask):
        _cut(block, window, s, lanes=_real(window, s, mask), coefs=coefs, failed=failed, record=record, tallies=tallies)


def _real(window: Window, s: int, mask: BoolArray) -> IntArray:
    """Lanes of the mask that are not in a padding step."""
    real = window.real[s]
    return np.flatnonzero(mask if real is None else mask & real)


def _pick(values: AnyArray, lanes: IntArray, *, block: Block) -> AnyArray:
    """Values of some lanes, of an array over lanes, years or designs."""
    return np.broadcast_to(values, block.layout.shape)[np.unravel_index(lanes, block.layout.shape)]


def _empty(block: Block, window: Window, s: int, *, lanes: IntArray, record: Record) -> None:
    """Cut lanes that would run below empty: what cannot be drawn is not drawn."""
    if not lanes.size:
        return
    hours = window.hours_y[s][block.year[lanes]]
    end, flows = coast(block, window, s, lanes=lanes, u=record.u[s].ravel()[lanes], hours=hours)
    record.u[s + 1].reshape(-1)[lanes] = end
    if record.rows:
        record.cuts.append((s, lanes, flows))


def _cut(
    block: Block,
    window: Window,
    s: int,
    *,
    lanes: IntArray,
    coefs: Coefs,
    failed: BoolArray | None,
    record: Record,
    tallies: Tallies,
) -> None:
    """Serve the share of the step above cut-off, cut the loads, coast through the rest."""
    gives_up = np.zeros(lanes.size, dtype=bool) if failed is None else failed.ravel()[lanes]
    stay = (record.power[s].ravel()[lanes] < 0.0) | gives_up
    lanes, gives_up = lanes[stay], gives_up[stay]
    if not lanes.size:
        return
    u, u_next = record.u[s].ravel()[lanes], record.u[s + 1].reshape(-1)
    cutoff, hours = _pick(coefs.cutoff, lanes, block=block), window.hours_y[s][block.year[lanes]]
    fall = np.maximum(u - u_next[lanes], np.finfo(float).tiny)
    share = np.where(gives_up, 0.0, np.clip((u - cutoff) / fall, 0.0, 1.0))
    middle = np.where(share > 0.0, np.minimum(u, cutoff), u)
    rest_h = (1.0 - share) * hours
    on = None
    if record.rows:
        on = _served_flows(block, window, s, lanes=lanes, coefs=coefs, share=share, record=record)
    end, flows = coast(block, window, s, lanes=lanes, u=middle, hours=rest_h)
    u_next[lanes] = end
    tallies.failed.reshape(-1)[lanes[gives_up]] = True
    if on is not None:
        record.cuts.append((s, lanes, {name: flows[name] + on[name] for name in flows} | {"low": middle}))
        record.out[s].reshape(-1)[lanes] = 1.0 - share
        for level in window.due[s]:
            record.served[level][s].reshape(-1)[lanes] *= share
    else:
        _tally_cut(block, window, s, lanes=lanes, share=share, record=record, tallies=tallies)
    block.off.reshape(-1)[lanes], block.off_x.reshape(-1)[lanes] = True, 1.0
    block.n_off += lanes.size
    if tallies.outages is not None:
        at_h = window.elapsed_y[s][block.year[lanes]] + share * hours
        tallies.outages.begin(tallies.piece, lanes, at_h=at_h, step=window.first + s)


def _tally_cut(
    block: Block, window: Window, s: int, *, lanes: IntArray, share: FloatArray, record: Record, tallies: Tallies
) -> None:
    """Time, essential energy and work lost to a cut within the step."""
    rest_h = (1.0 - share) * window.hours_y[s][block.year[lanes]]
    tallies.out_h.reshape(-1)[lanes] += rest_h
    essential = block.ess if block.essential_rows is None else block.essential_rows[s]
    tallies.out_essential_wh.reshape(-1)[lanes] += rest_h * _pick(essential, lanes, block=block)
    for level in window.due[s]:
        lost = (1.0 - share) * record.served[level][s].ravel()[lanes]
        tallies.served_wh_ah[level].reshape(-1)[lanes] -= lost


def _served_flows(
    block: Block, window: Window, s: int, *, lanes: IntArray, coefs: Coefs, share: FloatArray, record: Record
) -> dict[str, FloatArray]:
    """Energies of the part of the step before the cut [Wh/Ah]; the lane discharges, so nothing is spilled."""
    year = block.year[lanes]
    on_h = share * window.hours_y[s][year]
    u, amps = record.u[s].ravel()[lanes], record.amps[s].ravel()[lanes]
    flows = harvest_flows(block, window, s, lanes=lanes, u=u, hours=on_h)
    fade = (window.warm_pack or window.cold_pack).fade
    heated = 0.0 if window.heated_y is None else window.heated_y[s][year]
    return flows | {
        "spilled": np.zeros(lanes.size),
        "loss": _pick(coefs.r, lanes, block=block) * amps**2 * on_h,
        "fade": fade[s][year] * u * on_h,
        "own": block.own_use_w / _pick(block.ah, lanes, block=block) * on_h,
        "off_draw": np.zeros(lanes.size),
        "heater": heated * _pick(block.heater, lanes, block=block) * on_h,
    }


def harvest_flows(
    block: Block, window: Window, s: int, *, lanes: IntArray, u: FloatArray, hours: FloatArray
) -> dict[str, FloatArray]:
    """What panel, panel wire and controller give at the rest voltage of ``u`` [Wh/Ah]."""
    half_v = block.half_v.at(u * block.pack.places_per_wh_ah)
    place = half_v * block.supply_v.per_half_v - block.supply_v.offset
    start = window.offer.start(block.year[lanes], block.watts[lanes])
    light_h = _pick(block.light, lanes, block=block) * hours
    tables = {"harvest": window.offer, "panel": window.panel, "panel_wire": window.wire}
    return {name: t.at(s, start, place=place) * light_h for name, t in tables.items() if t is not None}


def coast(
    block: Block, window: Window, s: int, *, lanes: IntArray, u: FloatArray, hours: FloatArray
) -> tuple[FloatArray, dict[str, FloatArray]]:
    """Some lanes through ``hours`` of step ``s`` with the loads cut; returns stored energy and energies [Wh/Ah].

    All harvest charges; own use, self-discharge and the draw of the cut robot go on as long as there is energy.
    """
    pack, cold, year = block.pack, window.cold_pack, block.year[lanes]
    place = u * pack.places_per_wh_ah
    v, r = pack.rest_v.at(place), 0.25 * cold.r4[s][year]
    flows = harvest_flows(block, window, s, lanes=lanes, u=u, hours=np.ones(lanes.size))
    draw = _pick(block.coast_draw, lanes, block=block)
    wish = flows["harvest"] - draw
    power = np.maximum(wish, -(v**2) / (4.0 * r))
    amps = 2.0 * power / (v + np.sqrt(np.maximum(v**2 + 4.0 * r * power, 0.0)))
    efficiency = pack.efficiency.at(place)
    fill = filling_per_h(cold.tail_h[s][year], np.maximum(hours, 1e-9))
    by_v = np.maximum((cold.top_v[s][year] - v) * cold.per_r[s][year], 0.0)
    most = np.minimum(np.minimum(cold.max_c[s][year], by_v), (block.full - u) * fill / (v * efficiency))
    charging = amps > 0.0
    amps = np.where(charging, np.minimum(amps, most), amps)
    efficiency = np.where(charging, efficiency, 1.0)
    fade = cold.fade[s][year] * u * hours
    move = v * amps * efficiency * hours
    empty = (u - fade + move < 0.0) & (move < 0.0)
    share = np.where(empty, (u - fade) / np.where(empty, -move, 1.0), 1.0)
    drawn = (draw - (power - wish)) * hours + (1.0 - share) * power * hours
    # Where nothing is drawn the sharing does not matter.
    own = block.own_use_w / max(block.own_use_w + pack.off_draw_w, np.finfo(float).tiny)
    energies = {name: power_w * hours for name, power_w in flows.items()} | {
        "spilled": np.where(charging, np.maximum(power - amps * (v + r * amps), 0.0), 0.0) * hours,
        "loss": (r * amps**2 + v * amps * (1.0 - efficiency)) * hours * share,
        "fade": fade,
        "own": drawn * own,
        "off_draw": drawn * (1.0 - own) if pack.off_draw_w > 0 else np.zeros(lanes.size),
        "heater": np.zeros(lanes.size),
    }
    return np.where(empty, 0.0, u - fade + move), energies
