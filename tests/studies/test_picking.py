"""The smallest battery for every panel: held against check, the laws, and other years."""

from dataclasses import replace

import numpy as np
import pytest

from sunbot.errors import InputError
from sunbot.shares import share_text
from sunbot.sky.other_years import other_years
from sunbot.studies import pick
from sunbot.studies.chain import Chain
from sunbot.studies.checking import check_on
from sunbot.studies.deficit import deficit_to_cover_wh, largest_deficit_wh
from sunbot.studies.effort import Effort
from sunbot.studies.frontier import Frontier
from sunbot.studies.pick_result import Pair
from sunbot.studies.picking import _choose
from sunbot.studies.resizing import resized

LIGHT = ("ghi", "dni", "dhi")
YEARS = 5
SIZES = (25.0, 40.0, 60.0, 90.0)


def check(robot, *, weather):
    """A check without its ways out, which these tests do not ask for."""
    return check_on(Chain(weather), robot, years=weather.n_years, seed=1)


@pytest.fixture(scope="module")
def place(robots):
    return robots.quick_weather(robots.hill(), years=YEARS)


@pytest.fixture(scope="module")
def picked(robots, place):
    return pick(robots.robot(work_w=3.0), watts=SIZES, weather=place, also=("map", "controllers"))


def test_every_pair_fed_back_into_check_meets_the_target_and_three_per_cent_less_does_not(robots, place, picked):
    """A pair is what its own robot file would come to, in the energy years that robot would have."""
    pairs = [pair for pair in picked.pairs if pair.battery_ah is not None]
    assert len(pairs) >= 3
    for pair in pairs:
        sized = check(resized(picked.robot, watts=pair.watts, battery_ah=pair.battery_ah), weather=place)
        assert sized.met
        assert sized.verdict.survival[0] == pair.survival
        assert sized.verdict.work_done[0] == pytest.approx(pair.work_done, abs=1e-9)
        assert not check(resized(picked.robot, watts=pair.watts, battery_ah=0.97 * pair.battery_ah), weather=place).met


def test_a_wattage_on_the_list_gives_the_supply_of_its_own_robot_file(robots, place):
    """Scaling on the list and scaling the data sheet are the same, for every kind of controller."""
    for kind in ("mppt", "pwm", "direct"):
        filed = robots.robot(controller={"kind": kind, "max_charge_a": 1.5})
        chain = Chain(place)
        listed = chain.supply(filed, watts=np.array([10.0, 33.0]), accounts=False)
        own = chain.supply(resized(filed, watts=33.0))
        # 1e-4 of the panel: the cells of the larger sheet are fitted anew.
        assert listed.offer_w[:, 1] == pytest.approx(own.offer_w[:, 0], abs=33.0 * 1e-4)


def test_the_recommended_pair_and_its_neighbours(picked):
    """The lightest pair where masses are given; beside it a smaller battery loses, a larger one does not."""
    taken = picked.recommended
    have = [pair for pair in picked.pairs if pair.battery_ah is not None]
    assert taken.watts == min(have, key=lambda pair: pair.mass_kg).watts
    assert "lightest" in taken.why
    assert taken.confirmed is not None
    beside = {neighbour.step: neighbour for neighbour in picked.neighbours}
    assert beside["smaller battery"].survival <= taken.survival <= beside["larger battery"].survival
    assert beside["larger battery"].target_met


def test_the_share_in_other_years_is_what_check_finds_there(robots):
    """`confirmed` is the share of the seed's next as many years: held against check on those."""
    filed = robots.robot()
    result = pick(filed, watts=(40.0,), years=3)
    pair = result.pairs[0]
    others = other_years(result.weather, filed.site, seed=1)
    assert not np.allclose(others.table["ghi"], result.weather.table["ghi"])
    sized = resized(filed, watts=40.0, battery_ah=pair.battery_ah)
    there = check(sized, weather=others)
    assert there.verdict.survival[0] == pair.confirmed
    assert there.met == pair.confirmed_met


def test_a_shortfall_is_what_check_finds_with_the_largest_battery(robots, place):
    """Of a panel for which no battery in range does: the share alive with the largest one, below the target."""
    filed = robots.robot()
    result = pick(filed, watts=(1.0, 40.0), battery_ah=(0.5, 1.0), weather=place)
    dark, short = result.shortfalls
    assert (dark.watts, dark.battery_ah, dark.survival) == (1.0, None, None)
    assert (short.watts, short.battery_ah) == (40.0, 1.0)
    found = check(resized(filed, watts=40.0, battery_ah=1.0), weather=place)
    assert short.survival == float(found.verdict.survival[0]) < filed.target.survival
    # Of the panel no battery was tried for, even the largest that is looked for without a range does not do.
    most_ah = pick(filed, watts=(40.0,), weather=place).battery_range_ah[1]
    assert not check(resized(filed, watts=1.0, battery_ah=most_ah), weather=place).met


def test_a_robot_is_held_to_the_target_in_other_years_too(robots):
    """Where other years ask for more, the recommended battery is raised and says so; then it survives them."""
    result = pick(robots.robot(survival=1.0), watts=(25.0, 40.0), weather=None, years=6)
    taken = result.recommended
    pair = next(pair for pair in result.pairs if pair.watts == taken.watts)
    assert pair.confirmed < 1.0, "the case no longer is one: as sized, it survives the other years too"
    assert taken.battery_ah > pair.battery_ah * 1.01
    assert f"raised from {pair.battery_ah:.4g} Ah" in taken.why
    assert taken.confirmed == 1.0


def test_a_robot_that_survives_other_years_too_is_left_as_sized(robots):
    """Where other years ask for no more, the recommended battery is the smallest, and nothing is said of raising."""
    result = pick(robots.robot(survival=1.0), watts=(25.0, 40.0), weather=None, years=3)
    taken = result.recommended
    pair = next(pair for pair in result.pairs if pair.watts == taken.watts)
    assert pair.confirmed == 1.0, "the case no longer is one: other years ask for more"
    assert taken.battery_ah == pair.battery_ah
    assert "raised" not in taken.why


def test_controllers_are_compared_and_a_tracker_never_needs_more_than_the_others(picked):
    """Behind a tracker the same panel gives at least as much, so its battery is no larger."""
    options = {option.kind: option for option in picked.controllers}
    assert set(options) == {"direct", "pwm", "mppt"}
    for kind in ("direct", "pwm"):
        for best, other in zip(options["mppt"].pairs, options[kind].pairs, strict=True):
            if other.battery_ah is not None:
                assert best.battery_ah <= other.battery_ah * 1.011
    assert set(picked.pairs_table["controller"]) == {"direct", "pwm", "mppt"}


def test_the_map_agrees_with_the_pairs(robots, place, picked):
    """Above the smallest battery the map is at the target; well below, where no work has to be done, it is not."""
    idle = pick(robots.robot(), watts=SIZES, weather=place, also=("map",))
    for result in (picked, idle):
        over = result.survival_map
        assert over.survival.shape == (over.battery_ah.size, over.watts.size)
        assert all(pair.battery_ah is not None for pair in result.pairs)
        for column, pair in enumerate(result.pairs):
            enough, short = over.battery_ah > pair.battery_ah * 1.01, over.battery_ah < pair.battery_ah * 0.97
            assert enough.any()
            assert short.any()
            assert (over.survival[enough, column] >= 0.8 - 1e-9).all()
            # A battery may be held up by the work that is to be done, long after the robot would live.
            if result is idle:
                assert (over.survival[short, column] < 0.8 - 1e-9).all()


def test_the_words_of_the_document(picked):
    """JSON words as promised; a pair out of range has a battery of null."""
    document = picked.to_dict()
    names = {"watts", "battery_ah", "survival", "confirmed", "work_done", "mass_kg", "price", "confirmed_met"}
    assert set(document["pairs"][0]) == names
    assert set(document["recommended"]) >= {"watts", "battery_ah", "confirmed", "why"}
    assert set(document["by_autonomy"]) >= {"watts", "battery_ah"}
    assert {"tool", "inputs", "cautions", "neighbours", "controllers"} <= set(document)


def test_a_range_is_kept_to_and_may_hold_nothing(robots, place):
    """With a range no battery outside it is tried; where none inside does, the pair is empty and the target not met."""
    result = pick(robots.robot(), watts=(20.0, 40.0), battery_ah=(0.5, 1.0), weather=place)
    assert not result.met
    assert [pair.battery_ah for pair in result.pairs] == [None, None]
    wide = pick(robots.robot(), watts=(40.0,), battery_ah=(1.0, 200.0), weather=place)
    free = pick(robots.robot(), watts=(40.0,), weather=place)
    assert wide.pairs[0].battery_ah == pytest.approx(free.pairs[0].battery_ah, rel=0.011)


def test_a_panel_that_gives_less_than_is_asked_has_no_battery(robots, place):
    """Over all years too little: no battery makes up for it, and none is searched for."""
    result = pick(robots.robot(load_w=3.0), watts=(2.0, 3.0), weather=place)
    assert not result.met


def test_how_sure_the_pair_is_goes_with_it(robots, place):
    """Five years leave the share open; on a coarse climate the pair's share in 15 % dimmer light is told."""
    robot = robots.robot(watts=40.0)
    climate = robot.site.climate.model_copy(update={"coarse": True})
    coarse = robot.model_copy(update={"site": robot.site.model_copy(update={"climate": climate})})
    found = pick(coarse, watts=(40.0,), weather=place)
    told = {caution.code: caution.text for caution in found.cautions}
    assert "5 years leave room" in told["few-years"]
    pair = resized(coarse, watts=found.recommended.watts, battery_ah=found.recommended.battery_ah)
    dimmer = replace(place, table=place.table.assign(**{name: 0.85 * place.table[name] for name in LIGHT}))
    share = check(pair, weather=dimmer).verdict.survival[0]
    assert f"the robot is alive in {share_text(share)} of years" in told["coarse-climate"]
    assert "coarse-climate" not in {caution.code for caution in pick(robot, watts=(40.0,), weather=place).cautions}


def test_a_deployment_is_sized_on_its_own_days(robots, place):
    """A summer deployment needs a smaller battery than the whole year."""
    summer = robots.robot(deployment={"from": "05-01", "to": "08-31"})
    short = pick(summer, watts=(20.0,), weather=place).pairs[0].battery_ah
    assert short < 0.8 * pick(robots.robot(), watts=(20.0,), weather=place).pairs[0].battery_ah


@pytest.mark.parametrize("wrong", [{"watts": []}, {"watts": [0.0, 10.0]}, {"battery_ah": (5.0, 5.0)}])
def test_sizes_that_are_none_are_refused(robots, place, wrong):
    """Sizes are above 0, a range has two ends."""
    with pytest.raises(InputError, match="Write"):
        pick(robots.robot(), weather=place, **wrong)


def test_the_same_inputs_give_the_same_document(robots, place):
    """Twice the same, with a helper beside or on a thread."""
    import threading

    first = pick(robots.robot(), watts=(20.0, 40.0), weather=place).to_dict()
    stop = threading.Event()
    other = threading.Thread(target=stop.wait)
    other.start()
    try:
        assert pick(robots.robot(), watts=(20.0, 40.0), weather=place).to_dict() == first
    finally:
        stop.set()
        other.join()


def test_the_watcher_is_told_shares_that_end_near_the_whole(robots, place):
    """Shares of the work lie between 0 and 1, begin low, and the last is told when next to nothing is left."""
    shares = []
    pick(robots.robot(), watts=(20.0, 40.0), weather=place, watcher=shares.append)
    assert len(shares) >= 3
    assert 0 < shares[0] < 0.5
    assert 0.7 < shares[-1] < 1


def grid_of(robots, place, filed):
    """Survival and met over 5 panels and 20 batteries, (n_ah, n_watts)."""
    sizes = filed.watts * np.array([0.6, 1.0, 1.5, 2.5, 4.0])
    frontier = Frontier(Chain(place), filed, sizes, effort=Effort(None, 1.0))
    ah = np.geomspace(1.0, 120.0, 20)
    watts_at, capacity = np.meshgrid(np.arange(5), ah)
    judged = frontier.judge(watts_at.ravel(), capacity.ravel())
    survival = np.array([pair.survival for pair in judged]).reshape(watts_at.shape)
    return survival, np.array([pair.met for pair in judged]).reshape(watts_at.shape)


@pytest.mark.parametrize("seed", range(12))
def test_more_panel_or_battery_never_harms_without_skippable_loads(robots, place, seed):
    """More Ah never lose survival, and more watts never ask for more battery: 12 random robots, 100 designs each."""
    survival, met = grid_of(robots, place, robots.random_robot(np.random.default_rng(seed)))
    assert (np.diff(survival, axis=0) >= 0).all()
    smallest = np.where(met.any(axis=0), met.argmax(axis=0), len(met))
    assert (np.diff(smallest) <= 0).all()


def test_the_running_deficit_is_that_of_a_lossless_store(robots, place):
    """Two years on a ring against a plain loop."""
    chain, filed = Chain(place), robots.robot()
    lanes = chain.lanes(filed)
    offer = chain.supply(filed).offer_w[:, 0, 0]
    asked = np.full(offer.size, 2.0)
    found = largest_deficit_wh(offer[:, None], asked, lanes)[:, 0]
    for year in range(YEARS):
        deficit = 0.0
        for _ in range(2):  # the year before, for its end, then the year itself
            lane = lanes.before[year] if _ == 0 else year
            worst = 0.0
            for row, hours in zip(lanes.row[:, lane], lanes.step_h[:, lane], strict=True):
                deficit = max(0.0, deficit + (asked[row] - offer[row]) * hours)
                worst = max(worst, deficit)
        assert found[year] == pytest.approx(worst, rel=1e-9)
    assert deficit_to_cover_wh(found[:, None], 4)[0] == np.sort(found)[3]


def _pairs(*batteries_ah):
    """Panels of 10, 20, 30 ... W with these batteries."""
    return tuple(Pair(10.0 * (at + 1), battery_ah) for at, battery_ah in enumerate(batteries_ah))


@pytest.mark.parametrize(
    ("batteries_ah", "watts", "says", "says_not"),
    [
        ((20, 8, 7), 20, ("a larger panel saves less", "a smaller panel costs more"), ("not tried",)),
        ((9, 8, 7), 10, ("a larger panel saves less", "smallest panel tried: smaller ones were not"), ("costs more",)),
        ((50, 24, 7), 30, ("a smaller panel costs more", "largest panel tried: larger ones were not"), ("saves less",)),
        ((None, 8, 7), 20, ("no battery in range does for the smaller ones tried",), ("costs more", "not tried")),
        ((None, 8), 20, ("the only panel tried that meets the target", "larger ones were not tried"), ("costs more",)),
        (
            (8,),
            10,
            ("the only panel tried", "no other panel was tried, --watts names more"),
            ("costs more", "saves less"),
        ),
    ],
)
def test_the_reason_speaks_only_of_panels_that_were_tried(batteries_ah, watts, says, says_not):
    """At the end of the wattages tried nothing is known of what lies beyond, and the reason says so."""
    best, why = _choose(_pairs(*batteries_ah))
    assert best.watts == watts
    assert all(words in why for words in says), why
    assert not any(words in why for words in says_not), why
