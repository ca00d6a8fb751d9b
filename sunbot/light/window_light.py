"""Light on a panel behind glass by where it comes from, and in lux; and what to know before trusting it."""

from __future__ import annotations

from collections.abc import Iterator
from dataclasses import dataclass

import numpy as np

from ..inputs.robot import Panel, Robot
from ..sky.weather import Weather
from ..types import Caution, FloatArray
from .behind_glass import behind_glass, sun_through
from .carriers import Light, Sun
from .illuminance import illuminance_lux
from .lighting import outside_of
from .room import lamp_w_m2

COATED_FACTOR = 1.5
"""How far the light behind coated glass may be off, either way. Common practice."""
DIM_CELLS_W_M2 = 200.0
"""The dimmest light for which data sheets give a figure. Published: IEC 61215, performance at low irradiance."""


@dataclass(frozen=True, eq=False)
class WindowLight:
    """Light on the plane of a panel behind glass, before its own glass and dirt; each (n_times,).

    direct_w_m2, diffuse_w_m2, lamp_w_m2 : light that was direct outside, diffuse outside (both with what the room
    scatters of it), and of lamps. lux : all of it. sun_share : share of the patch, over the lit part of the step, that
    the sun would reach under a clear sky.
    """

    direct_w_m2: FloatArray
    diffuse_w_m2: FloatArray
    lamp_w_m2: FloatArray
    lux: FloatArray
    sun_share: FloatArray


def window_light(panel: Panel, robot: Robot, *, weather: Weather, sun: Sun) -> WindowLight:
    """The light on ``panel``, one of a robot behind a window, split and in lux.

    Raises
    ------
    ValueError
        The robot has no window.
    """
    if robot.window is None:
        raise ValueError("the robot has no window")
    row, sky = weather.row, outside_of(robot.site, weather, sun).left
    view = behind_glass(panel, robot, sun=sun, lamp_w_m2=lamp_w_m2(robot.window, weather)).plane
    direct = sky.direct * view.direct[row, 0]
    diffuse = np.maximum(
        sky.isotropic * view.isotropic[0, 0]
        + sky.brightening * view.brightening[0, 0]
        + sky.ground * view.ground[0, 0],
        0.0,
    )
    ghi, dhi = weather.table["ghi"].to_numpy(dtype=np.float64), weather.table["dhi"].to_numpy(dtype=np.float64)
    share = np.clip(np.divide(dhi, ghi, out=np.ones_like(ghi), where=ghi > 0.0), 0.0, 1.0)
    lamp = view.lamp[row, 0]
    lux = illuminance_lux(direct, diffuse, diffuse_share=share) + lamp * robot.window.lamp_lm_per_w
    return WindowLight(direct, diffuse, lamp, lux, (sun_through(panel, robot, sun=sun).share * sun.lit)[row])


def window_cautions(robot: Robot, lights: tuple[Light, ...]) -> tuple[Caution, ...]:
    """What is uncertain about light behind glass; none without a window."""
    if robot.window is None:
        return ()
    return (*_of_glass(robot), *_of_cells(lights))


def _of_glass(robot: Robot) -> Iterator[Caution]:
    window = robot.window
    if window is None:
        return
    text = (
        "Light behind a window hangs on what no file tells: curtains, plants, the depth of the wall, a clean pane. "
        "Hold a light meter where the panel will lie, on an overcast day, before you trust it."
    )
    if window.clear_share < 1.0:
        text = (
            "Coated glass passes less near infrared, which cells use, than its light transmittance says: the harvest "
            f"may be off by a factor of {COATED_FACTOR:g}. Hold the robot against that much less light. " + text
        )
    if window.lamp_lux > 0.0:
        text += " Lamp light is counted by its power; cells turn white light into more of it than sunlight."
    yield Caution("behind-glass", "window", text)


def _of_cells(lights: tuple[Light, ...]) -> Iterator[Caution]:
    dim = sum(float(light.cells_w_m2[light.cells_w_m2 < DIM_CELLS_W_M2].sum()) for light in lights)
    whole = sum(float(light.cells_w_m2.sum()) for light in lights)
    if dim > 0.5 * whole:
        text = (
            f"{100 * dim / whole:.0f} % of the light on the cells comes below {DIM_CELLS_W_M2:.0f} W/m², the dimmest "
            "for which data sheets speak: there the shunt resistance decides, and cheap cells lose most of their power."
        )
        yield Caution("dim-cells", "panels", text)
