"""What a panel behind a window takes of each part of the sky's light: factors by sun position."""

from __future__ import annotations

from dataclasses import dataclass

import numpy as np

from ..errors import Fault, InputError
from ..inputs.robot import Panel, Robot
from ..inputs.site import Site
from ..inputs.window import Window
from ..types import FloatArray
from .carriers import Sun
from .glass import beam_pass, diffuse_pass
from .horizon import BAND_DEG, beam_lost, horizon_at, obstruction_at
from .opening import ALL_AROUND, Directions, Opening, directions_through, share_lit, wall_frame
from .panes import panes_pass_at
from .patch import patch_axes, patch_nodes, patch_side_m
from .plane import cos_incidence, direction, normal
from .room import scattered_share
from .view import Factors, View

FACADE_OVER_GROUND = 0.5
"""Brightness of what obstructs the view over that of open ground. Common practice: upright, it sees half the sky."""
_ROWS_AT_ONCE = 4096
_GRAZING = 1e-6
_OUT: FloatArray = np.array([0.0, 0.0, 1.0])
_BAND = np.radians(BAND_DEG)


@dataclass(frozen=True, eq=False)
class SunThrough:
    """Direct light through the window over the reference rows; each (n_rows,).

    share : of the panel's patch that the sun reaches. plane : light on the panel's plane, mean over the patch, over
    direct light outside. cells : the same past the panel's glass, as its bypass groups let it count. on_window : flux
    per area of the opening, over direct light outside.
    """

    share: FloatArray
    plane: FloatArray
    cells: FloatArray
    on_window: FloatArray


def behind_glass(panel: Panel, robot: Robot, *, sun: Sun, lamp_w_m2: FloatArray) -> View:
    """The view of a panel behind the robot's window.

    Direct light reaches the share of the panel's patch whose ray to the sun passes the opening; sky and ground are
    integrated over the opening; what enters is scattered once more by the room. The thickness of the wall, and what
    stands in the room, are left out. Ground slope does not matter: the robot stands on a floor.

    Parameters
    ----------
    panel : Panel
        Of the robot; its patch is a square of the size its watts usually have.
    robot : Robot
        With site and window.
    sun : Sun
        Over the reference rows.
    lamp_w_m2 : (n_rows,)
        Light of the lamps on the panel [W/m²].

    Raises
    ------
    InputError
        The robot does not stand still.
    """
    window = _window_of(robot)
    _must_stand(robot)
    through = sun_through(panel, robot, sun=sun)
    plane, cells = _diffuse(panel, robot)
    gain, passed = scattered_share(window), diffuse_pass(0.0).sky
    scattered = gain * _flux(robot)
    indoors = _factors(through.plane + gain * through.on_window, plane + scattered, lamp_w_m2=lamp_w_m2)
    past_glass = _factors(
        through.cells + gain * passed * through.on_window, cells + passed * scattered, lamp_w_m2=passed * lamp_w_m2
    )
    return View(_open(panel, robot, sun=sun), indoors, past_glass)


def sun_through(panel: Panel, robot: Robot, *, sun: Sun) -> SunThrough:
    """How direct light comes through the window to the panel, over the reference rows."""
    window = _window_of(robot)
    made = SunThrough(*(np.zeros(sun.zenith_deg.size) for _ in range(4)))
    face, opening = _face(panel, robot), _opening(window)
    axes = patch_axes(face, side_m=patch_side_m(panel.total_watts), distance_m=window.distance_m)
    outside = np.cos(np.radians(sun.azimuth_deg - window.azimuth_deg)) > _GRAZING
    lit = np.flatnonzero((sun.lit > 0.0) & outside)
    for first in range(0, lit.size, _ROWS_AT_ONCE):
        rows = lit[first : first + _ROWS_AT_ONCE]
        height_deg, azimuth_deg = 90.0 - sun.zenith_deg[rows], sun.azimuth_deg[rows]
        rays = wall_frame(direction(azimuth_deg, height_deg), window.azimuth_deg)
        clear = height_deg >= _hidden_deg(window, robot.site, azimuth_deg)
        glazed = _glazing(window, rays[2]) * clear
        made.on_window[rows] = glazed * rays[2]
        onto = np.maximum(face @ rays, 0.0)
        share = share_lit(opening, axes, rays=rays) * clear * (onto > 0.0)
        made.share[rows] = share
        onto *= glazed * _left_by_robot(panel, robot, azimuth_deg=azimuth_deg, height_deg=height_deg)
        made.plane[rows] = onto * share
        # a group of cells works as well as its darkest cell
        groups = np.floor(share * panel.bypass_groups + 1e-9) / panel.bypass_groups
        made.cells[rows] = onto * groups * beam_pass(np.maximum(face @ rays, 0.0))
    return made


def _left_by_robot(
    panel: Panel, robot: Robot, *, azimuth_deg: FloatArray, height_deg: FloatArray
) -> FloatArray | float:
    """Share of direct light that mast and arms leave."""
    if not panel.obstructions:
        return 1.0
    from_nose_deg, groups = azimuth_deg - robot.heading_deg, panel.bypass_groups
    return 1.0 - beam_lost(panel.obstructions, from_nose_deg, sun_elevation_deg=height_deg, bypass_groups=groups)


def _open(panel: Panel, robot: Robot, *, sun: Sun) -> Factors:
    """The view of the panel if it stood in the open on level ground."""
    face = normal(panel.tilt_deg, robot.heading_deg + panel.azimuth_deg)
    rays = direction(sun.azimuth_deg, 90.0 - sun.zenith_deg)
    height = float(face[2])
    diffuse = np.array([(1.0 + height) / 2.0, np.sqrt(max(1.0 - height**2, 0.0)), (1.0 - height) / 2.0])
    return _factors(cos_incidence(rays, face[:, None]), diffuse, lamp_w_m2=np.zeros(1))


def _window_of(robot: Robot) -> Window:
    if robot.window is None:
        raise ValueError("the robot has no window")
    return robot.window


def _must_stand(robot: Robot) -> None:
    """Behind a window the place in the room decides, so a robot that does not keep it cannot be judged."""
    other = [rule for rule in (robot.heading, *(rule for _, _, rule, _ in robot.headings)) if rule != "fixed"]
    if other or robot.headings:
        rule = other[0] if other else "headings by hours"
        wrong = f'"{rule}" behind a [window], where a robot that leaves its place leaves the light'
        raise InputError(Fault("robot file: heading", wrong, 'heading = "fixed" and the place where it charges'))


def _face(panel: Panel, robot: Robot) -> FloatArray:
    """Unit normal of the panel in the frame of the wall; (3,)."""
    window = _window_of(robot)
    return wall_frame(normal(panel.tilt_deg, robot.heading_deg + panel.azimuth_deg), window.azimuth_deg)


def _opening(window: Window) -> Opening:
    """The opening as the middle of the panel sees it."""
    low_m = window.sill_m - window.panel_height_m
    half_m = window.width_m / 2.0
    return Opening(
        -half_m - window.offset_m, half_m - window.offset_m, low_m, low_m + window.height_m, window.distance_m
    )


def _glazing(window: Window, cos_at_wall: FloatArray) -> FloatArray:
    """Share of light that passes frame, coating and panes."""
    passed = panes_pass_at(
        cos_at_wall, panes=window.panes, thickness_mm=window.pane_mm, extinction_per_m=window.extinction_per_m
    )
    return passed * (window.clear_share * (1.0 - window.frame_share))


def _hidden_deg(window: Window, site: Site, azimuth_deg: FloatArray) -> FloatArray:
    """Elevation below which horizon and obstruction hide the sky [deg]."""
    return np.maximum(horizon_at(site.horizon, azimuth_deg), window.obstruction_deg)


def _diffuse(panel: Panel, robot: Robot) -> FloatArray:
    """Isotropic, brightening and ground light on the plane, and past its glass, mean over the patch; (2, 3)."""
    window, face = _window_of(robot), _face(panel, robot)
    axes = patch_axes(face, side_m=patch_side_m(panel.total_watts), distance_m=window.distance_m)
    made = []
    for point in patch_nodes(axes):
        seen = _directions(_opening(window).seen_from(point), face, robot=robot)
        own_deg = obstruction_at(panel.obstructions, _azimuth_deg(window, seen) - robot.heading_deg)
        onto, level = seen.cos_at(face), seen.cos_of_level(face)
        onto, level = (np.stack([cosine, cosine * beam_pass(cosine)]) for cosine in (onto, level))
        made.append(_parts(robot, seen, onto=onto, level=level, own_deg=own_deg))
    return np.asarray(np.mean(made, axis=0))


def _flux(robot: Robot) -> FloatArray:
    """Diffuse flux through the window per area of the opening, over isotropic, brightening and ground light; (3,)."""
    seen = _directions(ALL_AROUND, _OUT, robot=robot)
    nothing = np.zeros_like(seen.across)
    onto, level = seen.cos_at(_OUT)[None], seen.cos_of_level(_OUT)[None]
    return np.asarray(_parts(robot, seen, onto=onto, level=level, own_deg=nothing)[0])


def _directions(opening: Opening, face: FloatArray, *, robot: Robot) -> Directions:
    """Directions through the opening, cut where sky, facade and ground meet."""
    return directions_through(opening, face, edges=lambda across: _edges(_window_of(robot), robot.site, across))


def _parts(robot: Robot, seen: Directions, *, onto: FloatArray, level: FloatArray, own_deg: FloatArray) -> FloatArray:
    """Light through the opening over each part of the sky's light: isotropic, brightening, ground; (n, 3).

    Parameters
    ----------
    onto, level : (n, n_across, n_up), (n, n_across)
        What counts of light from every direction, and from the level one of every column, n ways.
    own_deg : (n_across, 1)
        Elevation up to which the robot itself hides the sky.
    """
    window = _window_of(robot)
    horizon_deg = np.maximum(horizon_at(robot.site.horizon, _azimuth_deg(window, seen)), own_deg)
    hidden_deg = np.maximum(horizon_deg, window.obstruction_deg)
    up_deg = np.degrees(seen.up)
    light = _glazing(window, seen.cos_at_wall) * seen.solid_sr / np.pi
    sky = np.where(up_deg > hidden_deg, light, 0.0)
    facade = FACADE_OVER_GROUND * ((up_deg > horizon_deg) & (up_deg < window.obstruction_deg))
    ground = np.where(up_deg < 0.0, light, light * facade)
    lowest = np.maximum(seen.low, np.radians(np.minimum(hidden_deg[:, 0], BAND_DEG)))
    open_band = np.clip((np.minimum(seen.high, _BAND) - lowest) / _BAND, 0.0, 1.0)
    # the band is as bright all round: a vertical plane takes 1 of it, half of that for each radian it faces
    band = _glazing(window, np.cos(seen.across[:, 0])) * open_band * seen.across_rad / 2.0
    return np.stack([np.einsum("nij,ij->n", onto, sky), level @ band, np.einsum("nij,ij->n", onto, ground)], axis=1)


def _edges(window: Window, site: Site, across: FloatArray) -> FloatArray:
    """Elevations [rad] at which sky, facade and ground meet; (1 to 3, n_across)."""
    edges = [np.zeros_like(across)]
    if site.horizon:
        edges.append(np.radians(horizon_at(site.horizon, window.azimuth_deg + np.degrees(across))))
    if window.obstruction_deg > 0.0:
        edges.append(np.full_like(across, np.radians(window.obstruction_deg)))
    return np.stack(edges)


def _azimuth_deg(window: Window, seen: Directions) -> FloatArray:
    return np.asarray(window.azimuth_deg + np.degrees(seen.across))


def _factors(direct: FloatArray, diffuse: FloatArray, *, lamp_w_m2: FloatArray) -> Factors:
    isotropic, brightening, ground = (np.full((1, 1), part) for part in diffuse)
    return Factors(direct[:, None], isotropic, brightening, ground, lamp_w_m2[:, None])
