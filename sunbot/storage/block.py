"""Lanes that step together: their state, what they write, and what is summed up on the way."""

from __future__ import annotations

from dataclasses import dataclass, field

import numpy as np

from ..types import FloatArray, IntArray
from .carriers import Designs
from .layout import Layout, Volts
from .pack import Pack, Table
from .window import Window


@dataclass(eq=False)
class Record:
    """Where the steps of a window write, one array of lanes per step; without ``rows`` the same few over and over.

    u : stored energy at the start of each step and after the last [Wh/Ah], after a boot is paid
    power : harvest less everything served, at the terminals [W/Ah]. amps : into the pack [A/Ah]
    served : by level [Wh/Ah]. out : share of the step in which the loads are cut
    cuts : per event what the plain sums over the rows would get wrong, (step, lanes, values by name)
    boots : steps at whose start some lanes paid for one
    """

    u: list[FloatArray]
    power: list[FloatArray]
    amps: list[FloatArray]
    served: list[list[FloatArray]]
    out: list[FloatArray]
    rows: bool
    cuts: list[tuple[int, IntArray, dict[str, FloatArray]]] = field(default_factory=list)
    boots: list[tuple[int, IntArray]] = field(default_factory=list)

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

    off : loads are cut; off_x the same as 0 or 1, n_off how many lanes. Names in _l are (n_lanes,), in memory order.
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
        self.own_share = own_use_w / max(own_use_w + pack.off_draw_w, np.finfo(float).tiny)
        self.full = pack.curve.full_wh_ah
        self.supply_v, self.demand_v = grids
        self.one_watts = int(designs.watts_at[0]) if np.ptp(designs.watts_at) == 0 else None
        self.half_v = Table(0.5 * pack.rest_v.base, 0.5 * pack.rest_v.slope)
        shape = layout.shape
        self.off, self.off_x, self.n_off = np.zeros(shape, dtype=bool), np.zeros(shape), 0
        self.k, self.node = np.empty(shape, dtype=np.intp), np.empty(shape, dtype=np.intp)
        self.place, self.v, self.a, self.b, self.c, self.draw, self.ess = (np.empty(shape) for _ in range(7))
        self.supply_at, self.demand_at = np.empty(shape), np.empty(shape)
        self.kept, self.loss_x, self.drawn = np.empty(shape), np.empty(shape), np.empty(shape)
        self.mask, self.mask2 = np.empty(shape, dtype=bool), np.empty(shape, dtype=bool)
        self.year, self.design = layout.year_of, layout.design_of
        self.watts = designs.watts_at[self.design]
        self.ah_l = ah[self.design]
        self.light_l = designs.light_x[self.design] / self.ah_l
        self.coast_draw_l = (own_use_w + pack.off_draw_w) / self.ah_l
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
        self.may_fail, self.may_choke = self._may_fail(window), self._may_choke(window)

    def _may_fail(self, window: Window) -> bool:
        """Whether some lane could ask for more than the pack can give."""
        most = window.essential.total.top * self.essential.max()
        most += self.fixed.max() + self.heater.max() + self.coast_draw.max()
        if self.work_x.size:
            most += window.work.total.top * self.work_x.max() * len(self.work_x)
        half_low = 0.5 * float(self.pack.curve.rest_v[0])
        # A tenth aside for voltages read a rounding beyond their nodes.
        return bool(most * 0.25 * window.cold_pack.r4.max() > 0.9 * half_low**2)

    def _may_choke(self, window: Window) -> bool:
        """Whether a step is so short that all the energy of some lane could not leave its pack within it."""
        real_h = window.hours_y[window.hours_y > 0]
        low_v = float(self.pack.curve.rest_v[0])
        return bool(real_h.size and real_h.min() * 2.0 * low_v**2 / window.cold_pack.r4.max() < self.full)
