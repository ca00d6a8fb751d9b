"""Beam and diffuse light where a file gives only part of them."""

from __future__ import annotations

import numpy as np
import pvlib

from ..types import BoolArray, FloatArray
from .sun_height import SunHeight, beam_limit_w_m2

# Published: the guard of Erbs' clearness index in pvlib, zenith 86.3 degrees; below it a small cosine invents beam.
LEAST_SINE = 0.065


def completed_light(
    ghi: FloatArray, dni: FloatArray, dhi: FloatArray, sun: SunHeight
) -> tuple[FloatArray, FloatArray, FloatArray, BoolArray]:
    """ghi, dni, dhi [W/m²] with the missing ones of a row worked out from the others, and which rows were split.

    All (n_times,), NaN where missing. A row without ghi needs both others; a row without ghi and one more stays NaN.
    Estimated light is all diffuse with the sun down at the middle of the step; measured beam stays where some part of
    the sun shows in the step, and counts as diffuse where none does.

    Source
    ------
    Published: split of ghi by Erbs, Klein & Duffie, Solar Energy 28 (1982) 293, in the smooth form of Driesse et al.,
    Solar Energy 267 (2024) 112093, as in pvlib.
    """
    sine = np.maximum(sun.sine, 0.0)
    ghi = np.where(np.isnan(ghi), dhi + dni * sine, ghi)
    no_dni, no_dhi = np.isnan(dni) & ~np.isnan(ghi), np.isnan(dhi) & ~np.isnan(ghi)
    split = no_dni | no_dhi
    dni, dhi = dni.copy(), dhi.copy()
    only_dhi = no_dhi & ~no_dni
    dhi[only_dhi] = np.clip(ghi - dni * sine, 0.0, ghi)[only_dhi]
    rows = np.flatnonzero(no_dni)
    if rows.size:
        part = sun.take(rows)
        both = no_dhi[rows]
        guess = diffuse_from_ghi(ghi[rows], part)
        dni[rows], fitted = guarded_beam(ghi[rows], np.where(both, guess, dhi[rows]), part)
        dhi[rows] = np.where(both, fitted, dhi[rows])
    dark = ~sun.lit & ~np.isnan(ghi)
    dni[dark], dhi[dark] = 0.0, ghi[dark]
    return ghi, dni, dhi, split & (ghi > 0.0)


def diffuse_from_ghi(ghi: FloatArray, sun: SunHeight) -> FloatArray:
    """Diffuse part of ghi [W/m²] by its clearness; (n_times,)."""
    split = pvlib.irradiance.erbs_driesse(ghi, sun.zenith_deg, dni_extra=sun.extra_w_m2)
    return np.asarray(split["dhi"], dtype=np.float64)


def guarded_beam(ghi: FloatArray, dhi: FloatArray, sun: SunHeight) -> tuple[FloatArray, FloatArray]:
    """Beam (ghi - dhi)/cos z kept below what a clear sky can give, and the diffuse that closes the sum; [W/m²]."""
    beam = np.maximum(ghi - dhi, 0.0) / np.maximum(sun.sine, LEAST_SINE)
    dni = np.where(sun.sine > 0.0, np.minimum(beam, beam_limit_w_m2(sun)), 0.0)
    return dni, ghi - dni * np.maximum(sun.sine, 0.0)
