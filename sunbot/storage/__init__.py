"""Chemistries, the pack and the step-by-step balance: `Supply` and `Demand` in, `Balance` out."""

from .box import box_temp_c, heated_box_c
from .carriers import Balance, Designs, Ledger, Trace
from .designs import as_filed, autonomy_h
from .pack import Pack, battery_voltages, pack_of, resistance_ohm, usable_share, usable_wh, working_weights
from .pack import conditions as pack_conditions
from .ring import balance

__all__ = [
    "Balance",
    "Designs",
    "Ledger",
    "Pack",
    "Trace",
    "as_filed",
    "autonomy_h",
    "balance",
    "battery_voltages",
    "box_temp_c",
    "heated_box_c",
    "pack_conditions",
    "pack_of",
    "resistance_ohm",
    "usable_share",
    "usable_wh",
    "working_weights",
]
