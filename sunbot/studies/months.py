"""Monthly figures of one design, pooled over its years."""

from __future__ import annotations

import numpy as np
import pandas as pd

from ..calendar import Lanes
from ..storage import Balance
from ..types import FloatArray


def month_sums(values: FloatArray, lanes: Lanes) -> FloatArray:
    """Values of the weather's steps (n_times,) times the hours of the lanes' steps, summed by calendar month; (12,)."""
    month = np.repeat(lanes.month, lanes.row.shape[1])
    weights = (values[lanes.row] * lanes.step_h).ravel()
    return np.asarray(np.bincount(month, weights=weights, minlength=13)[1:])


def month_hours(lanes: Lanes) -> FloatArray:
    """Hours of all lanes by calendar month; (12,)."""
    return np.asarray(np.bincount(lanes.month, weights=lanes.step_h.sum(axis=1), minlength=13)[1:])


def month_table(balance: Balance, lanes: Lanes, plane_w_m2: FloatArray, *, design: int = 0) -> pd.DataFrame:
    """Monthly means per day and extremes of one design.

    Parameters
    ----------
    plane_w_m2 : (n_times,)
        Irradiance on the plane of the first panel, mean over its headings [W/m2].

    Returns
    -------
    DataFrame indexed by month 1-12, columns as in the JSON of ``check``; NaN in months that no lane reaches.
    """
    hours = month_hours(lanes)
    with np.errstate(invalid="ignore", divide="ignore"):
        days = np.where(hours > 0, hours / 24.0, np.nan)
        totals = {
            "plane_wh_m2_day": month_sums(plane_w_m2, lanes),
            "harvest_wh_day": _pooled(balance.harvest_wh, design),
            "spilled_wh_day": _pooled(balance.spilled_wh, design),
            "demand_wh_day": _pooled(balance.demand_wh, design),
            "unserved_wh_day": _pooled(balance.unserved_wh, design),
            "skipped_wh_day": _pooled(balance.skipped_wh, design),
        }
        table = pd.DataFrame({name: total / days for name, total in totals.items()}, index=range(1, 13))
        table.index.name = "month"
        demand = totals["demand_wh_day"]
        table["harvest_over_demand"] = np.where(demand > 0, totals["harvest_wh_day"] / demand, np.nan)
        lowest = balance.lowest_soc
        if lowest is None:
            raise ValueError('the months need a balance kept with "months" or "trace"')
        table["lowest_soc"] = np.where(hours > 0, lowest[:, :, design].min(axis=1), np.nan)
        n_years = balance.hours_out.shape[1]
        table["hours_out_per_year"] = np.where(hours > 0, balance.hours_out[:, :, design].sum(axis=1) / n_years, np.nan)
        asked = _pooled(balance.work_asked_wh, design)
        table["work_done"] = np.where(asked > 0, 1.0 - _pooled(balance.skipped_wh, design) / asked, np.nan)
    return table


def _pooled(monthly: FloatArray | None, design: int) -> FloatArray:
    if monthly is None:
        raise ValueError('the months need a balance kept with "months" or "trace"')
    return np.asarray(monthly[:, :, design].sum(axis=1))
