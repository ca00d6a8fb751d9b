"""How sure a share of years is."""

from __future__ import annotations

import math

Z_95 = 1.959963984540054
"""Two-sided 95 % point of the normal distribution."""


def wilson_interval(successes: int, trials: int) -> tuple[float, float]:
    """95 % interval of a share from ``successes`` in ``trials``.

    Raises
    ------
    ValueError
        trials is below 1, or successes outside 0 to trials.

    Source
    ------
    Published: Wilson, J. Am. Stat. Assoc. 22 (1927) 209.
    """
    if trials < 1 or not 0 <= successes <= trials:
        raise ValueError(f"{successes} of {trials} is no share")
    share, z2 = successes / trials, Z_95**2
    middle = (share + z2 / (2 * trials)) / (1 + z2 / trials)
    half = Z_95 / (1 + z2 / trials) * math.sqrt(share * (1 - share) / trials + z2 / (4 * trials**2))
    low = 0.0 if successes == 0 else max(0.0, middle - half)
    return low, 1.0 if successes == trials else min(1.0, middle + half)


def years_to_settle(target: float, share: float = 1.0) -> int | None:
    """Years after which the lower end of the interval reaches ``target`` if ``share`` of them survive; None: never."""
    if target >= 1 or share <= target:
        return None
    return math.ceil(Z_95**2 * target * (1 - target) / (share - target) ** 2 - 1e-9)
