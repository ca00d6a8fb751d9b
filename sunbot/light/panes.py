"""What passes one or more panes of glass, one behind the other: reflection at every face and loss inside the glass."""

from __future__ import annotations

from functools import lru_cache

import numpy as np

from ..types import FloatArray

GLASS_INDEX = 1.526
"""Refractive index of window glass. Published: Duffie & Beckman, Solar Engineering of Thermal Processes, ch. 5."""
_NODES = 4097


def panes_pass(
    cos_incidence: FloatArray, *, panes: int, thickness_mm: float, extinction_per_m: float, index: float = GLASS_INDEX
) -> FloatArray:
    """Share of unpolarised light that passes ``panes`` panes, all reflections between them counted.

    Parameters
    ----------
    cos_incidence : any shape
        Cosine of the angle between light and the normal of the glass, 0 to 1.
    panes : int
        How many; 0 lets everything through.
    thickness_mm, extinction_per_m : float
        Of one pane; light lost inside the glass [1/m].

    Returns
    -------
    0 to 1, in the shape of the input; 0 at grazing incidence.

    Source
    ------
    Published: Duffie & Beckman, ch. 5, for one pane; panes are added one by one, polarisations averaged last.
    """
    cos_outside = np.asarray(cos_incidence, dtype=np.float64)
    if panes == 0:
        return np.ones_like(cos_outside)
    cos_inside = np.sqrt(1.0 - (1.0 - cos_outside**2) / index**2)
    kept = np.exp(-extinction_per_m * thickness_mm / 1000.0 / cos_inside)
    across = ((cos_outside - index * cos_inside) / (cos_outside + index * cos_inside)) ** 2
    along = ((index * cos_outside - cos_inside) / (index * cos_outside + cos_inside)) ** 2
    return np.asarray((_stack_pass(across, kept, panes=panes) + _stack_pass(along, kept, panes=panes)) / 2.0)


def _stack_pass(reflected: FloatArray, kept: FloatArray, *, panes: int) -> FloatArray:
    """Share of one polarisation that passes, from the reflection at one face and the share kept on one way through."""
    one = _ratio(kept * (1.0 - reflected) ** 2, 1.0 - (reflected * kept) ** 2)
    back = reflected * (1.0 + kept * one)
    passed, sent_back = one, back
    for _ in range(panes - 1):
        between = 1.0 - sent_back * back
        passed, sent_back = _ratio(passed * one, between), back + _ratio(one**2 * sent_back, between)
    return passed


def _ratio(part: FloatArray, whole: FloatArray) -> FloatArray:
    """The ratio; 0 where whole is 0, as it is where everything is reflected."""
    return np.divide(part, whole, out=np.zeros_like(part), where=whole > 0.0)


@lru_cache(maxsize=32)
def _table(panes: int, thickness_mm: float, extinction_per_m: float) -> tuple[FloatArray, FloatArray]:
    # squared spacing: the curve bends most at grazing incidence
    cosines = np.linspace(0.0, 1.0, _NODES) ** 2
    return cosines, panes_pass(cosines, panes=panes, thickness_mm=thickness_mm, extinction_per_m=extinction_per_m)


def panes_pass_at(cos_incidence: FloatArray, *, panes: int, thickness_mm: float, extinction_per_m: float) -> FloatArray:
    """`panes_pass` read from a table, within 0.00001: for many angles."""
    cosines, passed = _table(panes, thickness_mm, extinction_per_m)
    return np.interp(cos_incidence, cosines, passed)
