"""Figures and names as people read them: shares that rounding never flatters, nouns, dates, names on a picture."""

from __future__ import annotations

import datetime as dt
import unicodedata
from typing import TYPE_CHECKING

from ..calendar import REFERENCE_YEAR

if TYPE_CHECKING:
    from ..inputs.robot import Robot
    from ..sky import Weather

MOST_PLACES = 6
EQUAL = 1e-9
"""Shares closer than this are one: the slack that a verdict grants too."""
LONG_MONTHS = (
    "January",
    "February",
    "March",
    "April",
    "May",
    "June",
    "July",
    "August",
    "September",
    "October",
    "November",
    "December",
)
MISSING = "\N{WHITE SQUARE}"


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


def counted(count: int, noun: str) -> str:
    """A whole number with its noun, which takes an s but after 1."""
    return f"{count} {noun}" if count == 1 else f"{count} {noun}s"


def lifetime(robot: Robot) -> str:
    """What a robot survives one by one: a year, or a deployment."""
    return "year" if robot.deployment is None else "deployment"


def date_text(day: dt.date, weather: Weather) -> str:
    """A date; generated years have a number, since they are nobody's calendar."""
    if weather.kind != "generated":
        return f"{day:%Y-%m-%d}"
    return f"year {day.year - REFERENCE_YEAR + 1}, {day.day} {LONG_MONTHS[day.month - 1]}"


def printable(text: str) -> str:
    """Text without control characters, which a terminal would obey and a font cannot draw; line breaks stay."""
    return "".join(MISSING if unicodedata.category(letter) == "Cc" and letter != "\n" else letter for letter in text)


def drawable(text: str) -> str:
    """Text as a picture takes it: no formula between dollars, a box for every letter its font lacks."""
    from matplotlib.font_manager import FontProperties, findfont, get_font

    font = get_font(findfont(FontProperties()))
    letters = (letter if letter == "\n" or font.get_char_index(ord(letter)) else MISSING for letter in printable(text))
    return "".join(letters).replace("$", r"\$")
