"""What `pick` answers."""

from __future__ import annotations

from dataclasses import asdict, dataclass, fields
from typing import Any

import numpy as np
import pandas as pd

from .. import __version__
from ..inputs.robot import Robot
from ..sky import Weather
from ..types import Caution, FloatArray
from .autonomy_sizing import AutonomySizing
from .inputs_used import InputsUsed
from .plain import plain_document


@dataclass(frozen=True)
class Pair:
    """A panel wattage with the smallest battery that meets the target; ``battery_ah`` None: none in range.

    survival : share of years alive. confirmed : the same in as many other years; None where there are none.
    work_done : in the worst month; None: none asked. mass_kg, price : of panel and battery; None: the file gives none.
    confirmed_met : whether those other years meet the whole target, work included; None where there are none.
    """

    watts: float
    battery_ah: float | None
    survival: float | None = None
    confirmed: float | None = None
    work_done: float | None = None
    mass_kg: float | None = None
    price: float | None = None
    confirmed_met: bool | None = None


@dataclass(frozen=True)
class Shortfall:
    """A panel wattage for which no battery in range meets the target: what it comes to with the largest one tried.

    battery_ah, survival : None where none was tried: over all years the panel gives less than the target asks for.
    work_done : in the worst month; None: none asked, or none tried.
    """

    watts: float
    battery_ah: float | None = None
    survival: float | None = None
    work_done: float | None = None


@dataclass(frozen=True)
class Neighbour:
    """A pair one step beside the recommended one: which step, and what it comes to."""

    step: str
    watts: float
    battery_ah: float
    survival: float
    work_done: float | None
    target_met: bool


@dataclass(frozen=True)
class Recommended:
    """The pair to take, the share of years and of other years it survives, and why it."""

    watts: float
    battery_ah: float
    survival: float
    confirmed: float | None
    why: str


@dataclass(frozen=True)
class ControllerOption:
    """The answer behind one kind of controller; ``why_not`` where it cannot be built."""

    kind: str
    pairs: tuple[Pair, ...]
    recommended: Recommended | None
    why_not: str | None = None

    def to_dict(self) -> dict[str, Any]:
        """As in the JSON."""
        return asdict(self)


@dataclass(frozen=True, eq=False)
class SurvivalMap:
    """Share of years survived over panel and battery: (n_watts,), (n_ah,), (n_ah, n_watts)."""

    watts: FloatArray
    battery_ah: FloatArray
    survival: FloatArray


@dataclass(frozen=True, eq=False)
class PickResult:
    """The answer of `pick`; survival_map and controllers only where asked for.

    battery_range_ah : capacities between which batteries were looked for. shortfalls : of the wattages without one.
    """

    robot: Robot
    weather: Weather
    inputs: InputsUsed
    pairs: tuple[Pair, ...]
    recommended: Recommended | None
    neighbours: tuple[Neighbour, ...]
    by_autonomy: AutonomySizing
    cautions: tuple[Caution, ...]
    battery_range_ah: tuple[float, float]
    shortfalls: tuple[Shortfall, ...] = ()
    survival_map: SurvivalMap | None = None
    controllers: tuple[ControllerOption, ...] = ()

    @property
    def met(self) -> bool:
        """Whether any pair in range meets the target; under a cloudless year none is shown to."""
        return self.recommended is not None and self.weather.kind != "clear-sky"

    @property
    def pairs_table(self) -> pd.DataFrame:
        """The pairs, a row each; with a first column ``controller`` where several kinds were compared."""
        names = [field.name for field in fields(Pair)]
        if not self.controllers:
            return pd.DataFrame([asdict(pair) for pair in self.pairs], columns=names).astype(float)
        rows = [{"controller": option.kind} | asdict(pair) for option in self.controllers for pair in option.pairs]
        return pd.DataFrame(rows, columns=["controller", *names]).astype(dict.fromkeys(names, np.float64))

    def to_dict(self) -> dict[str, Any]:
        """The JSON document of ``sunbot pick --json``."""
        return plain_document(
            {
                "tool": {"name": "sunbot", "version": __version__},
                "inputs": self.inputs.to_dict(),
                "pairs": [asdict(pair) for pair in self.pairs],
                "recommended": None if self.recommended is None else asdict(self.recommended),
                "battery_range_ah": list(self.battery_range_ah),
                "shortfalls": [asdict(shortfall) for shortfall in self.shortfalls],
                "neighbours": [asdict(neighbour) for neighbour in self.neighbours],
                "by_autonomy": self.by_autonomy.to_dict(),
            }
            | ({"controllers": [option.to_dict() for option in self.controllers]} if self.controllers else {})
            | {"cautions": [caution.__dict__ for caution in self.cautions]}
        )
