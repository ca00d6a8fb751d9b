"""Met or not met: the rounding of years, what counts as lost, and work by month."""

from __future__ import annotations

import numpy as np
import pytest

from sunbot.inputs.robot import Target
from sunbot.storage import Balance
from sunbot.studies.verdict import lost_years, verdict_on, years_needed


def outcome(unserved_wh, *, hours_out=None, asked_wh=None, skipped_wh=None):
    """A balance of (n_years, n_designs) unserved energy, all of it in December, and work by month of one year."""
    unserved = np.zeros((12, *np.shape(unserved_wh)))
    unserved[11] = unserved_wh
    out = np.zeros_like(unserved)
    out[11] = 0.0 if hours_out is None else hours_out
    by_month = np.zeros_like(unserved)
    asked, skipped = by_month.copy(), by_month.copy()
    if asked_wh is not None:
        asked += np.asarray(asked_wh)[:, None, None]
        skipped += np.asarray(skipped_wh)[:, None, None]
    designs = unserved.shape[2]
    return Balance(
        unserved_wh=unserved,
        skipped_wh=skipped,
        work_asked_wh=asked,
        hours_out=out,
        visits=np.zeros(unserved.shape[1:]),
        settled=np.ones(designs, dtype=bool),
        cannot_give=np.zeros(designs, dtype=bool),
    )


@pytest.mark.parametrize(
    ("survival", "years", "needed"),
    [(0.95, 20, 19), (0.95, 50, 48), (0.95, 1, 1), (0.9, 10, 9), (0.7, 10, 7), (0.07, 100, 7), (1.0, 50, 50)],
)
def test_years_needed_are_rounded_up_but_not_by_a_float(survival, years, needed):
    """0.95 x 20 is 19 years although it is a hair more in binary; 47.5 of 50 means 48."""
    assert years_needed(Target(survival=survival), years) == needed


def test_a_year_is_lost_above_a_milliwatt_hour():
    """A milliwatt-hour is rounding, two are an outage."""
    lost = lost_years(outcome([[0.0], [0.9e-3], [2e-3]]), Target())
    assert lost[:, 0].tolist() == [False, False, True]


def test_with_hours_out_allowed_only_their_sum_counts():
    """Two hours out are forgiven where two are allowed, more are not, whatever the energy."""
    balance = outcome([[50.0], [50.0]], hours_out=[[2.0], [2.1]])
    assert lost_years(balance, Target(hours_out=2.0))[:, 0].tolist() == [False, True]


def test_the_worst_month_decides_on_work_and_months_without_work_do_not():
    """Work is judged by its worst month; a month in which none is asked says nothing."""
    asked, skipped = np.zeros(12), np.zeros(12)
    asked[:3], skipped[:3] = 100.0, (0.0, 25.0, 10.0)
    verdict = verdict_on(outcome([[0.0]], asked_wh=asked, skipped_wh=skipped), Target(work_done=0.8))
    assert verdict.work_done[0] == pytest.approx(0.75)
    assert (bool(verdict.survival_met[0]), bool(verdict.work_met[0])) == (True, False)
    assert not verdict.target_met[0]
    assert np.isnan(verdict.month_work_done[3:, 0]).all()


def test_where_no_work_is_asked_none_is_missing():
    """Without skippable work the share is undefined and the target rests on survival alone."""
    verdict = verdict_on(outcome([[0.0], [0.0]]), Target())
    assert np.isnan(verdict.work_done[0])
    assert verdict.target_met[0]


def test_many_designs_are_judged_like_one():
    """Each column of a balance gets the verdict it would get alone."""
    unserved = np.random.default_rng(3).choice([0.0, 5.0], size=(10, 6), p=[0.8, 0.2])
    together = verdict_on(outcome(unserved), Target(survival=0.8))
    for design in range(6):
        alone = verdict_on(outcome(unserved[:, [design]]), Target(survival=0.8))
        assert together.years_survived[design] == alone.years_survived[0] == (unserved[:, design] == 0).sum()
        assert together.target_met[design] == alone.target_met[0] == ((unserved[:, design] == 0).sum() >= 8)
