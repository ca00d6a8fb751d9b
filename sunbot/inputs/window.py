"""What stands between the robot and the open level: a window with its room, and sloping ground."""

from __future__ import annotations

from collections.abc import Iterator

from . import checks
from .fields import Number, Part, Problem, Share, Spans, Turn, Whole, key


class Window(Part):
    """The robot lives behind glass: the opening, its panes, the place of the panel and the room."""

    azimuth_deg: Turn = key(..., "which way the window faces, from north, clockwise", unit="deg", example=180)
    width_m: Number = key(..., "of the opening", unit="m", gt=0, le=50, example=1.4)
    height_m: Number = key(..., "of the opening", unit="m", gt=0, le=50, example=1.3)
    sill_m: Number = key(
        0.9, "lower edge of the opening above the floor", unit="m", ge=0, le=50, mark="common practice"
    )
    panes: Whole = key(2, "panes of glass, one behind the other", ge=0, le=4, mark="common practice")
    pane_mm: Number = key(4.0, "thickness of one pane", unit="mm", gt=0, le=100, mark="common practice")
    extinction_per_m: Number = key(
        16.0,
        "light lost inside the glass: 4 water white to 32 greenish",
        unit="1/m",
        ge=0,
        le=1000,
        mark="published: Duffie & Beckman, ch. 5, between its two ends",
    )
    clear_share: Share = key(1.0, "coated or tinted glass: its light over that of clear glass", example=0.8)
    frame_share: Number = key(0.15, "share of the opening that is frame", ge=0, lt=1, mark="common practice")
    obstruction_deg: Number = key(
        0.0, "elevation below which buildings or trees outside hide the sky", unit="deg", ge=0, lt=90, example=15
    )
    distance_m: Number = key(0.5, "of the panel from the glass", unit="m", gt=0, le=50, example=0.5)
    offset_m: Number = key(
        0.0, "of the panel to the right of the window's middle, seen looking out", unit="m", ge=-50, le=50
    )
    panel_height_m: Number = key(1.0, "of the panel above the floor", unit="m", ge=0, le=50, example=1.0)
    room_area_m2: Number = key(
        80.0, "all surfaces of the room: walls, floor, ceiling", unit="m2", gt=0, le=1e5, mark="common practice"
    )
    reflectance: Number = key(0.5, "mean of the room's surfaces", ge=0, lt=1, mark="common practice")
    room_min_c: Number = key(18.0, "air of the room at its coldest", unit="degC", ge=-60, le=60, mark="common practice")
    room_max_c: Number = key(24.0, "air of the room at its warmest", unit="degC", ge=-60, le=60, mark="common practice")
    lamp_lux: Number = key(0.0, "lamp light on the panel while lamp_hours", unit="lx", ge=0, le=2e5, example=300)
    lamp_hours: Spans = key((), "[from, to] spans of the local clock with the lamps on", example=[[8, 18]])
    lamp_lm_per_w: Number = key(
        300.0, "luminous efficacy of the lamp's light itself", unit="lm/W", gt=0, le=683, mark="from memory: white LED"
    )

    def problems(self) -> Iterator[Problem]:
        yield from checks.window(self)


class Terrain(Part):
    """Sloping ground, which tilts robot and panels together."""

    slope_deg: Number = key(0.0, "0 level, 90 a wall", unit="deg", ge=0, lt=90, example=12)
    aspect_deg: Turn = key(0.0, "which way it falls, from north, clockwise", unit="deg", example=200)
