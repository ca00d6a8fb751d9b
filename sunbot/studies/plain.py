"""Results as plain JSON values."""

from __future__ import annotations

import math
from typing import Any

import numpy as np
import pandas as pd

DIGITS = 9
"""Significant digits kept: more than any figure here deserves, fewer than summation order disturbs."""


def plain(value: Any) -> Any:
    """``value`` with numpy scalars, time stamps and NaN turned into what JSON knows: NaN becomes null, instants UTC."""
    if isinstance(value, dict):
        return {str(name): plain(entry) for name, entry in value.items()}
    if isinstance(value, (list, tuple)):
        return [plain(entry) for entry in value]
    if isinstance(value, np.ndarray):
        return [plain(entry) for entry in value.tolist()]
    if isinstance(value, (bool, np.bool_)):
        return bool(value)
    if isinstance(value, (int, np.integer)):
        return int(value)
    if isinstance(value, pd.Timestamp):
        return value.tz_convert("UTC").strftime("%Y-%m-%dT%H:%M:%SZ")
    if isinstance(value, (float, np.floating)):
        return _plain_float(float(value))
    return value


def _plain_float(value: float) -> float | None:
    if not math.isfinite(value):
        return None
    return float(f"{value:.{DIGITS}g}")


def plain_document(parts: dict[str, Any]) -> dict[str, Any]:
    """A whole JSON document of plain values."""
    document: dict[str, Any] = plain(parts)
    return document
