"""What the demand room hands on."""

from __future__ import annotations

from dataclasses import dataclass

from ..types import FloatArray


@dataclass(frozen=True, eq=False)
class Asked:
    """Power asked at the battery terminals by some loads, and how it divides; all shapes equal.

    total_w = loads_w + rails_w (conversion) + wire_w + idle_w (idle draws of converters and loads).
    """

    total_w: FloatArray
    loads_w: FloatArray
    rails_w: FloatArray
    wire_w: FloatArray
    idle_w: FloatArray


@dataclass(frozen=True, eq=False)
class Demand:
    """What the loads ask for at the battery, over the reference rows.

    battery_v : (n_volts,) as in Supply (one where nothing depends on it).
    essential : arrays (n_rows, n_volts).
    work : arrays (n_rows, n_levels, n_volts); a level is one skippable load, in the order in which they are SERVED:
        lowest threshold first, among equals the later in the file first (the earlier gives way first). May be none.
    skip_below_soc : (n_levels,) ascending; level_loads : (n_levels,) names.
    """

    battery_v: FloatArray
    essential: Asked
    work: Asked
    skip_below_soc: FloatArray
    level_loads: tuple[str, ...]
