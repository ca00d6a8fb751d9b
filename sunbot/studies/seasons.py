"""`season`: the worst season, the worst dark spell, and how much work per day each month affords."""

from __future__ import annotations

from dataclasses import dataclass
from datetime import date, timedelta, timezone
from typing import Any

import numpy as np
import pandas as pd

from ..calendar import standard_offset_h
from ..inputs.robot import Robot
from ..light import SunField, sun_field
from ..sky import Weather, weather_for
from ..types import Caution, FloatArray
from .behind_window import BehindWindow, behind_window
from .chain import Chain
from .checking import CheckResult, check_with_nearness
from .dark_spells import SPELL_DAYS, DarkSpell, dark_spells, days_of
from .effort import Watcher
from .heading_costs import HeadingCost, heading_costs
from .levers import Lever, levers
from .plain import plain_document
from .tilts import BestMount, best_mount
from .work_calendar import WorkCalendar, work_calendar

FORTNIGHT_DAYS = 14
FAN_PERCENT = (10, 50, 90)


@dataclass(frozen=True, eq=False)
class WorstFortnight:
    """The fortnight with the least charge of the year that goes worst.

    start, year_start : its first day, and that of its energy year (or deployment).
    steps : DataFrame by step, index ``time``: middle of the step on the site's standard clock;
    columns as in the CSV of ``check``.
    """

    start: date
    year_start: date
    steps: pd.DataFrame


@dataclass(frozen=True, eq=False)
class SeasonResult:
    """The answer of `season`; ``check`` holds the months, the charge and the verdict of the robot as filed.

    charge_fan : DataFrame by month: lowest charge of the month that 10, 50 and 90 % of the years stay under.
    daily_harvest_wh : (n_years, n_days) harvest offered, NaN where a year has no such day.
    best_mount, sun : None behind a window. calendar : None without skippable work.
    headings : empty where no heading matters. window : sun, lux and distance from the glass; None in the open.
    """

    check: CheckResult
    charge_fan: pd.DataFrame
    dark_spells: tuple[DarkSpell, ...]
    daily_harvest_wh: FloatArray
    worst: WorstFortnight
    best_mount: BestMount | None
    headings: tuple[HeadingCost, ...]
    sun: SunField | None
    calendar: WorkCalendar | None
    levers: tuple[Lever, ...]
    window: BehindWindow | None = None

    @property
    def met(self) -> bool:
        """Whether the robot as filed meets the target."""
        return self.check.met

    @property
    def robot(self) -> Robot:
        """The robot asked about."""
        return self.check.robot

    @property
    def months(self) -> pd.DataFrame:
        """Month by month, as in `check`."""
        return self.check.months

    @property
    def cautions(self) -> tuple[Caution, ...]:
        """As in `check`."""
        return self.check.cautions

    def to_dict(self) -> dict[str, Any]:
        """The JSON document of ``sunbot season --json``: that of check and the words of the season."""
        spells = [spell.to_dict() | {"wh_per_w": spell.wh / self.robot.watts} for spell in self.dark_spells]
        mount, calendar = self.best_mount, self.calendar
        return self.check.to_dict() | plain_document(
            {
                "charge_fan": self.charge_fan.reset_index().to_dict(orient="records"),
                "dark_spells": spells,
                "worst_fortnight": {
                    "from": self.worst.start.isoformat(),
                    "days": FORTNIGHT_DAYS,
                    "year_from": self.worst.year_start.isoformat(),
                },
                "calendar": [] if calendar is None else [entry.__dict__ for entry in calendar.entries],
                "calendar_met": None if calendar is None else calendar.confirmed,
                "levers": [lever.to_dict() for lever in self.levers],
                "best_tilt_deg": None if mount is None else mount.tilt_deg,
                "best_mount": None if mount is None else mount.__dict__,
                "headings": [cost.to_dict() for cost in self.headings],
                "sun_hours": [] if self.sun is None else sun_hours(self.sun).reset_index().to_dict(orient="records"),
            }
            | ({} if self.window is None else {"window": self.window.to_dict()})
        )


def season(
    robot: Robot,
    *,
    weather: Weather | None = None,
    years: int = 50,
    seed: int = 1,
    watcher: Watcher | None = None,
) -> SeasonResult:
    """The worst season of ``robot`` at its site, what it can do in each month, and what would move the answer.

    Parameters
    ----------
    weather : Weather, optional
        Light it is held against; left out, ``weather_for(robot.site, years=years, seed=seed)``.
    years, seed : int
        Weather years to try, and the seed of everything drawn.
    watcher : callable, optional
        Is told the share of the work that is done, 0 to 1.

    Raises
    ------
    InputError
        The site's weather cannot be used, or no such robot can be built.
    """
    watched = watcher or (lambda share: None)
    weather = weather_for(robot.site, years=years, seed=seed) if weather is None else weather
    chain = Chain(weather, seed=seed)
    checked = check_with_nearness(chain, robot, years=years, seed=seed, trace=True)
    daily_wh, spells = _dark_spells(checked, seed=seed)
    watched(0.3)
    calendar = work_calendar(chain, robot)
    watched(0.7)
    moved = levers(chain, robot)
    watched(0.85)
    mount = best_mount(chain, robot)
    watched(0.95)
    return SeasonResult(
        check=checked,
        charge_fan=_charge_fan(checked),
        dark_spells=spells,
        daily_harvest_wh=daily_wh,
        worst=_worst_fortnight(checked),
        best_mount=mount,
        headings=heading_costs(chain, robot),
        sun=None if robot.window is not None else sun_field(robot),
        calendar=calendar,
        levers=moved,
        window=None if robot.window is None else behind_window(robot, weather=weather, years=years, seed=seed),
    )


def sun_hours(sun: SunField) -> pd.DataFrame:
    """Hours a day by month: the sun above the level horizon, behind the site's, and behind the robot's own parts."""
    table = pd.DataFrame(
        {
            "up_h_day": sun.hours_a_day(sun.up),
            "behind_horizon_h_day": sun.hours_a_day(sun.behind_horizon),
            "behind_robot_h_day": sun.hours_a_day(sun.behind_robot),
        },
        index=pd.RangeIndex(1, 13, name="month"),
    )
    return table


def _dark_spells(checked: CheckResult, *, seed: int) -> tuple[FloatArray, tuple[DarkSpell, ...]]:
    """Harvest of each day, and its darkest spells; those of a deployment stay within it."""
    trace, weather = checked.trace, checked.weather
    if trace is None:
        raise RuntimeError("the season needs a check with its trace")
    daily_wh, dates = days_of(trace.harvest_w, weather.times, checked.lanes, zone=weather.place.time_zone)
    longest = int((~np.isnan(daily_wh)).sum(axis=1).min())
    lengths = tuple(days for days in SPELL_DAYS if days <= longest)
    ring = checked.robot.deployment is None
    return daily_wh, dark_spells(daily_wh, dates, lengths=lengths, seed=seed, ring=ring)


def _charge_fan(checked: CheckResult) -> pd.DataFrame:
    lowest = checked.balance.lowest_soc
    if lowest is None:
        raise RuntimeError("the balance kept no charge")
    out = ~checked.months["lowest_soc"].isna().to_numpy()
    fan = np.where(out[:, None], np.percentile(lowest[:, :, 0], FAN_PERCENT, axis=1).T, np.nan)
    return pd.DataFrame(fan, columns=[f"p{percent}" for percent in FAN_PERCENT], index=checked.months.index)


def _worst_fortnight(checked: CheckResult) -> WorstFortnight:
    """In the year with most unserved energy (else the lowest charge), the fortnight with the least charge."""
    trace, lanes, balance, weather = checked.trace, checked.lanes, checked.balance, checked.weather
    if trace is None or balance.lowest_soc is None:
        raise RuntimeError("the season needs a check with its trace")
    if checked.plane_w_m2 is None or checked.cell_temp_c is None:
        raise RuntimeError("the season needs the light of its check")
    unserved = balance.unserved_wh[:, :, 0].sum(axis=0)
    lowest = balance.lowest_soc[:, :, 0].min(axis=0)
    year = int(np.argmax(unserved)) if unserved.max() > 0 else int(np.argmin(lowest))
    there = np.flatnonzero(lanes.step_h[:, year] > 0)
    n_steps = min(round(FORTNIGHT_DAYS * 24.0 / weather.step_h), there.size)
    total = np.concatenate(([0.0], np.cumsum(trace.soc[there, year])))
    starts = np.arange(0, there.size - n_steps + 1, round(24.0 / weather.step_h))  # whole days
    first = int(starts[np.argmin(total[starts + n_steps] - total[starts])])
    at = there[first : first + n_steps]
    rows = lanes.row[at, year]
    clock = timezone(timedelta(hours=standard_offset_h(weather.place.time_zone)))
    steps = pd.DataFrame(
        {
            "ghi_w_m2": weather.table["ghi"].to_numpy()[rows],
            "plane_w_m2": checked.plane_w_m2[rows],
            "cell_temp_c": checked.cell_temp_c[rows],
        }
        | {
            name: getattr(trace, name)[at, year]
            for name in ("harvest_w", "spilled_w", "demand_w", "served_w", "soc", "box_temp_c", "on")
        },
        index=weather.times[rows].tz_convert(clock).rename("time"),
    )
    year_start = weather.times[lanes.row[there[0], year]].tz_convert(clock).date()
    return WorstFortnight(start=steps.index[0].date(), year_start=year_start, steps=steps)
