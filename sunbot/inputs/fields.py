"""Building blocks of the input models: strict scalars and keys that carry their own comment, unit and mark."""

from __future__ import annotations

from typing import Annotated, Any

from pydantic import AllowInfNan, BaseModel, BeforeValidator, ConfigDict, Field, Strict

Number = Annotated[float, Strict(), AllowInfNan(False)]
Whole = Annotated[int, Strict()]
Flag = Annotated[bool, Strict()]
Text = Annotated[str, Strict()]


class Part(BaseModel):
    """A part of an input file: frozen, hashable, unknown keys refused."""

    model_config = ConfigDict(frozen=True, extra="forbid", populate_by_name=True)


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
        return (float(value),) * 12
    return value


Twelve = Annotated[tuple[Number, ...], BeforeValidator(_twelve), Field(min_length=12, max_length=12)]
"""Twelve monthly values, January first; the file may give one value for all."""
