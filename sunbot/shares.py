"""Shares in per cent that rounding never flatters."""

from __future__ import annotations

MOST_PLACES = 6
EQUAL = 1e-9
"""Shares closer than this are one: the slack that a verdict grants too."""


def share_text(share: float, *, target: float | None = None, places: int = 0, most: int = MOST_PLACES) -> str:
    """A share in per cent that stands on its own side of 0 %, of 100 % and of ``target`` after rounding too.

    Parameters
    ----------
    share : float
        0 to 1; NaN comes out as "-".
    target : float, optional
        What the share is held against.
    places, most : int
        Decimals to begin with, and the most there is room for; where those do not do, the nearest step on the
        share's own side is shown.
    """
    if share != share:
        return "-"
    bounds = (0.0, 1.0) if target is None else (0.0, 1.0, target)
    for decimals in range(places, most + 1):
        shown = round(100.0 * share, decimals)
        sides = [(_side(share, bound), _side(shown / 100.0, bound), bound) for bound in bounds]
        crossed = [(true, bound) for true, seen, bound in sides if true != seen]
        if not crossed:
            break
    else:
        side, bound = crossed[0]
        shown = 100.0 * bound + side * 10.0**-most
    return f"{shown:.{decimals}f}%"


def exact_share(share: float) -> str:
    """A share from a file in per cent, with all its digits."""
    return f"{100.0 * share:.10g}%"


def _side(share: float, bound: float) -> int:
    """-1 below, 0 on, 1 above."""
    return 0 if abs(share - bound) <= EQUAL else 1 if share > bound else -1
