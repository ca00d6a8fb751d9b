"""When loads run, and who is served first."""

from __future__ import annotations

from collections.abc import Sequence

import numpy as np
import pandas as pd

from ..calendar import duty_share
from ..inputs.robot import Load
from ..inputs.site import Site
from ..types import FloatArray


def step_of_h(times: pd.DatetimeIndex) -> float:
    """Length of the steps whose middles are ``times`` [h]; one hour where there is only one."""
    if len(times) < 2:
        return 1.0
    # the smallest gap: where a 29 February was left out, the next one is a day longer
    return float(np.min(np.diff(times.as_unit("s").asi8))) / 3600.0


def running_share(load: Load, times: pd.DatetimeIndex, *, site: Site, reference: bool) -> FloatArray:
    """Share of each step in which a load works: due by the clock, times its on_fraction; (n_times,), 0 to 1."""
    due = duty_share(
        times,
        load,
        zone=site.time_zone,
        longitude=site.longitude,
        step_h=step_of_h(times),
        reference=reference,
    )
    return due * load.on_fraction


def serving_order(loads: Sequence[Load]) -> tuple[list[int], list[int]]:
    """Places in the file of the essential loads, and of the skippable ones in the order in which they are served.

    The lowest threshold is served first, among equals the later in the file (the earlier gives way first).
    """
    essential = [place for place, load in enumerate(loads) if load.skip_below_soc is None]
    skippable = [(load.skip_below_soc, -place) for place, load in enumerate(loads) if load.skip_below_soc is not None]
    return essential, [-behind for _, behind in sorted(skippable)]
