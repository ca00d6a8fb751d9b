"""An opening as a point in the room sees it."""

from __future__ import annotations

import numpy as np
import pytest

from sunbot.light.opening import ALL_AROUND, Opening, configuration_factor, directions_through, share_lit, wall_frame
from sunbot.light.patch import patch_axes, patch_nodes, patch_side_m
from sunbot.light.plane import direction

OUT, UP, RIGHT = np.eye(3)[2], np.eye(3)[1], np.eye(3)[0]


def test_the_frame_of_the_wall():
    """North light on a window that faces east comes from the left, the zenith stays up."""
    north, east, zenith = direction(0.0, 0.0), direction(90.0, 0.0), direction(0.0, 90.0)
    np.testing.assert_allclose(
        wall_frame(np.stack([north, east, zenith], axis=1), 90.0).T, [-RIGHT, OUT, UP], atol=1e-12
    )


def test_half_of_all_directions():
    """Without end, an opening fills the view of a plane that faces it, and half that of one at right angles."""
    assert configuration_factor(ALL_AROUND, OUT) == pytest.approx(1.0, abs=1e-9)
    assert configuration_factor(ALL_AROUND, UP) == pytest.approx(0.5, abs=1e-9)
    assert configuration_factor(ALL_AROUND, RIGHT) == pytest.approx(0.5, abs=1e-6)
    assert configuration_factor(ALL_AROUND, -OUT) == 0.0


@pytest.mark.parametrize("face", [OUT, UP, RIGHT, np.array([0.48, 0.6, 0.64]), np.array([-0.8, 0.0, 0.6])])
def test_an_opening_is_the_sum_of_its_parts(face):
    """Cut into four, an opening lets the same light through: also where the plane sees only a part of it."""
    left, right, low, high, distance = whole = Opening(-0.6, 1.1, -0.4, 0.9, 0.35)
    parts = [
        Opening(*across, *up, distance) for across in ((left, 0.2), (0.2, right)) for up in ((low, 0.1), (0.1, high))
    ]
    summed = sum(configuration_factor(part, face) for part in parts)
    assert configuration_factor(whole, face) == pytest.approx(summed, rel=1e-4)


def test_solid_angle_of_a_square_pyramid():
    """The directions fill the solid angle the opening takes up."""
    half, distance = 0.7, 0.5
    seen = directions_through(Opening(-half, half, -half, half, distance), UP)
    # closed form of geometry: 4 asin(a b / sqrt((a² + d²)(b² + d²)))
    assert seen.solid_sr.sum() == pytest.approx(4.0 * np.arcsin(half**2 / (half**2 + distance**2)), rel=1e-6)


def drawn_share(opening, axes, ray, rng):
    """The same share from random points of the patch, each followed to the wall."""
    points = rng.uniform(-1.0, 1.0, (40_000, 2)) @ axes
    far = (opening.distance_m - points[:, 2]) / ray[2]
    right, up = points[:, 0] + far * ray[0], points[:, 1] + far * ray[1]
    inside = (right > opening.left_m) & (right < opening.right_m) & (up > opening.low_m) & (up < opening.high_m)
    return inside.mean()


def test_the_lit_share_of_a_patch_is_that_of_random_points():
    """For tilted patches and low and slanting sun, against points drawn over the patch."""
    rng = np.random.default_rng(8)
    opening = Opening(-0.5, 0.4, -0.3, 0.5, 0.45)
    found, off = [], []
    for tilt in (0.0, 30.0, 60.0, 90.0):
        for turn in (0.0, 40.0, -75.0):
            face = wall_frame(direction(turn, 90.0 - tilt), 0.0)
            axes = patch_axes(face, side_m=0.4, distance_m=0.45)
            rays = wall_frame(direction(rng.uniform(-80.0, 80.0, 12), rng.uniform(0.0, 75.0, 12)), 0.0)
            share = share_lit(opening, axes, rays=rays)
            drawn = [drawn_share(opening, axes, ray, rng) for ray in rays.T]
            # half a line of eight, where the edge of the light runs along the lines, and errors of the draw
            np.testing.assert_allclose(share, drawn, atol=1 / 16 + 0.01)
            off.extend(share - drawn)
            found.extend(share)
    partly = np.abs(np.array(found) - 0.5) < 0.45
    assert partly.sum() > 15
    assert abs(np.array(off)[partly].mean()) < 0.01
    assert max(found) == pytest.approx(1.0, abs=1e-12)
    assert min(found) == 0.0


def test_a_patch_keeps_its_area_and_stays_in_the_room():
    """Its edges are level and along the slope, square to each other, and drawn in before they reach the glass."""
    side = patch_side_m(40.0)
    assert side**2 == pytest.approx(40.0 / 180.0)
    face = wall_frame(direction(20.0, 60.0), 0.0)
    axes = patch_axes(face, side_m=side, distance_m=5.0)
    np.testing.assert_allclose(axes @ face, 0.0, atol=1e-12)
    np.testing.assert_allclose(axes @ axes.T, np.eye(2) * (side / 2) ** 2, atol=1e-12)
    assert axes[0, 1] == 0.0
    near = patch_axes(face, side_m=side, distance_m=0.1)
    assert np.abs(near[:, 2]).sum() == pytest.approx(0.09)
    upright = patch_axes(OUT, side_m=side, distance_m=0.001)
    np.testing.assert_allclose(np.abs(upright).sum(axis=1), side / 2)


def test_few_points_stand_for_the_patch():
    """The mean over the four points is that over the patch, up to the third power."""
    axes = patch_axes(OUT, side_m=2.0, distance_m=1.0)
    points = patch_nodes(axes)
    x, y = points[:, 0], points[:, 1]
    assert np.mean(x**2 * y**2) == pytest.approx(1.0 / 9.0)
    assert np.mean(x**3 + y + 1.0) == pytest.approx(1.0)
