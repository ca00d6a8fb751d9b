"""The charge controller: at which voltage it holds the panels, and what of their power reaches the battery."""

from __future__ import annotations

from collections.abc import Sequence

import numpy as np

from ..types import FloatArray

Curve = tuple[FloatArray, ...]
"""Photo current, saturation current [A], series, shunt resistance [Ω], slope [V] of one panel, each (n_samples,)."""

_STEPS, _STEPS_TO_CURRENT, _LONGEST_STEP = 4, 1, 0.1
_FAR_BELOW = 2.0
"""In slopes of the curve: a panel whose best voltage lies further below the brightest one's may be past its open."""


def tracked_current_a(peak_a: FloatArray, peak_v: FloatArray, *, wire_ohm: float) -> FloatArray:
    """Current at which a tracker holds a panel behind a wire [A]: that of the panel's maximum power.

    Where so much current would lose over half the voltage in the wire, it takes the current that gives most beyond
    it; so more panel never gives less. Up to that point the true optimum is better by 0.2 % at 10 % drop.

    Parameters
    ----------
    peak_a, peak_v : (n_samples,)
        Current and voltage of maximum power [A, V].
    wire_ohm : float
        Out and back [Ω].
    """
    if wire_ohm == 0.0:
        return peak_a
    return np.minimum(peak_a, peak_v / (2.0 * wire_ohm))


def shared_peak(
    parameters: Sequence[Curve], peak_a: Sequence[FloatArray], peak_v: Sequence[FloatArray]
) -> tuple[FloatArray, list[FloatArray]]:
    """Voltage at which panels side by side give most together [V], and the current of each there [A], at least 0.

    Power over voltage is concave for each panel, and so is the sum while all of them deliver: Newton steps on its
    slope. Where a dim panel may be past its open voltage, the top without it is tried too. Wires are left out:
    their drop moves the best voltage, not (to first order) the power there.

    Parameters
    ----------
    parameters : one tuple per panel
        Photo current, saturation current [A], series, shunt resistance [Ω], slope [V], each (n_samples,).
    peak_a, peak_v : one (n_samples,) per panel
        Current and voltage of each panel's own maximum power [A, V].

    Source
    ------
    Published: De Soto, Klein & Beckman, Solar Energy 80 (2006) 78, eq. 1 (the curve); the steps are its derivatives.
    """
    each_v = np.array(peak_v)
    power = np.array(peak_a) * each_v
    volts, amps = _climb(parameters, (power * each_v).sum(axis=0) / power.sum(axis=0), peak_a)
    brightest_v = np.take_along_axis(each_v, power.argmax(axis=0)[None], axis=0)[0]
    lags = [
        (brightest_v - v > _FAR_BELOW * panel[4]) & (a > 0)
        for panel, a, v in zip(parameters, peak_a, peak_v, strict=True)
    ]
    apart = np.flatnonzero(np.logical_or.reduce(lags))
    if len(apart):
        some = [tuple(part[apart] for part in panel) for panel in parameters]
        other_v, other_a = _climb(some, brightest_v[apart], [a[apart] for a in peak_a], only_giving=True)
        better = sum(other_a) * other_v > sum(a[apart] for a in amps) * volts[apart]
        volts[apart] = np.where(better, other_v, volts[apart])
        for found, other in zip(amps, other_a, strict=True):
            found[apart] = np.where(better, other, found[apart])
    return volts, amps


def _climb(
    parameters: Sequence[Curve],
    volts: FloatArray,
    amps: Sequence[FloatArray],
    *,
    only_giving: bool = False,
) -> tuple[FloatArray, list[FloatArray]]:
    """Newton steps towards the voltage of most power; of lit panels, or only of those that give any there."""
    lit = [a > 0.0 for a in amps]
    amps = [_settled(panel, volts, a) for panel, a in zip(parameters, amps, strict=True)]
    for _ in range(_STEPS):
        slope, bend = np.zeros_like(volts), np.full_like(volts, -1e-12)
        for k, panel in enumerate(parameters):
            amps[k], by_volt, by_volt_2 = _newton_current(panel, volts, amps[k])
            counts = lit[k] & (amps[k] > 0.0) if only_giving else lit[k]
            slope += counts * (amps[k] + volts * by_volt)
            bend += counts * (2.0 * by_volt + volts * by_volt_2)
        step = np.clip(-slope / bend, -_LONGEST_STEP * volts, _LONGEST_STEP * volts)
        volts = volts + step
    return volts, [np.maximum(_settled(panel, volts, a), 0.0) for panel, a in zip(parameters, amps, strict=True)]


def _settled(panel: Curve, volts: FloatArray, amps: FloatArray) -> FloatArray:
    """Current of a panel at a voltage, from a guess above it."""
    for _ in range(_STEPS_TO_CURRENT):
        amps = _newton_current(panel, volts, amps)[0]
    return amps


def _newton_current(panel: Curve, volts: FloatArray, amps: FloatArray) -> tuple[FloatArray, FloatArray, FloatArray]:
    """One Newton step towards the current at a voltage, with its first and second derivative by voltage."""
    photo, dark, series, shunt, slope = panel
    junction = volts + amps * series
    diode = dark * np.exp(junction / slope)
    conducts = diode / slope + 1.0 / shunt
    stiff = 1.0 + conducts * series
    better = amps + (photo - diode + dark - junction / shunt - amps) / stiff
    return better, -conducts / stiff, -diode / slope**2 / stiff**3


def converted_w(
    feed_w: FloatArray, *, efficiency: float, curve: tuple[tuple[float, float], ...] | None, rated_w: float | None
) -> FloatArray:
    """Power a converter puts out [W].

    Parameters
    ----------
    feed_w : (...)
        Power at its input [W].
    efficiency : float
        Where there is no curve.
    curve : pairs
        Share of rated_w, efficiency, in rising order; linear between, level beyond.
    rated_w : float
        Power the curve refers to [W].
    """
    if curve is None or rated_w is None:
        return feed_w * efficiency
    share, at = zip(*curve, strict=True)
    return np.asarray(feed_w * np.interp(feed_w / rated_w, share, at))


def cold_voc_v(voc_v: float, *, voc_pct_per_k: float, coldest_c: float) -> float:
    """Open-circuit voltage of a panel in full sun while its cells are still as cold as the coldest air [V].

    Source
    ------
    Common practice: the highest voltage a controller meets is that of a clear, record-cold morning.
    """
    return voc_v * (1.0 + voc_pct_per_k / 100.0 * (coldest_c - 25.0))
