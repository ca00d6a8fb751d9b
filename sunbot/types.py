"""Array aliases and the few small carriers that every room shares."""

from __future__ import annotations

from dataclasses import dataclass
from typing import Any

import numpy as np
from numpy.typing import NDArray

FloatArray = NDArray[np.float64]
IntArray = NDArray[np.int64]
BoolArray = NDArray[np.bool_]
AnyArray = NDArray[Any]

MONTHS = (
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


@dataclass(frozen=True)
class Place:
    """Where the weather is: degrees (north and east positive), metres above the sea, IANA zone."""

    latitude: float
    longitude: float
    altitude_m: float
    time_zone: str


@dataclass(frozen=True)
class Caution:
    """One thing the reader must know before trusting a figure.

    code : short stable word, e.g. ``"one-year"``; where : what it is about, e.g. ``"rail logic"``;
    text : one or two sentences that say what is doubtful and what to do.
    """

    code: str
    where: str
    text: str
