"""Building blocks of the input models: strict scalars, keys that carry their own comment, and checks across keys."""

from __future__ import annotations

from collections.abc import Iterator
from dataclasses import dataclass
from typing import Annotated, Any, Literal, Self

from pydantic import (
    AfterValidator,
    AllowInfNan,
    BaseModel,
    BeforeValidator,
    ConfigDict,
    Field,
    Strict,
    ValidationInfo,
    WithJsonSchema,
    model_validator,
)

Number = Annotated[float, Strict(), AllowInfNan(False)]
Whole = Annotated[int, Strict()]
Flag = Annotated[bool, Strict()]
Text = Annotated[str, Strict()]
Named = Annotated[str, Strict(), Field(min_length=1, max_length=80)]
FileName = Annotated[str, Strict(), Field(min_length=1, max_length=1000)]
Share = Annotated[Number, Field(ge=0, le=1)]
Turn = Annotated[Number, Field(ge=-360, le=360)]
"""An angle in degrees, either way round."""

Path = tuple[str | int, ...]
"""Keys and list positions that lead to a value of the file, e.g. ``("panel", 0, "watts")``."""

COLLECTED_LATER = "sunbot: checks across keys are collected by the caller"
"""Validation context of the file reader, which asks each part for its problems itself, to have all at once."""


@dataclass(frozen=True)
class Problem:
    """A mistake that only several keys together show.

    at : the key to mend, from the part on; wrong, instead : as in a Fault
    judged : the other keys the verdict leans on; where one of those is a mistake itself, nothing is said
    """

    at: Path
    wrong: str
    instead: str
    judged: tuple[Path, ...] = ()


class Part(BaseModel):
    """A part of an input file: frozen, hashable, unknown keys refused."""

    model_config = ConfigDict(frozen=True, extra="forbid", populate_by_name=True)

    def problems(self) -> Iterator[Problem]:
        """What is wrong with the keys of this part taken together."""
        yield from ()

    @model_validator(mode="after")
    def _keys_agree(self, info: ValidationInfo) -> Self:
        if info.context != COLLECTED_LATER and (found := list(self.problems())):
            raise ValueError("; ".join(f"{_dotted(p.at)}: {p.wrong}. Write {p.instead}" for p in found))
        return self


def _dotted(path: Path) -> str:
    return ".".join(str(step) for step in path)


def key(default: Any, comment: str, *, unit: str = "", mark: str = "", example: Any = None, **rules: Any) -> Any:
    """A pydantic field with what ``new``, ``schema`` and the error messages say about it.

    comment : one line for people; unit : shown in brackets; mark : where the default comes from
    ("published: ...", "common practice", "from memory"); example : a value that would be right;
    rules : pydantic constraints (``ge``, ``gt``, ``le``, ``lt``, ``alias``, ``max_length`` ...).
    Required keys pass ``...`` as the default.
    """
    extra = {"unit": unit, "mark": mark, "example": example}
    return Field(default, description=comment, json_schema_extra=extra, **rules)


def _twelve(value: Any) -> Any:
    """One number stands for all twelve months."""
    if isinstance(value, (int, float)) and not isinstance(value, bool):
        return (value,) * 12
    return value


_spread = BeforeValidator(_twelve)
_dozen = Field(min_length=12, max_length=12)

Twelve = Annotated[tuple[Number, ...], _spread, _dozen]
"""Twelve monthly values, January first; the file may give one value for all."""
TwelveShares = Annotated[tuple[Share, ...], _spread, _dozen]
TwelveFactors = Annotated[tuple[Annotated[Number, Field(ge=0, le=10)], ...], _spread, _dozen]
TwelveDays = Annotated[tuple[Annotated[Number, Field(ge=0, le=31)], ...], _spread, _dozen]
TwelveLights = Annotated[tuple[Annotated[Number, Field(ge=0, le=12)], ...], _spread, _dozen]
TwelveWinds = Annotated[tuple[Annotated[Number, Field(ge=0, le=40)], ...], _spread, _dozen]
TwelveTemperatures = Annotated[tuple[Annotated[Number, Field(ge=-90, le=60)], ...], _spread, _dozen]


def _above_level(pairs: tuple[tuple[float, float], ...]) -> tuple[tuple[float, float], ...]:
    """A horizon below the level hides nothing: the ground is there."""
    return tuple((azimuth, max(elevation, 0.0)) for azimuth, elevation in pairs)


Horizon = Annotated[
    tuple[tuple[Annotated[Number, Field(ge=0, le=360)], Annotated[Number, Field(ge=-5, le=90)]], ...],
    AfterValidator(_above_level),
]
"""[azimuth from north, elevation] pairs in degrees; elevations below 0 are read as 0."""

Spans = tuple[tuple[Number, Number], ...]
"""[from, to] hours of the day, forward within it."""

TiltSpans = tuple[tuple[Number, Number, Annotated[Number, Field(ge=0, le=90)]], ...]
"""[from, to, tilt in degrees] by hours of the day."""

Heading = Literal["fixed", "roams", "turns-to-sun"]


def _with_angle(row: Any) -> Any:
    """Only "fixed" has an angle behind it."""
    return [*row, None] if isinstance(row, (list, tuple)) and len(row) == 3 else row


HeadingSpans = tuple[
    Annotated[
        tuple[Number, Number, Heading, Turn | None],
        BeforeValidator(_with_angle),
        WithJsonSchema(
            {
                "type": "array",
                "prefixItems": [
                    {"type": "number", "minimum": 0, "maximum": 24},
                    {"type": "number", "minimum": 0, "maximum": 24},
                    {"type": "string", "enum": ["fixed", "roams", "turns-to-sun"]},
                    {"type": "number", "minimum": -360, "maximum": 360},
                ],
                "minItems": 3,
                "maxItems": 4,
            }
        ),
    ],
    ...,
]
"""[from, to, heading] by hours of the day, with the angle of the nose behind "fixed"."""
