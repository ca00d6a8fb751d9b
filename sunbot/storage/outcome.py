"""The sheet on which rounds write, and the `Balance` made from it."""

from __future__ import annotations

import itertools

import numpy as np

from ..types import BoolArray, FloatArray, IntArray
from .accounts import Sums
from .block import Block, Tallies
from .carriers import Balance, Designs, Ledger, Trace
from .window import Source

ROUNDING = 1e-12
"""Share of the work asked that may be left over from adding up alone."""


class Sheet:
    """Sums by month piece, (n_pieces, [n_levels,] n_years, n_designs) by name; the trace by step."""

    def __init__(self, n_pieces: int, lanes: tuple[int, int], *, n_steps: int) -> None:
        self.n_pieces, self.lanes, self.n_steps = n_pieces, lanes, n_steps
        self.sums: dict[str, FloatArray] = {}
        self.trace: dict[str, FloatArray] = {}

    def write(self, piece: int, values: dict[str, FloatArray], *, years: IntArray, designs: IntArray) -> None:
        """Write values ([n_levels,] n_years, n_designs) of some lanes over what stood there."""
        at = np.ix_(years, designs)
        for name, array in values.items():
            if name not in self.sums:
                self.sums[name] = np.zeros((self.n_pieces, *array.shape[:-2], *self.lanes))
            self.sums[name][piece][(..., *at)] = array

    def take(
        self, piece: int, block: Block, tallies: Tallies, sums: Sums, *, years: IntArray, designs: IntArray
    ) -> None:
        """Write what a block summed up in a month piece; lanes come in the block's memory order."""
        turned, shape = block.layout.turned, block.layout.shape
        values = {
            "out_h": tallies.out_h,
            "out_essential_wh": tallies.out_essential_wh,
            "served_wh_ah": tallies.served_wh_ah,
            "asked_raw_wh": tallies.asked_wh,
            "failed": tallies.failed.astype(float),
            "boots": tallies.boots,
        }
        values |= {name: array.reshape(shape) for name, array in sums.items()}
        # A part nothing was written for in this piece must not keep the round before's.
        values |= {name: np.zeros(shape) for name in self.sums if name not in values and name not in _WRITTEN_LAST}
        self.write(piece, {n: turned(v) for n, v in values.items()}, years=years, designs=designs)

    def add_trace(self, values: dict[str, FloatArray], steps: slice, *, years: IntArray) -> None:
        """Write (n_steps, n_years) values of the one design."""
        for name, array in values.items():
            if name not in self.trace:
                self.trace[name] = np.zeros((self.n_steps, self.lanes[0]))
            self.trace[name][steps, years] = array

    def copy_of(self, designs: IntArray) -> dict[str, FloatArray]:
        """What stands on the sheet for some designs."""
        return {name: array[..., designs].copy() for name, array in self.sums.items()}

    def keep_worse(self, last: dict[str, FloatArray], *, only: IntArray, of: IntArray) -> None:
        """Put the earlier round back for designs where it was out longer (designs ``of`` were copied)."""
        at = np.searchsorted(of, only)
        before, now = last["out_h"][..., at].sum(axis=(0, 1)), self.sums["out_h"][..., only].sum(axis=(0, 1))
        served = [s["served_wh_ah"].sum(axis=(0, 1, 2)) for s in (last, self.sums)]
        worse = (before > now) | ((before == now) & (served[0][at] < served[1][only]))
        for name, array in self.sums.items():
            array[..., only[worse]] = last[name][..., at[worse]]


_WRITTEN_LAST = ("outages", "longest_h", "first", "start_u", "end_u")


def balance_of(source: Source, designs: Designs, sheet: Sheet, *, visits: FloatArray, settled: BoolArray) -> Balance:
    """Monthly arrays, ledger and trace from the sheet's sums."""
    return _Assembly(source, designs, sheet).balance(visits, settled)


class _Assembly:
    """The sheet's sums in Wh by calendar month."""

    def __init__(self, source: Source, designs: Designs, sheet: Sheet) -> None:
        self.source, self.designs, self.sheet = source, designs, sheet
        month = source.lanes.month
        self.firsts = np.concatenate(([0], np.flatnonzero(np.diff(month)) + 1))
        self.month = month[self.firsts] - 1
        self.ah = designs.battery_ah * source.pack.capacity_share
        self.work_x = designs.work_x[self.month][:, :, None, :]

    def balance(self, visits: FloatArray, settled: BoolArray) -> Balance:
        sums, designs = self.sheet.sums, self.designs
        months = "lowest_u" in sums
        lost = sums.get("lost_total", np.zeros_like(sums["out_h"])) if months else sums["out_essential_wh"]
        unserved = lost * designs.essential_x + sums["out_h"] * designs.extra_w
        asked = self._asked_work()
        skipped = asked - sums["served_wh_ah"] * self.ah
        skipped[skipped < ROUNDING * asked] = 0.0
        verdict = Balance(
            unserved_wh=self._monthly(unserved),
            skipped_wh=self._monthly(skipped.sum(axis=1)),
            work_asked_wh=self._monthly(asked.sum(axis=1)),
            hours_out=self._monthly(sums["out_h"]),
            visits=visits,
            settled=settled,
            cannot_give=np.asarray((sums["failed"] > 0).any(axis=(0, 1))),
        )
        return self._with_months(verdict, asked) if months else verdict

    def _monthly(self, pieces: FloatArray) -> FloatArray:
        """Sum over the pieces of each calendar month: (12, ...)."""
        out = np.zeros((12, *pieces.shape[1:]))
        np.add.at(out, self.month, pieces)
        return out

    def _asked_work(self) -> FloatArray:
        """Skippable energy asked, (n_pieces, n_levels, n_years, n_designs)."""
        work = self.source.demand.work.total_w
        if work.shape[-1] > 1:
            return self.sheet.sums["asked_raw_wh"] * self.work_x
        raw = self._steps_wh(work[:, :, 0])
        return np.asarray(raw.transpose(0, 2, 1)[..., None] * self.work_x)

    def _steps_wh(self, power_w: FloatArray) -> FloatArray:
        """Power by demand row (n_rows, n_columns) summed over each piece: (n_pieces, n_years, n_columns)."""
        lanes, rows = self.source.lanes, self.source.row
        bounds = [*self.firsts.tolist(), lanes.month.size]
        pieces = [slice(a, b) for a, b in itertools.pairwise(bounds)]
        return np.array([np.einsum("syc,sy->yc", power_w[rows[lanes.row[p]]], lanes.step_h[p]) for p in pieces])

    def _with_months(self, verdict: Balance, asked: FloatArray) -> Balance:
        sums, designs = self.sheet.sums, self.designs
        hours = np.add.reduceat(self.source.lanes.step_h, self.firsts, axis=0)[..., None]
        essential = sums["essential_total"] * designs.essential_x + hours * designs.extra_w
        lowest = np.full((12, *self.sheet.lanes), np.inf)
        np.minimum.at(lowest, self.month, sums["lowest_u"])
        soc = self.source.pack.soc.at(np.where(np.isfinite(lowest), lowest, 0.0) * self.source.pack.places_per_wh_ah)
        first = np.full((12, *self.sheet.lanes), np.inf)
        np.minimum.at(first, self.month, np.where(sums["first"] >= 0, sums["first"], np.inf))
        return Balance(
            unserved_wh=verdict.unserved_wh,
            skipped_wh=verdict.skipped_wh,
            work_asked_wh=verdict.work_asked_wh,
            hours_out=verdict.hours_out,
            visits=verdict.visits,
            settled=verdict.settled,
            cannot_give=verdict.cannot_give,
            harvest_wh=self._monthly(sums["harvest"] * self.ah),
            spilled_wh=self._monthly(sums["spilled"] * self.ah),
            demand_wh=self._monthly(essential + asked.sum(axis=1)),
            lowest_soc=np.where(np.isfinite(lowest), soc, np.nan),
            outages=sums["outages"].sum(axis=0),
            longest_out_h=sums["longest_h"].max(axis=0),
            first_out=np.where(np.isfinite(first), first, -1).astype(np.int64),
            ledger=self._ledger() if "panel" in sums else None,
            trace=Trace(**self.sheet.trace) if self.sheet.trace else None,
        )

    def _ledger(self) -> Ledger:
        sums, designs, ah = self.sheet.sums, self.designs, self.ah
        zero = np.zeros(self.sheet.lanes)

        def wh(name: str) -> FloatArray:
            return np.asarray(sums[name].sum(axis=0) * ah) if name in sums else zero

        def part(name: str) -> FloatArray:
            essential = sums[f"essential_{name}"].sum(axis=0) if f"essential_{name}" in sums else zero
            lost = sums[f"lost_{name}"].sum(axis=0) if f"lost_{name}" in sums else zero
            return np.asarray((essential - lost) * designs.essential_x + wh(f"work_{name}"))

        hours_on = self.source.lanes.step_h.sum(axis=0)[:, None] - sums["out_h"].sum(axis=0)
        return Ledger(
            panel=wh("panel"),
            panel_wire=wh("panel_wire"),
            controller=wh("panel") - wh("panel_wire") - wh("harvest") + wh("own"),
            spilled=wh("spilled"),
            battery_loss=wh("loss"),
            self_discharge=wh("fade"),
            heater=wh("heater"),
            boots=sums["boots"].sum(axis=0) * self.source.pack.boot_wh,
            off_draw=wh("off_draw"),
            rails=part("rails"),
            rail_wire=part("wire"),
            idle=part("idle"),
            loads=part("loads") + hours_on * designs.extra_w,
            stored=(sums["end_u"][0] - sums["start_u"][0]) * ah,
        )
