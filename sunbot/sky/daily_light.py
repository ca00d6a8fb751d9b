"""How much light a day brings: the spread of days within a month, their sequence, and good and bad months."""

from __future__ import annotations

from dataclasses import dataclass

import numpy as np
from scipy.optimize import brentq
from scipy.special import ndtr, ndtri

from ..types import FloatArray
from .draws import Draws, persistent
from .reference_sky import DAY_MONTH

DARKEST_CLEARNESS = 0.04
"""Ours; Hollands & Huget give 0.05, at which the darkest days under maritime skies come out too bright."""

LEAST_TOP_CLEARNESS = 0.60
"""Ours: the published top falls below real clear days where the mean is under 0.2."""

OVER_CLEAR = 1.05
"""The spread ends this much above the clean clear sky; days beyond it are clear days. Ours."""

MONTH_KEEP = 0.3
"""Correlation of the shock of one month with that of the month before; common practice."""

PLAIN_SHOCK = 0.2
"""Weight of the monthly shock where no variation from year to year is given; common practice."""

_NODES = (np.arange(2000) + 0.5) / 2000
_ORDERS = 12


def top_clearness(mean: float) -> float:
    """Clearness of the clearest days of a month with that mean clearness, at least 0.60.

    Source
    ------
    Published: Hollands & Huget, Solar Energy 30 (1983) 195; the floor is ours.
    """
    return max(0.6313 + 0.267 * mean - 11.9 * (mean - 0.75) ** 8, LEAST_TOP_CLEARNESS)


def clearness(share: FloatArray, shape: float, *, low: float, high: float) -> FloatArray:
    """Clearness that the given share of days stays below; ``shape`` above 0 piles days up at the clear end.

    Source
    ------
    Published: Bendt, Collares-Pereira & Rabl, Solar Energy 27 (1981) 1, solved for the clearness.
    """
    if abs(shape) * (high - low) < 1e-6:
        return low + share * (high - low)
    return np.asarray(low + np.log1p(share * np.expm1(shape * (high - low))) / shape)


def mean_clearness(shape: float, *, low: float, high: float, clear: float = np.inf) -> float:
    """Mean of the days of `clearness`, those above ``clear`` taken as ``clear`` days."""
    length, reach = high - low, min(clear, high) - low
    if abs(shape) * length < 1e-4:
        return low + reach - reach**2 / (2.0 * length) * (1.0 - shape * (length / 2.0 - reach / 3.0))
    if shape > 0.0:  # the same sum divided by e^(shape length), which would overflow
        tail = np.exp(-shape * length)
        lost = (np.exp(shape * (reach - length)) - tail) / shape - reach * tail
        return float(low + reach - lost / (1.0 - tail))
    return float(low + reach - (np.expm1(shape * reach) / shape - reach) / np.expm1(shape * length))


def shape_for(mean: float, *, low: float, high: float, clear: float = np.inf) -> float:
    """The shape at which `mean_clearness` is ``mean``; above ``low`` and below the lesser of ``high`` and ``clear``."""
    span = 500.0 / (high - low)
    return float(
        brentq(lambda g: mean_clearness(g, low=low, high=high, clear=clear) - mean, -span, span, xtol=1e-10, rtol=1e-12)
    )


@dataclass(frozen=True)
class MonthLight:
    """The days of one month: `clearness` between low and high, at most ``clear``, and the weight of its shock.

    ``floor`` is the variation of the month's mean that its days alone give, ``keep`` the correlation of day to day.
    """

    shape: float
    low: float
    high: float
    clear: float
    keep: float
    shock: float = 0.0
    floor: float = 0.0

    def share_of_clear(self, share: FloatArray) -> FloatArray:
        """Light of a day over that of the clean clear sky, 0 to 1."""
        if self.clear <= 0.0:
            return np.zeros_like(share)
        days = clearness(share, self.shape, low=self.low, high=self.high)
        return np.minimum(days / self.clear, 1.0)


def month_light(
    mean: float, clear: float, day_weights: FloatArray, *, keep: float, variation: float | None
) -> MonthLight:
    """Days of a month from its mean clearness and that of the clean clear sky.

    mean : below ``clear``; both 0 in polar night. day_weights : (n_days,) clear light of each day.
    variation : standard deviation of the month's mean over its long-term mean; None takes a shock of 0.2.
    """
    if mean <= 0.0 or clear <= 0.0:
        return MonthLight(0.0, 0.0, 0.0, 0.0, keep)
    low = min(DARKEST_CLEARNESS, mean / 2.0)
    high = min(max(top_clearness(mean), mean + 0.02), OVER_CLEAR * clear)
    shape = shape_for(mean, low=low, high=high, clear=clear)
    plain = MonthLight(shape, low, high, clear, keep)
    of_shock = _ShockVariation(plain, day_weights)
    floor = of_shock(0.0)
    if variation is None:
        shock = PLAIN_SHOCK
    elif variation <= floor:
        shock = 0.0
    else:
        shock = 1.0 if variation >= of_shock(1.0) else float(brentq(lambda s: of_shock(s) - variation, 0.0, 1.0))
    return MonthLight(shape, low, high, clear, keep, shock, floor)


class _ShockVariation:
    """Coefficient of variation of a month's mean as a function of the weight of its shock.

    Days are a function of a Gaussian sequence; the covariance of two of them follows from their correlation through
    the Hermite series of that function (Mehler), so that no pilot run is needed.
    """

    def __init__(self, month: MonthLight, day_weights: FloatArray) -> None:
        value = month.share_of_clear(_NODES)
        self.powers = _hermite_power(value / value.mean())
        weights = day_weights / day_weights.sum()
        self.pairs = np.outer(weights, weights)
        days = np.arange(len(weights))
        self.day_keep = month.keep ** np.abs(days[:, None] - days)

    def __call__(self, shock: float) -> float:
        keep = (1.0 - shock**2) * self.day_keep + shock**2
        variance = sum(power * (self.pairs * keep ** (n + 1)).sum() for n, power in enumerate(self.powers))
        return float(np.sqrt(variance))


def _hermite_power(value: FloatArray) -> FloatArray:
    """Squares of the normalised Hermite coefficients of ``value`` at `_NODES`, the last one with all that is left."""
    x = ndtri(_NODES)
    before, now = np.ones_like(x), x
    squares = []
    for order in range(1, _ORDERS + 1):
        squares.append(float((value * now).mean()) ** 2)
        before, now = now, (x * now - np.sqrt(order) * before) / np.sqrt(order + 1)
    squares[-1] += max(float(value.var()) - sum(squares), 0.0)
    return np.array(squares)


def daily_scores(months: tuple[MonthLight, ...], draws: Draws) -> FloatArray:
    """Gaussian sequence of days that persists from day to day and shares a shock within a month; (n, 365).

    Source
    ------
    Published: Graham, Hollands & Unny, Solar Energy 40 (1988) 83; the monthly shock after the lack of variation that
    Dubrovsky, Environmetrics 8 (1997) 409, reports of generators with fixed monthly parameters.
    """
    keep = np.array([month.keep for month in months])[DAY_MONTH]
    days = persistent(draws.light, keep)
    shocks = persistent(draws.months, np.full(12, MONTH_KEEP))
    weight = np.array([month.shock for month in months])
    return np.asarray(np.sqrt(1.0 - weight**2)[DAY_MONTH] * days + (weight * shocks)[:, DAY_MONTH])


def shares_of_clear(months: tuple[MonthLight, ...], scores: FloatArray) -> FloatArray:
    """Light of each day over that of its clean clear sky, 0 to 1; (n, 365)."""
    share = ndtr(scores)
    out = np.empty(share.shape)
    for number, month in enumerate(months):
        days = number == DAY_MONTH
        out[:, days] = month.share_of_clear(share[:, days])
    return out
