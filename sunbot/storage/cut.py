"""The lanes in which a step does not run to its end as it began: loads cut within it, and packs run empty."""

from __future__ import annotations

from typing import NamedTuple

import numpy as np

from ..types import BoolArray, FloatArray, IntArray
from .block import Block, Record, Tallies
from .pack import filling_per_h
from .window import Window

TINY = float(np.finfo(float).tiny)


def run_empty(block: Block, window: Window, s: int, *, lanes: IntArray, record: Record) -> None:
    """Lanes already cut that would run below empty: what cannot be drawn is not drawn."""
    if not lanes.size:
        return
    u, hours = record.u[s].ravel()[lanes], window.hours_y[s][block.year[lanes]]
    coast = coast_through(block, window, s, lanes=lanes, u=u, hours=hours)
    record.u[s + 1].reshape(-1)[lanes] = coast.end
    if record.rows:
        record.cuts.append((s, lanes, _coast_flows(block, window, s, lanes=lanes, coast=coast)))


def cut(
    block: Block,
    window: Window,
    s: int,
    *,
    lanes: IntArray,
    failed: BoolArray | None,
    record: Record,
    tallies: Tallies,
) -> None:
    """Serve the share of the step above cut-off, cut the loads, coast through the rest."""
    stay = record.power[s].ravel()[lanes] < 0.0
    if failed is not None:
        stay |= failed.ravel()[lanes]
    lanes = lanes[stay]
    if not lanes.size:
        return
    year, u_next = block.year[lanes], record.u[s + 1].reshape(-1)
    u, hours = record.u[s].ravel()[lanes], window.hours_y[s][year]
    cutoff = (window.warm_pack or window.cold_pack).cutoff[s][year]
    share = np.minimum(np.maximum(u - cutoff, 0.0) / np.maximum(u - u_next[lanes], TINY), 1.0)
    if failed is not None:
        gives_up = failed.ravel()[lanes]
        share[gives_up] = 0.0
        tallies.failed.reshape(-1)[lanes[gives_up]] = True
    middle = np.where(share > 0.0, np.minimum(u, cutoff), u)
    on_h = share * hours
    coast = coast_through(block, window, s, lanes=lanes, u=middle, hours=hours - on_h)
    u_next[lanes] = coast.end
    if record.rows:
        _record_cut(block, window, s, lanes=lanes, share=share, coast=coast, record=record)
    else:
        _tally_cut(block, window, s, lanes=lanes, share=share, record=record, tallies=tallies)
    block.off.reshape(-1)[lanes] = True
    block.off_x.reshape(-1)[lanes] = 1.0
    block.n_off += lanes.size
    if tallies.outages is not None:
        at_h = window.elapsed_y[s][year] + on_h
        tallies.outages.begin(tallies.piece, lanes, at_h=at_h, step=window.first + s)


def _tally_cut(
    block: Block, window: Window, s: int, *, lanes: IntArray, share: FloatArray, record: Record, tallies: Tallies
) -> None:
    """Time, essential energy and work lost to a cut within the step."""
    rest_h = (1.0 - share) * window.hours_y[s][block.year[lanes]]
    tallies.out_h.reshape(-1)[lanes] += rest_h
    table = window.essential.total
    essential = table.base[s][block.year[lanes]] if table.slope is None else block.ess.ravel()[lanes]
    tallies.out_essential_wh.reshape(-1)[lanes] += rest_h * essential
    for level in window.due[s]:
        lost = (1.0 - share) * record.served[level][s].ravel()[lanes]
        tallies.served_wh_ah[level].reshape(-1)[lanes] -= lost


def _record_cut(
    block: Block, window: Window, s: int, *, lanes: IntArray, share: FloatArray, coast: Coast, record: Record
) -> None:
    """Write what rows hold of a step with a cut in it."""
    flows = _coast_flows(block, window, s, lanes=lanes, coast=coast)
    for name, energy in _served_flows(block, window, s, lanes=lanes, share=share, record=record).items():
        flows[name] = flows[name] + energy
    record.cuts.append((s, lanes, flows | {"low": coast.u}))
    record.out[s].reshape(-1)[lanes] = 1.0 - share
    for level in window.due[s]:
        record.served[level][s].reshape(-1)[lanes] *= share


def _served_flows(
    block: Block, window: Window, s: int, *, lanes: IntArray, share: FloatArray, record: Record
) -> dict[str, FloatArray]:
    """Energies of the part of the step before the cut [Wh/Ah]; the lane discharges, so nothing is spilled."""
    year, pack = block.year[lanes], window.warm_pack or window.cold_pack
    on_h = share * window.hours_y[s][year]
    u, amps = record.u[s].ravel()[lanes], record.amps[s].ravel()[lanes]
    flows = _harvest_w(block, window, s, lanes=lanes, half_v=block.v.ravel()[lanes])
    heated = 0.0 if window.heated_y is None else window.heated_y[s][year]
    return {name: power_w * on_h for name, power_w in flows.items()} | {
        "loss": 0.25 * pack.r4[s][year] * amps**2 * on_h,
        "fade": pack.fade[s][year] * u * on_h,
        "own": block.own_use_w / block.ah_l[lanes] * on_h,
        "heater": heated * block.pack.heater_w / block.ah_l[lanes] * on_h,
    }


def _harvest_w(block: Block, window: Window, s: int, *, lanes: IntArray, half_v: FloatArray) -> dict[str, FloatArray]:
    """What panel, panel wire and controller give at half a rest voltage [W/Ah]."""
    place = half_v * block.supply_v.per_half_v - block.supply_v.offset
    start = window.offer.start(block.year[lanes], block.watts[lanes])
    tables = {"harvest": window.offer, "panel": window.panel, "panel_wire": window.wire}
    return {name: t.at(s, start, place=place) * block.light_l[lanes] for name, t in tables.items() if t is not None}


class Coast(NamedTuple):
    """Lanes with their loads cut, for a part of a step; each (n_lanes,), per Ah.

    u, end : stored energy before and after [Wh/Ah]. hours : how long. wish, power : harvest less draws, and what of it
    the pack can give [W/Ah]. amps, v, efficiency : charge current, rest voltage, share of the current stored.
    share : how much of the discharge the pack still had.
    """

    u: FloatArray
    end: FloatArray
    hours: FloatArray
    wish: FloatArray
    power: FloatArray
    amps: FloatArray
    v: FloatArray
    efficiency: FloatArray | float
    share: FloatArray | None


def coast_through(block: Block, window: Window, s: int, *, lanes: IntArray, u: FloatArray, hours: FloatArray) -> Coast:
    """Some lanes through ``hours`` of step ``s`` with the loads cut.

    All harvest charges; own use, self-discharge and the draw of the cut robot go on as long as there is energy.
    """
    cold, year = window.cold_pack, block.year[lanes]
    place = u * block.pack.places_per_wh_ah
    half_v = block.half_v.at(place)
    v, r4 = 2.0 * half_v, cold.r4[s][year]
    wish = -block.coast_draw_l[lanes]
    if window.bright[s]:
        start = window.offer.start(year, block.watts[lanes])
        volts_at = half_v * block.supply_v.per_half_v - block.supply_v.offset
        wish = wish + window.offer.at(s, start, place=volts_at) * block.light_l[lanes]
    power, v2 = wish, v * v
    if block.may_fail:
        power = np.maximum(wish, -v2 / r4)
    amps = 2.0 * power / (v + np.sqrt(np.maximum(v2 + r4 * power, 0.0)))
    efficiency: FloatArray | float = 1.0
    if window.bright[s]:
        amps, efficiency = _accepted(block, window, s, year=year, u=u, hours=hours, amps=amps, v=v)
    kept = u * (1.0 - cold.fade[s][year] * hours)
    move = v * amps * efficiency * hours
    end, share = kept + move, None
    if end.min() < 0.0:
        share = np.where(end < 0.0, kept / np.maximum(-move, TINY), 1.0)
        end = np.maximum(end, 0.0)
    return Coast(u, end, hours, wish, power, amps, v, efficiency, share)


def _accepted(
    block: Block,
    window: Window,
    s: int,
    *,
    year: IntArray,
    u: FloatArray,
    hours: FloatArray,
    amps: FloatArray,
    v: FloatArray,
) -> tuple[FloatArray, FloatArray]:
    """Current held to what the pack takes, and the share of it that is stored (1 where it is drawn)."""
    cold = window.cold_pack
    charging = amps > 0.0
    efficiency = np.where(charging, block.pack.efficiency.at(u * block.pack.places_per_wh_ah), 1.0)
    fill = filling_per_h(cold.tail_h[s][year], np.maximum(hours, 1e-9))
    by_v = np.maximum((cold.top_v[s][year] - v) * cold.per_r[s][year], 0.0)
    most = np.minimum(np.minimum(cold.max_c[s][year], by_v), (block.full - u) * fill / (v * efficiency))
    return np.where(charging, np.minimum(amps, most), amps), efficiency


def _coast_flows(block: Block, window: Window, s: int, *, lanes: IntArray, coast: Coast) -> dict[str, FloatArray]:
    """Where the energy of coasting lanes went [Wh/Ah]."""
    cold, year, hours, amps, v = window.cold_pack, block.year[lanes], coast.hours, coast.amps, coast.v
    share = np.ones(lanes.size) if coast.share is None else coast.share
    r, charging = 0.25 * cold.r4[s][year], coast.power > 0.0
    undrawn = (coast.power - coast.wish) - (1.0 - share) * coast.power
    drawn = (block.coast_draw_l[lanes] - undrawn) * hours
    flows = _harvest_w(block, window, s, lanes=lanes, half_v=0.5 * v)
    spilled = np.where(charging, np.maximum(coast.power - amps * (v + r * amps), 0.0), 0.0)
    return {name: power_w * hours for name, power_w in flows.items()} | {
        "spilled": spilled * hours,
        "loss": (r * amps**2 + v * amps * (1.0 - coast.efficiency)) * hours * share,
        "fade": cold.fade[s][year] * coast.u * hours,
        "own": drawn * block.own_share,
        "off_draw": drawn * (1.0 - block.own_share),
        "heater": np.zeros(lanes.size),
    }
