"""The balance of all energy years and designs: lanes side by side, gone round until their starts no longer change."""

from __future__ import annotations

import itertools
from collections.abc import Iterator
from concurrent.futures import ThreadPoolExecutor
from dataclasses import dataclass, replace
from functools import partial
from typing import Literal

import numpy as np

from ..calendar import Lanes
from ..demand.carriers import Demand
from ..harvest.carriers import Supply
from ..types import BoolArray, FloatArray, IntArray
from .accounts import Rows, Sums, add_demand, add_flows, trace_rows
from .block import Block, Outages, Record, Tallies
from .box import box_temp_c
from .carriers import Balance, Designs
from .layout import Layout, Volts
from .outcome import Sheet, balance_of
from .pack import Pack
from .step import step
from .window import Source, Window, window

Keep = Literal["verdict", "months", "trace"]

MOST_ROUNDS = 20
PREROLL_H = 30 * 24.0
"""How long before a lane's start its start state is guessed from, with a full battery."""

TRACED = 0
"""The design a trace is kept of."""

LANES_PER_BLOCK = 32768
"""Narrower blocks do not gain from a second thread: the interpreter lock is then held most of the time (measured)."""

ROWS_PER_WINDOW = 65536
"""Lane-steps recorded before they are summed up, so that the rows stay in the cache."""

TABLE_PER_WINDOW = 4_000_000
"""Numbers gathered at once from the supply."""


def balance(
    supply: Supply,
    demand: Demand,
    pack: Pack,
    lanes: Lanes,
    designs: Designs,
    *,
    air_temp_c: FloatArray,
    row: IntArray,
    keep: Keep = "months",
) -> Balance:
    """Charge, outages and work of every design in every energy year, until the ring repeats itself.

    Parameters
    ----------
    supply, demand : carriers of the stages before
        Their battery_v must span the pack's rest voltages where they have more than one node.
    pack : Pack
        Of the age to be judged; capacities come from the designs.
    lanes : Lanes
        Energy years side by side.
    designs : Designs
        What is varied.
    air_temp_c : (n_times,)
        Air around the battery's box [°C], by weather step.
    row : (n_times,)
        Row of the demand that belongs to each weather step.
    keep : str
        "verdict" keeps what decides survival; "months" all monthly figures and the ledger; "trace" also every step
        of the first design.

    Raises
    ------
    ValueError
        Voltages that miss the pack's; NaN or infinity in harvest, demand or temperature.
    """
    series = {"offer_w": supply.offer_w, "essential": demand.essential.total_w, "work": demand.work.total_w}
    for name, values in (series | {"air_temp_c": air_temp_c}).items():
        if not np.isfinite(values).all():
            raise ValueError(f"{name} holds NaN or infinity")
    supply, designs = only_used(supply, designs)
    box_c = box_temp_c(air_temp_c, step_h=float(lanes.step_h.max()), lag_h=pack.box_lag_h, rise_c=pack.box_rise_c)
    elapsed_h = np.cumsum(lanes.step_h, axis=0) - lanes.step_h
    source = Source(supply, demand, pack, lanes, box_c, np.asarray(row), elapsed_h)
    ring = Ring(source, designs, keep=keep)
    ring.settle()
    return balance_of(source, designs, ring.sheet, visits=ring.visits, settled=ring.settled)


def month_pieces(month: IntArray) -> list[slice]:
    """Runs of steps in one calendar month."""
    edges = np.flatnonzero(np.diff(month)) + 1
    bounds = [0, *edges.tolist(), month.size]
    return [slice(a, b) for a, b in itertools.pairwise(bounds)]


def only_used(supply: Supply, designs: Designs) -> tuple[Supply, Designs]:
    """The wattages some design uses, so that the rest is not gathered step by step."""
    used, watts_at = np.unique(designs.watts_at, return_inverse=True)
    if used.size == supply.watts.size:
        return supply, designs
    panel_w, wire_w = (None if w is None else w[:, used] for w in (supply.panel_w, supply.wire_w))
    few = replace(supply, watts=supply.watts[used], offer_w=supply.offer_w[:, used], panel_w=panel_w, wire_w=wire_w)
    return few, replace(designs, watts_at=watts_at)


def subset(designs: Designs, at: IntArray) -> Designs:
    """Some of the designs."""
    return Designs(
        designs.watts_at[at],
        designs.battery_ah[at],
        designs.light_x[at],
        designs.essential_x[at],
        designs.work_x[..., at],
        designs.extra_w[at],
    )


@dataclass(eq=False)
class Crew:
    """A block at work: which years and designs it holds, and its stored energy."""

    block: Block
    years: IntArray
    designs: IntArray
    u: FloatArray
    outages: Outages | None
    resting: bool = False


class Ring:
    """Rounds over all lanes; each begins where the year before it ended."""

    def __init__(self, source: Source, designs: Designs, *, keep: Keep) -> None:
        self.source, self.designs, self.rows, self.trace = source, designs, keep != "verdict", keep == "trace"
        pack = source.pack
        low, high = float(pack.curve.rest_v[0]), float(pack.curve.rest_v[-1])
        self.grids = (
            Volts.of(source.supply.battery_v, low_v=low, high_v=high),
            Volts.of(source.demand.battery_v, low_v=low, high_v=high),
        )
        self.pieces = month_pieces(source.lanes.month)
        self.n_years, self.n_designs = source.lanes.before.size, designs.watts_at.size
        self.n_levels = source.demand.skip_below_soc.size
        self.fresh = float(pack.curve.energy_at(pack.start_soc))
        lanes = (self.n_years, self.n_designs)
        self.start, self.visits = np.full(lanes, self.fresh), np.zeros(lanes)
        self.settled = np.ones(self.n_designs, dtype=bool)
        self.sheet = Sheet(len(self.pieces), lanes, n_steps=source.lanes.month.size)
        self.piece_u = np.full((len(self.pieces) + 1, *lanes), np.nan)
        self.piece_off = np.zeros((len(self.pieces) + 1, *lanes), dtype=bool)

    def settle(self) -> None:
        """Go round until no lane's start changes, at most `MOST_ROUNDS` times."""
        before = self.source.lanes.before
        years, designs = np.arange(self.n_years), np.arange(self.n_designs)
        ringed = before >= 0
        if ringed.any():
            self._guess()
        for rounds in range(MOST_ROUNDS):
            if rounds == MOST_ROUNDS - 1:
                last, copied = self.sheet.copy_of(designs), designs
            self.round(years, designs)
            changed = self._hand_on(ringed)
            if not changed.any():
                return
            years, designs = np.flatnonzero(changed.any(axis=1)), np.flatnonzero(changed.any(axis=0))
        self.settled[designs] = False
        self.sheet.keep_worse(last, only=designs, of=copied)

    def _hand_on(self, ringed: BoolArray) -> BoolArray:
        """Give each lane the end of the year before it; returns where that changed its start."""
        before = np.maximum(self.source.lanes.before, 0)
        died = self.piece_off[-1][before] & ringed[:, None]
        start = np.where(ringed[:, None] & ~died, self.piece_u[-1][before], self.fresh)
        changed: BoolArray = start != self.start
        self.start, self.visits = start, died.astype(float)
        return changed

    def _guess(self) -> None:
        """Start states from the last weeks of the year before, begun with a full battery."""
        lanes = self.source.lanes
        steps = round(PREROLL_H / float(lanes.step_h.max()))
        begin = max(lanes.month.size - steps, 0)
        tail = [slice(max(p.start, begin), p.stop) for p in self.pieces if p.stop > begin]
        crews = self._crews(np.arange(self.n_years), np.arange(self.n_designs), rows=False)
        for crew in crews:
            crew.u[...] = self.source.pack.curve.full_wh_ah
        for piece in tail:
            self._run_piece(crews, piece, index=None)
        for crew in crews:
            at = np.ix_(crew.years, crew.designs)
            self.piece_u[-1][at] = crew.block.layout.turned(crew.u)
            self.piece_off[-1][at] = crew.block.layout.turned(crew.block.off)
        self._hand_on(lanes.before >= 0)

    def _crews(self, years: IntArray, designs: IntArray, *, rows: bool) -> list[Crew]:
        """Blocks over the given lanes, alike designs together."""
        order = designs[np.argsort(self.designs.watts_at[designs], kind="stable")]
        n_blocks = -(-years.size * order.size // LANES_PER_BLOCK)
        n_blocks = max(1, n_blocks + (n_blocks % 2 if n_blocks > 1 else 0))  # an even share for each thread
        crews = []
        for part in np.array_split(order, min(n_blocks, order.size)):
            layout = Layout(years.size, part.size, years_last=-(-order.size // n_blocks) < years.size)
            own_use_w = self.source.supply.own_use_w
            block = Block(self.source.pack, subset(self.designs, part), layout, grids=self.grids, own_use_w=own_use_w)
            u = np.array(layout.turned(self.start[np.ix_(years, part)]))
            outages = Outages(len(self.pieces), layout.shape) if rows else None
            crews.append(Crew(block, years, part, u, outages))
        return crews

    def round(self, years: IntArray, designs: IntArray) -> None:
        """All steps of some lanes from their start; lanes back on their old path leave the rest as it is."""
        crews = self._crews(years, designs, rows=self.rows)
        for index, piece in enumerate(self.pieces):
            for crew in crews:
                self._compare(crew, index)
            self._run_piece([crew for crew in crews if not crew.resting], piece, index=index)
        for crew in crews:
            self._write_ends(crew)
            if crew.outages is not None:
                self._end_outages(crew)

    def _compare(self, crew: Crew, index: int) -> None:
        """Let a block rest whose lanes all stand where the round before had them, with the loads on."""
        if crew.resting:
            return
        at = np.ix_(crew.years, crew.designs)
        same = (self.piece_u[index][at] == crew.block.layout.turned(crew.u)).all()
        crew.resting = bool(same and not crew.block.n_off and not self.piece_off[index][at].any())
        if not crew.resting:
            self._note(crew, index)

    def _note(self, crew: Crew, index: int) -> None:
        at = np.ix_(crew.years, crew.designs)
        self.piece_u[index][at] = crew.block.layout.turned(crew.u)
        self.piece_off[index][at] = crew.block.layout.turned(crew.block.off)

    def _write_ends(self, crew: Crew) -> None:
        """Stored energy at both ends of the lanes."""
        at, last = np.ix_(crew.years, crew.designs), len(self.pieces)
        if not crew.resting:
            self._note(crew, last)
        self.sheet.write(0, {"start_u": self.start[at]}, years=crew.years, designs=crew.designs)
        self.sheet.write(0, {"end_u": self.piece_u[last][at]}, years=crew.years, designs=crew.designs)

    def _end_outages(self, crew: Crew) -> None:
        """Close what is still cut at the end of the year, and write the outages down."""
        outages, layout = crew.outages, crew.block.layout
        if outages is None:
            return
        if not crew.resting:
            off = np.flatnonzero(crew.block.off)
            hours = self.source.lanes.step_h[:, crew.years].sum(axis=0)
            outages.end(off, at_h=hours[crew.block.year[off]])
        ran = range(len(self.pieces)) if not crew.resting else range(crew.block.pieces_run)
        for index in ran:
            values = {"outages": outages.count, "longest_h": outages.longest_h, "first": outages.first}
            piece = {name: layout.turned(array[index]) for name, array in values.items()}
            self.sheet.write(index, piece, years=crew.years, designs=crew.designs)

    def _windows(self, crews: list[Crew], piece: slice) -> Iterator[Window]:
        """A month piece in windows short enough for the cache."""
        block = crews[0].block
        supply = self.source.supply.offer_w
        most = TABLE_PER_WINDOW // (block.layout.n_years * supply.shape[1] * supply.shape[2])
        if self.rows and crews[0].outages is not None:
            most = min(most, ROWS_PER_WINDOW // block.off.size)
        most = max(most, 1)
        for begin in range(piece.start, piece.stop, most):
            steps = slice(begin, min(begin + most, piece.stop))
            yield window(self.source, steps, crews[0].years, layout=block.layout, accounts=self.rows)

    def _run_piece(self, crews: list[Crew], piece: slice, *, index: int | None) -> None:
        """One month piece of some blocks; index None records nothing."""
        if not crews:
            return
        tallies = [
            Tallies(c.block.layout.shape, n_levels=self.n_levels, piece=index or 0, outages=c.outages) for c in crews
        ]
        sums: list[Sums] = [{} for _ in crews]
        for view in self._windows(crews, piece):
            walk = partial(self._run_window, view)
            if len(crews) == 1:
                walk(crews[0], tallies[0], sums[0])
            else:
                with ThreadPoolExecutor(2) as pool:
                    list(pool.map(walk, crews, tallies, sums))
        if index is not None:
            for crew, tally, flows in zip(crews, tallies, sums, strict=True):
                crew.block.pieces_run = index + 1
                self.sheet.take(index, crew.block, tally, flows, years=crew.years, designs=crew.designs)

    def _run_window(self, view: Window, crew: Crew, tallies: Tallies, sums: Sums) -> None:
        """Step one block through a window and sum up what it recorded."""
        block, rows = crew.block, crew.outages is not None
        record = Record.of(view.n, block.layout.shape, n_levels=self.n_levels, rows=rows)
        block.enter(view)
        record.u[0][...] = crew.u
        for s in range(view.n):
            step(block, view, s, record=record, tallies=tallies)
        crew.u[...] = record.u[view.n]
        if rows:
            recorded = Rows(block, view, record)
            flows = add_flows(sums, recorded)
            add_demand(sums, recorded, tallies)
            lanes = np.flatnonzero(crew.designs[block.design] == TRACED)
            if self.trace and lanes.size:
                steps = slice(view.first, view.first + view.n)
                self.sheet.add_trace(trace_rows(recorded, flows, lanes=lanes), steps, years=crew.years)
