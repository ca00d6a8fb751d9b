"""The chosen pair with its battery raised step by step, and what stands beside each step."""

from __future__ import annotations

import numpy as np

from .frontier import Frontier, Judged
from .pick_result import Neighbour, Recommended

STEP, STEPS_UP, NEIGHBOUR_STEPS = 1.05, 16, 2
"""The battery is raised by one step after the other when other years ask for more than the years it was sized on; its
neighbours lie two steps to either side."""


class Ladder:
    """One wattage of a frontier and the batteries above the one found, up to twice as large."""

    def __init__(self, frontier: Frontier, at: int, battery_ah: float) -> None:
        self.frontier, self.at = frontier, at
        steps = battery_ah * STEP ** np.arange(-NEIGHBOUR_STEPS, STEPS_UP + NEIGHBOUR_STEPS)
        # To four digits, upwards, so that what is reported is what was tried.
        scale = 10.0 ** (3 - np.floor(np.log10(steps)))
        self._steps_ah = np.ceil(steps * scale - 1e-6) / scale
        self.up_ah = self._steps_ah[NEIGHBOUR_STEPS:-NEIGHBOUR_STEPS]
        self._beside = [other for other in (at - 1, at + 1) if 0 <= other < frontier.sizes.size]

    def climb(self) -> None:
        """Judge every step and all that stands beside it, in one run."""
        wattages = [np.full(self._steps_ah.size, self.at), *(np.full(STEPS_UP, other) for other in self._beside)]
        self.frontier.judge(
            np.concatenate(wattages), np.concatenate((self._steps_ah, *[self.up_ah] * len(self._beside)))
        )

    def taken(self, why: str, there: list[Judged] | None, *, most_ah: float = np.inf) -> tuple[Recommended, int]:
        """The first step that other years bear out too, and its number; ``there`` is what the steps come to in them.

        None of up to ``most_ah``: the pair as found, and the reason says so.
        """
        watts = float(self.frontier.sizes[self.at])
        if there is None:
            return Recommended(watts, float(self.up_ah[0]), self._here(0).survival, None, why), 0
        steps = (k for k in range(STEPS_UP) if there[k].met and self._here(k).met and self.up_ah[k] <= most_ah * 1.0001)
        step = next(steps, None)
        if step is None:
            why += "; but other years of the same climate do not bear it out, nor any battery in range up to twice that"
            step = 0
        elif step > 0:
            why += f"; raised from {self.up_ah[0]:.4g} Ah because other years of the same climate asked for more"
        return Recommended(watts, float(self.up_ah[step]), self._here(step).survival, there[step].survival, why), step

    def neighbours(self, step: int) -> tuple[Neighbour, ...]:
        """One step of panel or battery to either side."""
        up_ah, at = float(self.up_ah[step]), self.at
        smaller, larger = (float(self._steps_ah[step + shift]) for shift in (0, 2 * NEIGHBOUR_STEPS))
        named = [("smaller panel", at - 1, up_ah), ("larger panel", at + 1, up_ah)]
        named = [entry for entry in named if entry[1] in self._beside]
        named += [("smaller battery", at, smaller), ("larger battery", at, larger)]
        judged = self.frontier.judge(np.array([entry[1] for entry in named]), np.array([entry[2] for entry in named]))
        return tuple(
            Neighbour(
                step=name,
                watts=float(self.frontier.sizes[index]),
                battery_ah=battery_ah,
                survival=pair.survival,
                work_done=None if np.isnan(pair.work_done) else pair.work_done,
                target_met=pair.met,
            )
            for (name, index, battery_ah), pair in zip(named, judged, strict=True)
        )

    def _here(self, step: int) -> Judged:
        return self.frontier.judge(np.array([self.at]), self.up_ah[[step]])[0]
