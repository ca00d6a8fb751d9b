"""What an answer was worked out from, and a digest that says whether two answers had the same inputs."""

from __future__ import annotations

import hashlib
import json
from dataclasses import dataclass
from typing import Any

from ..inputs.robot import Robot
from ..inputs.site import Site
from ..sky import Weather


@dataclass(frozen=True)
class InputsUsed:
    """Names, years, seed and digest of the inputs of one answer."""

    robot: str | None
    site: str
    weather: str
    years: int
    seed: int
    digest: str
    year_starts_month: int | None

    def to_dict(self) -> dict[str, Any]:
        """As in the JSON; what does not apply is left out."""
        return {name: value for name, value in self.__dict__.items() if value is not None}


def inputs_used(what: Robot | Site, weather: Weather, *, years: int, seed: int, first_month: int | None) -> InputsUsed:
    """Gather the names of the inputs and a digest over their parsed values and the weather."""
    robot, site = (what, what.site) if isinstance(what, Robot) else (None, what)
    parsed = json.dumps(what.model_dump(mode="json"), sort_keys=True)
    whole = f"{parsed}|{weather.digest}|{years}|{seed}"
    return InputsUsed(
        robot=None if robot is None else robot.name,
        site=site.name,
        weather=weather.origin,
        years=years,
        seed=seed,
        digest=hashlib.sha256(whole.encode()).hexdigest()[:16],
        year_starts_month=first_month,
    )
