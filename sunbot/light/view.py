"""What a panel takes of each part of the sky's light: factors by sun position and heading."""

from __future__ import annotations

from collections.abc import Iterator, Sequence
from dataclasses import dataclass, field, replace
from typing import NamedTuple

import numpy as np

from ..inputs.robot import Panel
from ..inputs.site import Site
from ..types import FloatArray, IntArray
from .carriers import Sun
from .glass import beam_pass, diffuse_pass
from .horizon import AZIMUTHS_DEG, beam_lost, horizon_at, obstruction_at, sky_shares
from .plane import SkyParts, angles_of, cos_incidence, direction, normal, on_slope

_ROWS_AT_ONCE = 4096
_TABLE_NOSES_DEG = np.arange(0.0, 361.0, 5.0)


@dataclass(frozen=True, eq=False)
class Factors:
    """What one watt of each part of SkyParts brings; each (n_rows or 1, n_headings or 1) over the reference rows.

    lamp : light that does not come from the sky [W/m²], in the same shape.
    """

    direct: FloatArray
    isotropic: FloatArray
    brightening: FloatArray
    ground: FloatArray
    lamp: FloatArray = field(default_factory=lambda: np.zeros((1, 1)))


@dataclass(frozen=True, eq=False)
class View:
    """A panel's view of the sky, by stage: all of it open; left by horizon, obstructions and window; past its glass.

    Dirt and snow come after. A new way to see the sky (through a window) is a new function that returns a View.
    """

    open: Factors
    plane: Factors
    glass: Factors


class Run(NamedTuple):
    """Steps in a row whose reference rows are in a row too; ``turn`` counts how often the reference has begun anew."""

    times: slice
    rows: slice
    turn: int


def runs_of(row: IntArray) -> list[Run]:
    """Cut the steps into runs, short enough to work on within the processor's cache."""
    breaks = np.flatnonzero(np.diff(row) != 1) + 1
    turns = np.concatenate([[0], np.cumsum(row[breaks] <= row[breaks - 1])])
    runs = []
    for first, last, turn in zip([0, *breaks], [*breaks, len(row)], turns, strict=True):
        for start in range(first, last, _ROWS_AT_ONCE):
            n = min(_ROWS_AT_ONCE, last - start)
            runs.append(Run(slice(start, start + n), slice(int(row[start]), int(row[start]) + n), int(turn)))
    return runs


def light_through(sky: SkyParts, factors: Factors, runs: list[Run]) -> Iterator[tuple[Run, FloatArray]]:
    """The light [W/m²] that ``factors`` let through, run by run: (n, n_headings), overwritten by the next."""
    n_headings = max(part.shape[1] for part in vars(factors).values())
    buffer = np.empty((_ROWS_AT_ONCE, n_headings))
    for run in runs:
        diffuse = (
            sky.isotropic[run.times, None] * _at(factors.isotropic, run.rows)
            + sky.brightening[run.times, None] * _at(factors.brightening, run.rows)
            + sky.ground[run.times, None] * _at(factors.ground, run.rows)
        )
        block = buffer[: len(diffuse)]
        np.multiply(_at(factors.direct, run.rows), sky.direct[run.times, None], out=block)
        np.maximum(diffuse, 0.0, out=diffuse)  # a dark band at the horizon takes no more than there is
        diffuse += _at(factors.lamp, run.rows)
        block += diffuse
        yield run, block


def mixed(views: Sequence[View], shares: Sequence[FloatArray]) -> View:
    """The view of a panel that has each of ``views`` for its share of a reference step, (n_rows or 1,) each."""
    if len(views) == 1:
        return views[0]

    def one(stage: str) -> Factors:
        parts = [getattr(view, stage) for view in views]
        mean = {
            name: sum(share[:, None] * getattr(part, name) for share, part in zip(shares, parts, strict=True))
            for name in vars(parts[0])
        }
        return Factors(**mean)

    opened = one("open")
    bare = all(view.plane is view.open for view in views)
    return View(opened, opened if bare else one("plane"), one("glass"))


def under_horizon(sky: SkyParts, site: Site, *, sun: Sun, row: IntArray) -> SkyParts:
    """The same sky, its ground lit only by what the site's horizon leaves of sun and sky."""
    if not site.horizon:
        return sky
    hidden_deg = horizon_at(site.horizon, AZIMUTHS_DEG)[None, :]
    sky_share = float(sky_shares(direction(0.0, 90.0)[:, None], hidden_deg)[0][0])
    height = np.maximum(np.cos(np.radians(sun.zenith_deg)), 0.0)
    beam = sky.direct * height[row]
    whole = beam + sky.isotropic
    left = beam * _sun_clears(site, sun)[row] + sky.isotropic * sky_share
    share = np.divide(left, whole, out=np.ones_like(whole), where=whole > 0.0)
    return replace(sky, ground=sky.ground * share)


def open_air(panel: Panel, site: Site, *, sun: Sun, nose_deg: FloatArray) -> View:
    """The view of a panel out of doors; ``nose_deg`` (n_rows or 1, n_headings) where the nose points."""
    direct = _direct(panel, site, sun=sun, nose_deg=nose_deg)
    diffuse = _diffuse(panel, site, nose_deg)
    opened, plane, glass = (Factors(direct[stage], *diffuse[stage]) for stage in range(3))
    return View(opened, opened if _is_bare(panel, site) else plane, glass)


def _is_bare(panel: Panel, site: Site) -> bool:
    """Whether nothing stands between panel and sky."""
    return not site.horizon and not panel.obstructions


def _direct(panel: Panel, site: Site, *, sun: Sun, nose_deg: FloatArray) -> tuple[FloatArray, FloatArray, FloatArray]:
    """Factors on direct light: open, left by horizon and obstructions, past the glass; (n_rows, n_headings)."""
    n_rows, shape = sun.zenith_deg.size, (sun.zenith_deg.size, nose_deg.shape[1])
    faces = _faces(panel, site, nose_deg)
    opened, glass = np.empty(shape), np.empty(shape)
    bare = _is_bare(panel, site)
    plane = opened if bare else np.empty(shape)
    clear = _sun_clears(site, sun)
    slope_deg, aspect_deg = slope_of(site)
    for first in range(0, n_rows, _ROWS_AT_ONCE):
        rows = slice(first, min(first + _ROWS_AT_ONCE, n_rows))
        rays = direction(sun.azimuth_deg[rows, None], 90.0 - sun.zenith_deg[rows, None])
        opened[rows] = cos_incidence(rays, faces if faces.shape[1] == 1 else faces[:, rows])
        np.multiply(opened[rows], beam_pass(opened[rows]), out=glass[rows])
        if bare:
            continue
        azimuth_deg, elevation_deg = angles_of(on_slope(rays, -slope_deg, aspect_deg=aspect_deg))
        lost = beam_lost(
            panel.obstructions,
            azimuth_deg - _at(nose_deg, rows),
            sun_elevation_deg=elevation_deg,
            bypass_groups=panel.bypass_groups,
        )
        left = clear[rows, None] * (1.0 - lost)
        np.multiply(opened[rows], left, out=plane[rows])
        glass[rows] *= left
    return opened, plane, glass


def _diffuse(panel: Panel, site: Site, nose_deg: FloatArray) -> FloatArray:
    """Factors on isotropic, brightening and ground by stage; (3 stages, 3 parts, n_rows or 1, n_headings or 1)."""
    if _is_bare(panel, site) and not slope_of(site)[0]:
        return _diffuse_at(panel, site, nose_deg[0, :1])[:, :, None, :]
    if nose_deg.shape[0] == 1:
        return _diffuse_at(panel, site, nose_deg[0])[:, :, None, :]
    table = _diffuse_at(panel, site, _TABLE_NOSES_DEG)
    noses = nose_deg % 360.0
    return np.stack([[np.interp(noses, _TABLE_NOSES_DEG, part) for part in stage] for stage in table])


def _diffuse_at(panel: Panel, site: Site, nose_deg: FloatArray) -> FloatArray:
    """The same for headings (n,): (3 stages, 3 parts, n)."""
    face = _faces(panel, site, nose_deg[None, :])[:, 0]
    cos_tilt = np.clip(face[2], -1.0, 1.0)
    tilt_deg = np.degrees(np.arccos(cos_tilt))
    opened = np.stack([(1.0 + cos_tilt) / 2.0, np.sqrt(1.0 - cos_tilt**2), (1.0 - cos_tilt) / 2.0])
    plane = opened.copy()
    if not _is_bare(panel, site):
        hidden_deg = np.maximum(
            horizon_at(site.horizon, AZIMUTHS_DEG), obstruction_at(panel.obstructions, AZIMUTHS_DEG - nose_deg[:, None])
        )
        sky, band = sky_shares(face, hidden_deg)
        plane[0] *= sky
        plane[1] *= band
    # on a slope every heading has a tilt of its own: whole degrees are near enough for the glass
    tilts = np.round(tilt_deg) if slope_of(site)[0] else np.full_like(tilt_deg, panel.tilt_deg)
    passed = np.array([diffuse_pass(float(tilt)) for tilt in tilts]).T
    return np.stack([opened, plane, plane * passed])


def slope_of(site: Site) -> tuple[float, float]:
    """Slope of the ground and the direction it falls to [deg]; (0, 0) on level ground."""
    return (0.0, 0.0) if site.terrain is None else (site.terrain.slope_deg, site.terrain.aspect_deg)


def _faces(panel: Panel, site: Site, nose_deg: FloatArray) -> FloatArray:
    """Unit normals of the panel for every heading; (3, *nose_deg.shape)."""
    slope_deg, aspect_deg = slope_of(site)
    face = normal(panel.tilt_deg, nose_deg + panel.azimuth_deg)
    return on_slope(face, slope_deg, aspect_deg=aspect_deg) if slope_deg else face


def _sun_clears(site: Site, sun: Sun) -> FloatArray:
    """1 where the sun stands above the site's horizon, else 0; (n_rows,)."""
    return np.asarray(90.0 - sun.zenith_deg >= horizon_at(site.horizon, sun.azimuth_deg), dtype=np.float64)


def _at(part: FloatArray, rows: slice) -> FloatArray:
    return part if part.shape[0] == 1 else part[rows]
