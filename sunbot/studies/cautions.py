"""What the reader of an answer must know before trusting it."""

from __future__ import annotations

from collections.abc import Iterator

import numpy as np

from ..demand import rail_cautions
from ..harvest import supply_cautions
from ..inputs.robot import Robot
from ..inputs.site import Site
from ..light import ground_cautions, window_cautions
from ..shares import exact_share, share_text
from ..sky import Weather
from ..storage import Balance, Pack, resistance_ohm
from ..types import Caution, FloatArray
from .chain import Chain
from .heating import box_of, heater_cautions, two_digits
from .pack_cautions import pack_cautions
from .statistics import wilson_interval, years_to_settle
from .verdict import Verdict

BLOCKED_NOTED = 0.01
"""Share of the year's harvest offered to a battery too cold or too warm to be charged that is worth a word."""

CHARGING_OVER_REST = 1.08
"""Common practice: a pack on charge that no voltage holds (NiMH) stands at most so much above its full rest voltage."""

MOST_YEARS = 500
"""As many weather years can be asked for."""

SAFETY = {
    "lithium": "Lithium cells need a protection circuit, a fuse at the pack, and no charging below freezing: charging "
    "a cold cell plates metal inside it and can start a fire later. Keep them from crushing, water and heat.",
    "lead-acid": "Charging lead-acid gives off hydrogen, which explodes: vent the box and keep sparks away; "
    "the acid burns.",
    "nimh": "A sealed pack on a charger without cut-off overheats; short circuits burn: fuse it at the pack.",
}
SAFETY_TAIL = " Local codes and licensed practice go first."


def standing_cautions(chain: Chain, robot: Robot, *, sized: Robot | None = None) -> tuple[Caution, ...]:
    """Cautions that hold whatever the outcome: weather, panels and controller, rails, battery.

    sized : the robot with panels and battery of another size, for what goes by the size of the pack.
    """
    sized = robot if sized is None else sized
    return (
        *chain.weather.cautions,
        *ground_cautions(robot),
        *window_cautions(robot, chain.lights(robot)),
        *supply_cautions(
            robot,
            chain.weather_at(robot),
            lights=chain.lights(robot),
            supply=chain.supply(robot),
            within=chain.out(robot),
        ),
        *_rails(chain, sized),
        *pack_cautions(chain, sized, filed=robot),
        *_battery(chain, robot),
    )


def check_cautions(
    chain: Chain, robot: Robot, balance: Balance, verdict: Verdict, *, survival_coarse: float
) -> tuple[Caution, ...]:
    """All cautions of a check: those of its outcome and the standing ones.

    ``survival_coarse`` : share alive with 0.15 less light, told where the climate is read off the world table.
    """
    several = chain.weather.kind in ("generated", "record")
    outcome = _outcome(robot, balance, verdict) if several else _of_the_pack(balance)
    standing = standing_cautions(chain, robot)
    told = {caution.code for caution in standing}  # with more figures than the outcome has
    return (
        *(caution for caution in outcome if caution.code not in told),
        *coarse_climate(robot.site, chain.weather, survival=survival_coarse),
        *standing,
    )


def off_the_world_table(site: Site, weather: Weather) -> bool:
    """Whether the light is read off the coarse table of the world."""
    return site.climate is not None and site.climate.coarse and weather.kind == "generated"


def coarse_climate(site: Site, weather: Weather, *, survival: float | None = None) -> Iterator[Caution]:
    """That the light is read off the table of the world; ``survival`` : share alive with 0.15 less light."""
    if not off_the_world_table(site, weather):
        return
    with_less = (
        "" if survival is None else f" With 15 % less light the robot is alive in {share_text(survival)} of years."
    )
    yield Caution(
        "coarse-climate",
        "climate",
        "The light is read off a coarse table of the world: most months lie within 15 %, coasts and mountains further "
        f"off.{with_less} Take a record of the place before you decide.",
    )


def few_years(survived: int, years: int, *, robot: Robot) -> Iterator[Caution]:
    """Whether as many years leave it open that the target is met, and how many would not."""
    target = robot.target.survival
    low, _ = wilson_interval(survived, years)
    if low >= target:
        return
    noun = "years" if robot.deployment is None else "deployments"
    one = "1 year leaves" if years == 1 else f"{years} {noun} leave"
    enough, aim = years_to_settle(target, survived / years), exact_share(target)
    if enough is None:
        more = f"; at that share of failures no number of years settles {aim}" if survived < years else ""
    else:
        more = "without a failure" if survived == years else "with failures as rare"
        more = f"; {enough} {more} would settle {aim}"
        more += f" (--years {enough})" if enough <= MOST_YEARS else ", more than can be run"
    yield Caution("few-years", "survival", f"{one} room for a true share of {share_text(low, target=target)}{more}.")


def _outcome(robot: Robot, balance: Balance, verdict: Verdict) -> Iterator[Caution]:
    if verdict.survival_met[0]:
        yield from few_years(int(verdict.years_survived[0]), verdict.years, robot=robot)
    yield from _of_the_pack(balance)


def _of_the_pack(balance: Balance) -> Iterator[Caution]:
    if balance.cannot_give[0]:
        yield Caution(
            "pack-too-weak",
            "battery",
            "At times the loads ask for more than the pack can give through its resistance; they are dropped then. "
            "Take a larger pack or one of lower resistance.",
        )
    if not balance.settled[0]:
        yield Caution(
            "not-periodic",
            "battery",
            "The years did not settle into a ring: the charge at their seam still differed after 20 rounds, and the "
            "worse of the last two is given. The robot lives on the edge.",
        )


def _beyond_its_window(pack: Pack, box_c: FloatArray, *, step_h: float, years: int) -> Iterator[Caution]:
    """Whether the box gets colder or hotter than the cells are made to work in; the balance does not cut them off."""
    kind = pack.kind
    for code, beyond, bounds in (
        ("battery-too-cold", box_c < kind.work_min_c, f"below {kind.work_min_c:g} degC, down to {box_c.min():.0f},"),
        ("battery-too-hot", box_c > kind.work_max_c, f"above {kind.work_max_c:g} degC, up to {box_c.max():.0f},"),
    ):
        if beyond.any():
            yield Caution(
                code,
                "battery",
                f"The box is {bounds} for {two_digits(beyond.sum() * step_h / years)} h a year. Such cells are not "
                "made to work there: they may fail, or their protection may cut the robot off, and the answer counts "
                "neither.",
            )


def _rails(chain: Chain, robot: Robot) -> tuple[Caution, ...]:
    pack, air_c = chain.pack(robot), chain.while_out(robot, chain.weather_at(robot).table["temp_air"].to_numpy())
    coldest_c, hottest_c = (float(extreme) + robot.battery.box_rise_c for extreme in (air_c.min(), air_c.max()))
    cutoff_v, full_v = (float(np.interp(soc, pack.curve.soc, pack.curve.rest_v)) for soc in (pack.cutoff_soc, 1.0))
    return rail_cautions(
        robot,
        lowest_v=cutoff_v,
        highest_v=pack.cells * top_v if np.isfinite(top_v := pack.kind.top_v) else CHARGING_OVER_REST * full_v,
        resistance_ohm=resistance_ohm(pack, robot.battery.capacity_ah, temp_c=max(coldest_c, -20.0)),
        soc_nodes=pack.curve.soc,
        rest_v_nodes=pack.curve.rest_v,
        hottest_c=hottest_c,
    )


def _battery(chain: Chain, robot: Robot) -> Iterator[Caution]:
    battery, weather = robot.battery, chain.weather_at(robot)
    pack = chain.pack(robot)
    box = box_of(chain, robot)
    cold_c, box_c, offer_w = (chain.while_out(robot, x) for x in (box.box_c, box.warm_c, chain.offer_w(robot)))
    offered = float(offer_w.sum())
    for code, blocked, limit_c, word in (
        ("frost", box_c < pack.charge_min_c, pack.charge_min_c, "below"),
        ("heat", box_c > pack.charge_max_c, pack.charge_max_c, "above"),
    ):
        share = float(offer_w[blocked].sum()) / offered if offered > 0 else 0.0
        if share > BLOCKED_NOTED:
            yield Caution(
                code,
                "battery",
                f"{share_text(share)} of the harvest comes while the box is {word} {limit_c:g} degC, when these cells "
                "must not be charged; it can then only feed the loads. "
                + ("Think of box_rise_c, heater_w or another chemistry." if code == "frost" else "Shade the box."),
            )
    yield from heater_cautions(battery, cold_c, box_c, step_h=weather.step_h, years=weather.n_years)
    yield from _beyond_its_window(pack, box_c, step_h=weather.step_h, years=weather.n_years)
    thresholds = any(load.skip_below_soc is not None for load in robot.loads)
    if battery.chemistry == "lifepo4" and thresholds:
        yield Caution(
            "flat-voltage",
            "battery",
            "The voltage of this chemistry hardly tells its charge between 20 and 90 %: thresholds by charge need a "
            "counter of ampere-hours on board, not a voltmeter.",
        )
    family = "lithium" if battery.chemistry in ("lifepo4", "li-ion") else battery.chemistry
    yield Caution("safety", f"{battery.chemistry} battery", SAFETY[family] + SAFETY_TAIL)
