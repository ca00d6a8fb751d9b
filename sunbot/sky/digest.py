"""A short name for a table of weather, so that two results can be told apart."""

from __future__ import annotations

import hashlib

import numpy as np
import pandas as pd


def table_digest(table: pd.DataFrame) -> str:
    """Twelve hex digits of the times, the column names and every value of the table."""
    digest = hashlib.blake2b(digest_size=6)
    digest.update(np.ascontiguousarray(pd.DatetimeIndex(table.index).as_unit("s").asi8).tobytes())
    for name in table.columns:
        digest.update(str(name).encode())
        digest.update(np.ascontiguousarray(table[name].to_numpy(dtype=np.float64)).tobytes())
    return digest.hexdigest()
