"""CSV files: the steps behind an answer."""

from __future__ import annotations

from pathlib import Path
from typing import TYPE_CHECKING

from ..writing import write_whole

if TYPE_CHECKING:
    import pandas as pd

    from ..sky import Weather
    from ..studies.checking import CheckResult
    from ..studies.seasons import SeasonResult

TRACE_COLUMNS = (
    "time",
    "ghi_w_m2",
    "plane_w_m2",
    "cell_temp_c",
    "harvest_w",
    "spilled_w",
    "demand_w",
    "served_w",
    "soc",
    "box_temp_c",
    "on",
)


def trace_table(result: CheckResult) -> pd.DataFrame:
    """The balance step by step in the order of the weather; time is the UTC middle of the step."""
    import numpy as np
    import pandas as pd

    if result.trace is None or result.plane_w_m2 is None or result.cell_temp_c is None:
        raise ValueError("the steps need a check with trace=True")
    lanes, weather = result.lanes, result.weather
    there = lanes.step_h.T.ravel() > 0
    rows = lanes.row.T.ravel()[there]
    order = np.argsort(rows, kind="stable")
    rows = rows[order]
    trace = result.trace
    columns: dict[str, object] = {
        "time": weather.times[rows].strftime("%Y-%m-%dT%H:%M:%SZ"),
        "ghi_w_m2": weather.table["ghi"].to_numpy()[rows],
        "plane_w_m2": result.plane_w_m2[rows],
        "cell_temp_c": result.cell_temp_c[rows],
    }
    for name in TRACE_COLUMNS[4:]:
        columns[name] = getattr(trace, name).T.ravel()[there][order]
    return pd.DataFrame(columns)


def weather_table(weather: Weather) -> pd.DataFrame:
    """The weather as sunbot uses it: the UTC middle of each step, light [W/m2], air [degC], wind [m/s]."""
    table = weather.table.reset_index(drop=True)
    table.insert(0, "time", weather.times.strftime("%Y-%m-%dT%H:%M:%SZ"))
    return table


def fortnight_table(result: SeasonResult) -> pd.DataFrame:
    """The worst fortnight step by step, columns as those of a check; time is the UTC middle of the step."""
    import pandas as pd

    steps = result.worst.steps
    table = steps[list(TRACE_COLUMNS[1:])].reset_index(drop=True)
    table.insert(0, "time", pd.DatetimeIndex(steps.index).tz_convert("UTC").strftime("%Y-%m-%dT%H:%M:%SZ"))
    return table


def write_table(table: pd.DataFrame, path: Path) -> None:
    """Write a table as CSV, whole or not at all."""
    write_whole(path, lambda temporary: table.to_csv(temporary, index=False, float_format="%.6g"))
