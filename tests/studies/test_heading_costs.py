"""What headings and masts cost, by month."""

import numpy as np
import pytest

from sunbot.sky import weather_for
from sunbot.studies.chain import Chain
from sunbot.studies.heading_costs import heading_costs
from sunbot.studies.tilts import month_harvest_wh

MAST = [[150, 210, 70]]


def panel(robots, **update):
    return robots.robot().panels[0].model_copy(update=update)


@pytest.fixture(scope="module")
def chain(robots):
    return Chain(weather_for(robots.hill(), years=1))


def by_policy(costs):
    return {cost.policy: cost.harvest_wh_day for cost in costs}


def test_a_flat_deck_has_no_heading_to_choose(robots, chain):
    """Flat and with nothing on it: no table, for every policy gives the same."""
    flat = robots.robot(heading="roams").model_copy(update={"panels": (panel(robots, tilt_deg=0.0),)})
    assert heading_costs(chain, flat) == ()
    harvests = [
        month_harvest_wh(chain, flat.model_copy(update={"heading": heading})) for heading in ("fixed", "turns-to-sun")
    ]
    assert harvests[0] == pytest.approx(harvests[1], rel=1e-9)


def test_a_lid_that_lies_flat_at_night_has_one(robots, chain):
    """Flat by default, opened by day: heading matters while it is open."""
    lid = panel(robots, tilt_deg=0.0, tilt_hours=((9, 15, 60),))
    found = by_policy(heading_costs(chain, robots.robot().model_copy(update={"panels": (lid,)})))
    assert np.nanmax(found["turns to sun"] / found["worst parked"]) > 1.2


def test_policies_stand_in_their_order(robots, chain):
    """Turning to the sun beats any fixed heading to 0.1 % in each month; roaming lies between best and worst parked."""
    robot = robots.robot(heading="roams", parked="mean")
    found = by_policy(heading_costs(chain, robot))
    assert (found["turns to sun"] >= 0.999 * found["best fixed"]).all()
    assert (found["as filed"] < found["turns to sun"]).all()
    assert (found["as filed"] > found["worst parked"]).all()
    assert found["as filed"][11] < found["best fixed"][11]


def test_the_best_fixed_heading_faces_the_noon_sun(robots, chain):
    """Without a horizon the best of 16 headings leans south within one step, and none has a better worst month."""
    robot = robots.robot(heading="fixed", heading_deg=40.0)
    best = next(cost for cost in heading_costs(chain, robot) if cost.policy == "best fixed")
    assert best.heading_deg == pytest.approx(180.0, abs=22.5)
    for nose in (best.heading_deg - 22.5, best.heading_deg + 22.5):
        beside = month_harvest_wh(chain, robot.model_copy(update={"heading_deg": nose}))
        assert beside.min() <= best.harvest_wh_day.min()


def test_a_mast_costs_and_its_absence_is_the_bare_robot(robots, chain):
    """With a mast there is a line without it: never less light, and that of the robot filed without."""
    bare = robots.robot(heading="roams", parked="mean")
    masted = bare.model_copy(update={"panels": (panel(robots, obstructions=tuple(map(tuple, MAST))),)})
    found = by_policy(heading_costs(chain, masted))
    assert (found["as filed, nothing in the way"] > found["as filed"]).all()
    assert found["as filed, nothing in the way"] == pytest.approx(month_harvest_wh(chain, bare), rel=1e-9)
    assert "as filed, nothing in the way" not in by_policy(heading_costs(chain, bare))
    assert np.isfinite(list(found.values())).all()
