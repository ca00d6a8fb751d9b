"""The one search behind every "smallest that does"."""

import numpy as np
import pytest

from sunbot.studies.search import smallest


def over(thresholds, tried=None):
    """Candidates at or above a threshold of each case meet the target."""

    def meets(cases, grid):
        if tried is not None:
            tried.append(grid.size)
        return grid >= np.asarray(thresholds)[cases][:, None]

    return meets


@pytest.mark.parametrize("rel", [0.002, 0.01, 0.05])
def test_the_smallest_is_within_the_ratio_asked_for_and_was_tried(rel):
    """The answer meets the target, and what is smaller by more than the ratio does not."""
    rng = np.random.default_rng(1)
    thresholds = np.exp(rng.uniform(np.log(0.02), np.log(900), 40))
    found = smallest(over(thresholds), np.full(40, 0.01), np.full(40, 1000.0), rel=rel)
    assert (found >= thresholds).all()
    assert (found <= thresholds * (1 + rel) * 1.0005).all()
    assert [float(f"{x:.4g}") for x in found] == pytest.approx(found, rel=1e-12)


def test_the_ends_of_the_range_are_answers():
    """Where even the low end does it is the answer; where the high end fails there is none."""
    found = smallest(over([0.5, 50.0, 3.0]), np.full(3, 1.0), np.full(3, 10.0))
    assert found[0] == 1.0
    assert np.isnan(found[1])
    assert found[2] == pytest.approx(3.0, rel=0.01)


def test_two_rounds_are_enough_for_one_per_cent_of_a_fivefold_range():
    """A wide round costs little more than a narrow one: the search asks seldom, and much at once."""
    tried = []
    smallest(over(np.linspace(1.1, 4.9, 12), tried), np.full(12, 1.0), np.full(12, 5.0), rel=0.01, width=16)
    assert len(tried) == 2
    assert sum(tried) < 12 * 40


def test_an_island_of_success_below_a_failure_is_not_taken():
    """From the answer on every larger candidate that was tried meets the target."""

    def meets(cases, grid):
        return ((grid > 2) & (grid < 3)) | (grid >= 6)

    assert smallest(meets, np.array([1.0]), np.array([20.0]), width=30)[0] == pytest.approx(6.0, rel=0.01)
