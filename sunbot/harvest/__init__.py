"""Cells and controller: W/m2 and degC in, W at the battery (`Supply`) out."""

from .carriers import HarvestYield, Supply
from .cautions import supply_cautions
from .strongest import strongest_charge_a
from .supplying import follows_battery, harvest_yield, supply

__all__ = [
    "HarvestYield",
    "Supply",
    "follows_battery",
    "harvest_yield",
    "strongest_charge_a",
    "supply",
    "supply_cautions",
]
