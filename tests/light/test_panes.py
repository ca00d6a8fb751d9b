"""What passes panes of glass."""

from __future__ import annotations

import numpy as np
import pytest

from sunbot.light.panes import GLASS_INDEX, panes_pass, panes_pass_at

PLAIN = {"thickness_mm": 4.0, "extinction_per_m": 16.0}


def traced(cosine, *, panes, thickness_mm, extinction_per_m, parallel):
    """Light followed face by face through the whole stack, all at once: fluxes both ways as one linear system."""
    inside = np.sqrt(1.0 - (1.0 - cosine**2) / GLASS_INDEX**2)
    outer, inner = (GLASS_INDEX * cosine, inside) if parallel else (cosine, GLASS_INDEX * inside)
    r = ((outer - inner) / (outer + inner)) ** 2
    kept = np.exp(-extinction_per_m * thickness_mm / 1000.0 / inside)
    faces = 2 * panes
    # unknowns: what runs forth and back in each of the layers 0 (outside) to faces (inside), at its front face
    n = faces + 1
    loss = [kept if layer % 2 else 1.0 for layer in range(n)]
    system, given = np.eye(2 * n), np.zeros(2 * n)
    given[0] = 1.0  # one unit comes in, nothing comes back from the room
    for face in range(faces):
        front, behind = face, face + 1
        system[behind, front] -= (1.0 - r) * loss[front]
        system[behind, n + behind] -= r
        system[n + front, front] -= r * loss[front] ** 2
        system[n + front, n + behind] -= (1.0 - r) * loss[front]
    return np.linalg.solve(system, given)[n - 1]


@pytest.mark.parametrize("panes", [1, 2, 3, 4])
@pytest.mark.parametrize("angle_deg", [0.0, 35.0, 60.0, 80.0])
def test_panes_added_one_by_one_are_the_stack_followed_face_by_face(panes, angle_deg):
    """Adding panes agrees with solving for every flux between all faces at once."""
    cosine = float(np.cos(np.radians(angle_deg)))
    both = [traced(cosine, panes=panes, parallel=parallel, **PLAIN) for parallel in (True, False)]
    assert float(panes_pass(cosine, panes=panes, **PLAIN)) == pytest.approx(np.mean(both), rel=1e-12)


def test_no_pane_stops_nothing_and_grazing_light_never_passes():
    """The two ends."""
    cosine = np.linspace(0.0, 1.0, 11)
    np.testing.assert_array_equal(panes_pass(cosine, panes=0, **PLAIN), 1.0)
    for extinction in (0.0, 32.0):
        for panes in (1, 4):
            assert panes_pass(np.array(0.0), panes=panes, thickness_mm=4.0, extinction_per_m=extinction) == 0.0


def test_more_glass_never_lets_more_through():
    """A further pane, a thicker and a greener one take light, at every angle."""
    cosine = np.linspace(0.01, 1.0, 50)
    last = np.ones(50)
    for panes in (1, 2, 3):
        passed = panes_pass(cosine, panes=panes, **PLAIN)
        assert (passed < last).all()
        assert (panes_pass(cosine, panes=panes, thickness_mm=8.0, extinction_per_m=16.0) < passed).all()
        assert (panes_pass(cosine, panes=panes, thickness_mm=4.0, extinction_per_m=32.0) < passed).all()
        last = passed


def test_the_table_holds_the_curve():
    """Read from the table the share is that of the formula, to 0.00001."""
    cosine = np.random.default_rng(4).uniform(0.0, 1.0, 5000)
    read = panes_pass_at(cosine, panes=2, **PLAIN)
    np.testing.assert_allclose(read, panes_pass(cosine, panes=2, **PLAIN), atol=1e-5)
