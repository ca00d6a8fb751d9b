"""Several wrong values in a list of twelve months: one mistake, and most often one of the unit."""

from __future__ import annotations

from collections.abc import Sequence
from typing import Any

from pydantic_core import ErrorDetails

from ..types import MONTHS

# By key: up to this value, these may be in another unit, and what makes them right. Common practice: the brightest
# months bring 8 to 9 kWh/m2 a day or 30 MJ/m2, their sums 250 kWh/m2 or 900 MJ/m2; no air passes 60 degC.
SLIPS: dict[str, tuple[tuple[float, str], ...]] = {
    "ghi_kwh_m2_day": (
        (43.0, "each divided by 3.6 if these are MJ/m2 a day"),
        (310.0, "each divided by the days of its month if these are sums of months in kWh/m2, times 0.024 if W/m2"),
        (1200.0, "each divided by 3.6 and by the days of its month if these are sums of months in MJ/m2"),
        (12_000.0, "each divided by 1000 if these are Wh/m2 a day"),
    ),
    "temp_min_c": (
        (130.0, "(F - 32) / 1.8 of each if these are degrees Fahrenheit"),
        (340.0, "each less 273.15 if these are kelvin"),
    ),
    "wind_m_s": ((150.0, "each divided by 3.6 if these are km/h"),),
    "share": ((100.0, "each divided by 100 if these are per cent"),),
}
SLIPS["temp_max_c"] = SLIPS["temp_min_c"]
SHARES = ("albedo", "dirt_loss", "year_to_year")


def of_twelve(alike: Sequence[ErrorDetails], wrong: str, instead: str, values: Any) -> tuple[str, str]:
    """The mistake of a list, from those of its values: how many, the first of them, and the unit they may be in.

    Parameters
    ----------
    alike :
        What was found wrong with values of one list.
    wrong, instead :
        The first of them in words, and the remedy for one value.
    values :
        The list as the file has it.
    """
    path = alike[0]["loc"]
    name = next(str(step) for step in reversed(path) if isinstance(step, str))
    months = [MONTHS[step] for error in alike if isinstance(step := error["loc"][-1], int) and step < len(MONTHS)]
    first = f" ({months[0]}: {wrong})" if months else f" ({wrong})"
    numbers = [value for value in values if isinstance(value, (int, float)) and not isinstance(value, bool)]
    slips = SLIPS["share"] if name in SHARES else SLIPS.get(name, ())
    largest = max(numbers, default=0.0)
    advice = next((advice for most, advice in slips if largest <= most), None) if len(numbers) == len(values) else None
    return (
        f"{len(alike)} of its {len(values)} values cannot be used{first}",
        f"{advice}: {instead}" if advice else instead,
    )
