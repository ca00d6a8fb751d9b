"""Panes and openings against closed forms and a handbook's curves."""

from __future__ import annotations

from math import atan, sqrt

import numpy as np
import pytest

from sunbot.inputs.window import Window
from sunbot.light.opening import Opening, configuration_factor
from sunbot.light.panes import panes_pass
from sunbot.light.room import scattered_share

OUT, UP = np.array([0.0, 0.0, 1.0]), np.array([0.0, 1.0, 0.0])


def parallel(a, b, c):
    """Element under a corner of a rectangle a x b that lies parallel to it at distance c."""
    # Published: Howell, A Catalog of Radiation Heat Transfer Configuration Factors, section B, differential planar
    # element to a parallel rectangle, the normal through a corner (B-3); also Siegel & Howell, appendix C.
    x, y = a / c, b / c
    one, two = sqrt(1 + x**2), sqrt(1 + y**2)
    return (x / one * atan(y / one) + y / two * atan(x / two)) / (2 * np.pi)


def perpendicular(h, w, d):
    """Element at distance d from the foot of an upright rectangle h high and w wide, level with one lower corner."""
    # Published: the same catalogue, the element's plane at right angles to the rectangle (B-4).
    y = sqrt(h**2 + d**2)
    return (atan(w / d) - d / y * atan(w / y)) / (2 * np.pi)


# from the closed forms above, as printed to six digits
@pytest.mark.parametrize(("sides", "factor"), [((1, 1, 1), 0.138532), ((2, 1, 0.5), 0.220778), ((0.3, 2, 1.5), None)])
def test_parallel_rectangle_over_its_corner(sides, factor):
    """A panel upright in the room, facing the window squarely."""
    a, b, c = sides
    found = configuration_factor(Opening(0.0, a, 0.0, b, c), OUT)
    assert found == pytest.approx(parallel(a, b, c), rel=1e-3)
    if factor is not None:
        assert found == pytest.approx(factor, rel=1e-3)


@pytest.mark.parametrize(("sides", "factor"), [((1, 1, 1), 0.055734), ((2, 1, 0.5), 0.158775), ((0.4, 3, 1.2), None)])
def test_perpendicular_rectangle_at_its_corner(sides, factor):
    """A panel flat in the room, level with the sill."""
    h, w, d = sides
    found = configuration_factor(Opening(0.0, w, 0.0, h, d), UP)
    assert found == pytest.approx(perpendicular(h, w, d), rel=1e-3)
    if factor is not None:
        assert found == pytest.approx(factor, rel=1e-3)


# left, right, low, high, distance; the point behind the opening, beside it, and near its upper edge
SHAPES = [(-0.7, 0.5, 0.2, 1.4, 0.6), (0.3, 1.7, -0.4, 0.9, 0.9), (-0.2, 0.1, -1.0, 0.3, 0.15)]


@pytest.mark.parametrize("shape", SHAPES)
@pytest.mark.parametrize("face", ["out", "up"])
def test_off_corner_positions_are_composed_of_rectangles(shape, face):
    """The opening is a sum and difference of rectangles with a corner at the foot of the point."""
    left, right, low, high, distance = shape

    def to_corner(x, y):
        if face == "out":
            return np.sign(x * y) * parallel(abs(x), abs(y), distance) if x * y else 0.0
        # a flat panel sees only what is above it
        return np.sign(x) * perpendicular(max(y, 0.0), abs(x), distance) if x and y > 0 else 0.0

    composed = to_corner(right, high) - to_corner(left, high) - to_corner(right, low) + to_corner(left, low)
    found = configuration_factor(Opening(*shape), OUT if face == "out" else UP)
    assert found == pytest.approx(composed, rel=1e-3)


# Published: Duffie & Beckman, Solar Engineering of Thermal Processes, section 5.1-5.2 (n = 1.526, reflection only,
# polarisations averaged last), recomputed from its equations, so to the digits given.
@pytest.mark.parametrize(
    ("panes", "angle_deg", "passed"),
    [(1, 0, 0.9169), (1, 60, 0.8421), (1, 80, 0.4554), (2, 0, 0.8465), (2, 60, 0.7588), (2, 80, 0.3096)],
)
def test_reflection_of_one_and_two_panes(panes, angle_deg, passed):
    """Glass that swallows nothing passes what the equations say."""
    found = panes_pass(np.cos(np.radians(angle_deg)), panes=panes, thickness_mm=4.0, extinction_per_m=0.0)
    assert float(found) == pytest.approx(passed, abs=0.001)


@pytest.mark.parametrize(("panes", "passed"), [(1, 0.845), (2, 0.763)])
def test_hemispherical_transmittance(panes, passed):
    """Light from all directions alike passes one and two panes as integrated from the same equations."""
    # by the cosine law the squares of the cosines are spread evenly
    cosines = np.sqrt((np.arange(20_000) + 0.5) / 20_000)
    found = panes_pass(cosines, panes=panes, thickness_mm=4.0, extinction_per_m=0.0).mean()
    assert found == pytest.approx(passed, abs=0.001)


def test_a_printed_pane_with_loss_inside_the_glass():
    """A pane of 2.3 mm with K = 32 /m at 60 degrees passes 0.768."""
    # Published: Duffie & Beckman, example 5.3.1 (the digits from memory: 0.624 and 0.912 by polarisation).
    found = panes_pass(np.cos(np.radians(60.0)), panes=1, thickness_mm=2.3, extinction_per_m=32.0)
    assert float(found) == pytest.approx(0.768, abs=0.001)


def test_scattered_light_is_of_the_order_of_the_average_daylight_factor():
    """Half of all light on a room's surfaces over that outside, against the average daylight factor."""
    # Published: BS 8206-2 (Lynes; Crisp & Littlefair), from memory: T W theta M / (A (1 - R²)) per cent.
    passed, area_m2, theta_deg, maintained, room_m2, reflectance = 0.7, 2.0, 65.0, 0.9, 80.0, 0.5
    factor = passed * area_m2 * theta_deg * maintained / (room_m2 * (1.0 - reflectance**2)) / 100.0
    assert factor == pytest.approx(0.01365, abs=5e-6)
    window = Window(azimuth_deg=180.0, width_m=2.0, height_m=1.0, room_area_m2=room_m2, reflectance=reflectance)
    # the window takes theta/180 of the light outside from the sky (theta = 90 for none hidden: half of it)
    flux = passed * maintained * theta_deg / 180.0
    ours = flux * scattered_share(window)
    # ours leaves out what comes straight from the sky, theirs is the mean over the working plane with it
    assert 0.3 * factor < ours < factor
