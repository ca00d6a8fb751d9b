"""The light room's assembler: the light on every panel of a robot, step by step and heading by heading."""

from __future__ import annotations

from collections.abc import Callable
from dataclasses import dataclass, replace

import numpy as np

from ..calendar import standard_clock
from ..inputs.robot import Panel, Robot
from ..inputs.site import Site
from ..sky.weather import Weather
from ..types import BoolArray, FloatArray, IntArray
from .along import horizons_along
from .behind_glass import behind_glass
from .carriers import Light, LightYield, Sun, number_kind
from .glass import dirt_pass, snow_pass
from .headings import heading_matters, heading_weight, noses
from .hours import tilt_shares
from .plane import SkyParts, sky_parts
from .room import lamp_w_m2
from .view import Factors, Run, View, light_through, mixed, open_air, runs_of, under_horizon

_ALL_ALIKE: FloatArray = np.ones((1, 1))


@dataclass(frozen=True, eq=False)
class Outside:
    """What all panels share: the open sky, the sky over the ground as the horizon leaves it, runs of steps, months."""

    open: SkyParts
    left: SkyParts
    runs: list[Run]
    month: IntArray


def lights_on(
    robot: Robot, weather: Weather, sun: Sun, *, seed: int = 1, within: BoolArray | None = None
) -> tuple[Light, ...]:
    """The light on each panel of ``robot``, in its order.

    Parameters
    ----------
    robot : Robot
        With its site: albedo, horizon and slope are taken from there; clocks and sun from the weather's place.
    weather, sun : Weather, Sun
        ``sun`` as ``sun_over(weather)`` gives it.
    seed : int
        Draws the headings of a roaming robot that stands anywhere when parked.
    within : (n_times,), optional
        Steps that count for the yearly figures; left out, all.

    Raises
    ------
    InputError
        The robot lives behind a window and does not stand still there.
    """
    outside = outside_of(robot.site, weather, sun)
    views = _views(robot, weather, sun)
    kept = [(_clean(panel, weather, outside.month), _unsnowed(panel, robot, weather)) for panel in robot.panels]
    planes = [_filled(outside.left, view.plane, outside.runs) for view in views]
    cells = [
        _filled(outside.left, view.glass, outside.runs, times=dirt * snow)
        for view, (dirt, snow) in zip(views, kept, strict=True)
    ]
    weights = _weights(robot, weather, cells, runs=outside.runs, seed=seed)
    return tuple(
        Light(plane, cell, weight, _yearly(weather, outside, view=view, weight=weight, kept=keep, within=within))
        for plane, cell, weight, view, keep in zip(planes, cells, weights, views, kept, strict=True)
    )


def parked_otherwise(lights: tuple[Light, ...], robot: Robot, weather: Weather, *, seed: int = 1) -> tuple[Light, ...]:
    """The same lights with the weights of another ``robot.parked``; ``yearly`` stays that of the lights given.

    For a robot that differs in nothing else: the light by heading does not depend on where it stands when parked. The
    lights must have the heading that follows the sun where ``robot`` parks towards it.
    """
    cells = [light.cells_w_m2 for light in lights]
    weights = _weights(robot, weather, cells, runs=runs_of(weather.row), seed=seed)
    return tuple(replace(light, weight=weight) for light, weight in zip(lights, weights, strict=True))


def outside_of(site: Site, weather: Weather, sun: Sun) -> Outside:
    """The sky over the site, worked out once for all panels and headings."""
    month = standard_clock(weather.ref_times, weather.place.time_zone).month
    row = weather.row
    ghi, dni, dhi = (weather.table[column].to_numpy(dtype=np.float64) for column in ("ghi", "dni", "dhi"))
    sky = sky_parts(
        ghi,
        dni,
        dhi=dhi,
        sun=Sun(**{name: values[row] for name, values in vars(sun).items()}),
        albedo=np.asarray(site.albedo)[month - 1][row],
    )
    left = [(under_horizon(sky, here, sun=sun, row=row), share) for here, share in horizons_along(site, weather)]
    return Outside(sky, _spliced(left, row), runs_of(row), month)


def _spliced(parts: list[tuple[SkyParts, FloatArray]], row: IntArray) -> SkyParts:
    """The sky whose ground is lit as the horizon of each stop lets it be."""
    if len(parts) == 1:
        return parts[0][0]
    ground = np.sum([sky.ground * share[row] for sky, share in parts], axis=0)
    return replace(parts[0][0], ground=ground)


def _views(robot: Robot, weather: Weather, sun: Sun) -> list[View]:
    """How each panel sees the sky."""
    if robot.window is not None:
        lamp = lamp_w_m2(robot.window, weather)

        def indoors(panel: Panel) -> View:
            return behind_glass(panel, robot, sun=sun, lamp_w_m2=lamp)

        return [_at_its_tilts(panel, weather, indoors) for panel in robot.panels]
    nose_deg, any_nose = noses(robot, sun), np.zeros((1, 1))

    def outdoors(panel: Panel) -> View:
        nose = nose_deg if heading_matters(panel) else any_nose
        sites, shares = zip(*horizons_along(robot.site, weather), strict=True)
        return mixed([open_air(panel, here, sun=sun, nose_deg=nose) for here in sites], shares)

    return [_at_its_tilts(panel, weather, outdoors) for panel in robot.panels]


def _at_its_tilts(panel: Panel, weather: Weather, seen: Callable[[Panel], View]) -> View:
    """The view of a panel, of a folding one the mean over the tilts it has within a step."""
    shares = tilt_shares(panel, weather)
    views = [seen(panel.model_copy(update={"tilt_deg": tilt_deg})) for tilt_deg in shares]
    return mixed(views, list(shares.values()))


def _unsnowed(panel: Panel, robot: Robot, weather: Weather) -> FloatArray | float:
    """Share of each step in which no snow lies on the panel; a lid that folds up steeply sheds it."""
    covered = weather.snow_covered
    if robot.window is not None or covered is None:
        return 1.0
    shares = tilt_shares(panel, weather)
    free = (
        np.broadcast_to(share, weather.ref_times.shape)[weather.row] * snow_pass(tilt, covered)
        for tilt, share in shares.items()
    )
    return np.asarray(sum(free))


def _clean(panel: Panel, weather: Weather, month: IntArray) -> FloatArray:
    """Share of light that passes the dirt, step by step."""
    return dirt_pass(panel.dirt_loss, month)[weather.row]


def _filled(sky: SkyParts, factors: Factors, runs: list[Run], *, times: FloatArray | None = None) -> FloatArray:
    """Light through the factors, (n_times, n_headings), times a share of each step."""
    n_headings = max(part.shape[1] for part in vars(factors).values())
    light = np.empty((len(sky.direct), n_headings), dtype=number_kind(n_headings))
    for run, block in light_through(sky, factors, runs):
        if times is None:
            light[run.times] = block
        else:
            light[run.times] = block * times[run.times, None]
    return light


def _weights(
    robot: Robot, weather: Weather, cells: list[FloatArray], *, runs: list[Run], seed: int
) -> list[FloatArray]:
    """Heading weights of each panel; one array for all for which heading matters."""
    roaming = [light.shape[1] > 1 for light in cells]
    if not any(roaming):
        return [_ALL_ALIKE] * len(cells)
    watts = [panel.total_watts for panel in robot.panels]
    # scaling is only needed to compare several panels: one alone is used as it stands
    scaled = [light if sum(roaming) == 1 else light * w for light, w, r in zip(cells, watts, roaming, strict=True) if r]
    weight = heading_weight(robot, weather, cells_w_m2=scaled, runs=runs, seed=seed)
    return [weight if roams else _ALL_ALIKE for roams in roaming]


def _yearly(
    weather: Weather,
    outside: Outside,
    *,
    view: View,
    weight: FloatArray,
    kept: tuple[FloatArray, FloatArray | float],
    within: BoolArray | None,
) -> LightYield:
    """Irradiation after each step, mean over years and headings, in the steps that count."""
    dirt, snow = kept
    per_year = weather.step_h / max(weather.n_years, 1)
    angle = _mean(outside.open, view.open, weight=weight, runs=outside.runs)
    untouched = view.plane is view.open and outside.left is outside.open
    plane = angle if untouched else _mean(outside.left, view.plane, weight=weight, runs=outside.runs)
    glass = _mean(outside.left, view.glass, weight=weight, runs=outside.runs)
    dirty = glass * dirt
    stages = (weather.table["ghi"].to_numpy(), angle, plane, glass, dirty, dirty * snow)
    return LightYield(*(float((light if within is None else light[within]).sum()) * per_year for light in stages))


def _mean(sky: SkyParts, factors: Factors, *, weight: FloatArray, runs: list[Run]) -> FloatArray:
    """Light through the factors, mean over headings; (n_times,)."""
    light = np.empty(len(sky.direct))
    for run, block in light_through(sky, factors, runs):
        share = weight if len(weight) == 1 else weight[run.times]
        light[run.times] = block @ share[0] if len(share) == 1 else np.einsum("ij,ij->i", block, share)
    return light
