"""Some steps of all energy years, gathered from weather and demand into the shape of lanes."""

from __future__ import annotations

from dataclasses import dataclass
from typing import NamedTuple

import numpy as np

from ..calendar import Lanes
from ..demand.carriers import Asked, Demand
from ..harvest.carriers import Supply
from ..types import BoolArray, FloatArray, IntArray
from .box import heated_box_c
from .layout import Layout, OverVolts
from .pack import Conditions, Pack, conditions, filling_per_h


class Coefs(NamedTuple):
    """The pack in one step, each broadcasting against lanes; halves because voltages are held halved.

    r : ohm Ah. keep : 1 less self-discharge. cutoff, restart, skip (one per level) : Wh/Ah. max_c : 1/h.
    two_per_r : 2 / r. half_top : half the charging voltage. half_fill : half the missing energy's highest rate [1/h].
    """

    r: FloatArray
    keep: FloatArray
    cutoff: FloatArray
    restart: FloatArray
    max_c: FloatArray
    two_per_r: FloatArray
    half_top: FloatArray
    half_fill: FloatArray
    skip: tuple[FloatArray, ...]


@dataclass(frozen=True, eq=False)
class Source:
    """What a round reads from: carriers, the box, and how weather steps map to rows of the demand."""

    supply: Supply
    demand: Demand
    pack: Pack
    lanes: Lanes
    box_c: FloatArray
    row: IntArray
    elapsed_h: FloatArray


@dataclass(frozen=True, eq=False)
class Parts:
    """Power asked by part, as `Asked`, read at the lanes' voltages."""

    total: OverVolts
    loads: OverVolts | None
    rails: OverVolts | None
    wire: OverVolts | None
    idle: OverVolts | None


@dataclass(frozen=True, eq=False)
class Window:
    """Steps of one month piece. Lists are by step; per-year arrays are (n, n_years); see `Coefs` for the pack.

    hours : float where all lanes step alike, else broadcasting. real : lanes that step at all, None = all.
    bright : some panel offers something. due : levels that ask for something.
    heated : share of the heater's watts drawn in each step, broadcasting; None where it rests, empty without a heater.
    """

    n: int
    month: int
    first: int
    layout: Layout
    hours: list[FloatArray | float]
    per_h: list[FloatArray | float]
    real: list[BoolArray | None]
    hours_y: FloatArray
    elapsed_y: FloatArray
    box_y: FloatArray
    warm_box_y: FloatArray
    cold: list[Coefs]
    warm: list[Coefs]
    heated: list[FloatArray | None]
    cold_pack: Conditions
    warm_pack: Conditions | None
    heated_y: FloatArray | None
    bright: list[bool]
    due: list[tuple[int, ...]]
    floor_at_top: bool
    offer: OverVolts
    panel: OverVolts | None
    wire: OverVolts | None
    essential: Parts
    work: Parts

    def offer_of(self, watts_at: int) -> list[FloatArray]:
        """Offer by step, broadcasting, of one wattage where it does not depend on voltage."""
        by_year = self.offer.base.reshape(self.n, self.layout.n_years, -1)[:, :, watts_at]
        return list(self.layout.over_years(by_year))

    def essential_of(self) -> list[FloatArray]:
        """Essential power by step, broadcasting, where it does not depend on voltage."""
        return list(self.layout.over_years(self.essential.total.base))

    def work_of(self, level: int) -> list[FloatArray]:
        """Power asked by one level, by step, broadcasting, where it does not depend on voltage."""
        by_year = self.work.total.base.reshape(self.n, self.layout.n_years, -1)[:, :, level]
        return list(self.layout.over_years(by_year))


def window(source: Source, steps: slice, years: IntArray, *, layout: Layout, accounts: bool) -> Window:
    """Gather ``steps`` of ``years``; with ``accounts`` also what only the ledger needs."""
    lanes, pack, supply, demand = source.lanes, source.pack, source.supply, source.demand
    at = lanes.row[steps][:, years]
    hours_y = lanes.step_h[steps][:, years]
    box_y = source.box_c[at]
    even = bool((hours_y == hours_y[:1, :1]).all())
    offer = supply.offer_w[at]
    rows = source.row[at]
    work_w = demand.work.total_w[rows]
    warm_y, heated_y = _heated(pack, box_y)
    cold_pack = conditions(pack, box_y, skip_below_soc=demand.skip_below_soc)
    warm_pack = None if warm_y is None else conditions(pack, warm_y, skip_below_soc=demand.skip_below_soc)
    over = layout.over_years
    whole_rows = np.asarray((hours_y > 0).all(axis=1)).tolist()
    return Window(
        n=at.shape[0],
        month=int(lanes.month[steps.start]),
        first=int(steps.start),
        layout=layout,
        hours=[float(hours_y[0, 0])] * at.shape[0] if even else list(over(hours_y)),
        per_h=[1.0 / float(hours_y[0, 0])] * at.shape[0] if even else list(over(_per(hours_y))),
        real=[None if whole else over(row > 0) for row, whole in zip(hours_y, whole_rows, strict=True)],
        hours_y=hours_y,
        elapsed_y=source.elapsed_h[steps][:, years],
        box_y=box_y,
        warm_box_y=box_y if warm_y is None else warm_y,
        cold=_coefs(cold_pack, hours_y, pack=pack, layout=layout),
        warm=[] if warm_pack is None else _coefs(warm_pack, hours_y, pack=pack, layout=layout),
        heated=[] if heated_y is None else [over(row) if row.any() else None for row in heated_y],
        cold_pack=cold_pack,
        warm_pack=warm_pack,
        heated_y=heated_y,
        bright=(offer.reshape(at.shape[0], -1).max(axis=1) > 0).tolist(),
        due=_due(work_w),
        floor_at_top=bool((cold_pack.top_v < pack.curve.rest_v[-1]).any()),
        offer=OverVolts.through(offer),
        panel=OverVolts.through(supply.panel_w[at]) if accounts and supply.panel_w is not None else None,
        wire=OverVolts.through(supply.wire_w[at]) if accounts and supply.wire_w is not None else None,
        essential=_parts(demand.essential, rows, accounts=accounts),
        work=_parts(demand.work, rows, accounts=accounts),
    )


def _per(hours: FloatArray) -> FloatArray:
    """1 / hours, 0 for padding."""
    return np.divide(1.0, hours, out=np.zeros_like(hours), where=hours > 0)


def _heated(pack: Pack, box_c: FloatArray) -> tuple[FloatArray | None, FloatArray | None]:
    """Box temperature with loads and heater on, and the share of the heater's watts; None where it never draws."""
    if pack.heater_w <= 0:
        return None, None
    warm_c, share = heated_box_c(pack, box_c)
    return (warm_c, share) if share.any() else (None, None)


def _due(work_w: FloatArray) -> list[tuple[int, ...]]:
    """Levels that ask for something, by step; work_w is (n, n_years, n_levels, n_volts)."""
    asks: BoolArray = np.asarray((work_w > 0).any(axis=(1, 3)))
    return [tuple(np.flatnonzero(row).tolist()) for row in asks]


def _parts(asked: Asked, rows: IntArray, *, accounts: bool) -> Parts:
    """Tables of what is asked; essential loads count as one column. All-zero parts are left out."""

    def table(power_w: FloatArray) -> OverVolts:
        at_rows = power_w[rows]
        return OverVolts.through(at_rows[:, :, None, :] if at_rows.ndim == 3 else at_rows)

    parts = (asked.loads_w, asked.rails_w, asked.wire_w, asked.idle_w)
    return Parts(table(asked.total_w), *(table(part) if accounts and part.any() else None for part in parts))


def _coefs(of: Conditions, hours_y: FloatArray, *, pack: Pack, layout: Layout) -> list[Coefs]:
    """The pack's conditions step by step, broadcasting against lanes."""
    # Padding steps of 0 h would divide 0 by 0; any length will do there.
    fill = filling_per_h(of.tail_h, np.where(hours_y > 0, hours_y, 1.0))
    if pack.even_efficiency is not None:
        fill = fill / pack.even_efficiency
    over = layout.over_years
    columns = [
        over(values)
        for values in (
            0.25 * of.r4,
            1.0 - of.fade * hours_y,
            of.cutoff,
            of.restart,
            of.max_c,
            2.0 * of.per_r,
            0.5 * of.top_v,
            0.5 * fill,
        )
    ]
    skips: list[tuple[FloatArray, ...]] = [()] * hours_y.shape[0]
    if of.skip.shape[0]:
        skips = list(zip(*(over(level) for level in of.skip), strict=True))
    return [Coefs(*row) for row in zip(*columns, skips, strict=True)]
