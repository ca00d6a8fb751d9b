"""What a panel's own glass, its dirt and the snow on it keep from the cells."""

from __future__ import annotations

from functools import lru_cache
from typing import NamedTuple

import numpy as np
from pvlib import iam

from ..types import BoolArray, FloatArray, IntArray

SNOW_SLIDES_DEG = 40.0
"""Panels steeper than this shed snow. Common practice."""
_NODES = 8193


class DiffusePass(NamedTuple):
    """Share of light that passes the glass, relative to light that falls straight in, by where it comes from."""

    sky: float
    horizon: float
    ground: float


def beam_pass(cos_incidence: FloatArray) -> FloatArray:
    """Share of direct light that passes a panel's glass, relative to normal incidence; any shape, 0 at grazing.

    Source
    ------
    Published: De Soto, Klein & Beckman, Solar Energy 80 (2006) 78, section 3, by pvlib: n 1.526, 4 /m, 2 mm; read from
    a table, within 0.00001.
    """
    cosines, passed = _beam_table()
    return np.interp(cos_incidence, cosines, passed)


@lru_cache(maxsize=1)
def _beam_table() -> tuple[FloatArray, FloatArray]:
    # squared spacing: the curve bends most at grazing incidence
    cosines = np.linspace(0.0, 1.0, _NODES) ** 2
    return cosines, np.asarray(iam.physical(np.degrees(np.arccos(cosines))), dtype=np.float64)


@lru_cache(maxsize=256)
def diffuse_pass(tilt_deg: float) -> DiffusePass:
    """Share of sky, horizon and ground light that passes the glass of a panel at ``tilt_deg``.

    Source
    ------
    Published: Marion, Solar Energy 147 (2017) 344, by pvlib, over the curve of ``beam_pass``.
    """
    passed = iam.marion_diffuse("physical", float(tilt_deg))
    return DiffusePass(float(passed["sky"]), float(passed["horizon"]), float(passed["ground"]))


def dirt_pass(dirt_loss: tuple[float, ...], month: IntArray) -> FloatArray:
    """Share of light that passes the dirt; ``dirt_loss`` for twelve months, ``month`` 1-12 of each step."""
    return 1.0 - np.asarray(dirt_loss, dtype=np.float64)[month - 1]


def snow_pass(tilt_deg: float, covered: BoolArray | None) -> FloatArray | float:
    """0 where snow lies on a panel of this tilt, else 1; ``covered`` (n_times,) as in Weather, None = never."""
    if covered is None or tilt_deg >= SNOW_SLIDES_DEG:
        return 1.0
    return np.where(covered, 0.0, 1.0)
