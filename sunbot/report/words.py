"""Figures and names as people read them: nouns, dates, names on a picture."""

from __future__ import annotations

import datetime as dt
import unicodedata
from typing import TYPE_CHECKING

from ..calendar import REFERENCE_YEAR
from ..types import MONTHS

if TYPE_CHECKING:
    from ..inputs.robot import Robot
    from ..sky import Weather

MISSING = "\N{WHITE SQUARE}"


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
    return f"year {day.year - REFERENCE_YEAR + 1}, {day.day} {MONTHS[day.month - 1]}"


def printable(text: str) -> str:
    """Text without control characters, which a terminal would obey and a font cannot draw; line breaks stay."""
    return "".join(MISSING if unicodedata.category(letter) == "Cc" and letter != "\n" else letter for letter in text)


def drawable(text: str) -> str:
    """Text as a picture takes it: no formula between dollars, a box for every letter its font lacks."""
    from matplotlib.font_manager import FontProperties, findfont, get_font

    font = get_font(findfont(FontProperties()))
    letters = (letter if letter == "\n" or font.get_char_index(ord(letter)) else MISSING for letter in printable(text))
    return "".join(letters).replace("$", r"\$")
