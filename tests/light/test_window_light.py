"""Light behind glass by where it comes from, and what is said about it."""

from __future__ import annotations

import numpy as np
import pytest

from sunbot.inputs.window import Window
from sunbot.light import lights_on, window_cautions, window_light


def behind(robot, **keys):
    standard = {"azimuth_deg": 180.0, "width_m": 1.4, "height_m": 1.3}
    return robot.model_copy(update={"window": Window.model_validate(standard | keys)})


def test_the_parts_are_the_light_on_the_plane(make_robot, year):
    """Direct, diffuse and lamp light sum to what lights_on gives; lux lies between 100 and 137 times the daylight."""
    weather, sun = year
    robot = behind(make_robot(45.0, heading_deg=180.0), lamp_lux=300.0, lamp_hours=((18.0, 23.0),))
    parts = window_light(robot.panels[0], robot, weather=weather, sun=sun)
    [light] = lights_on(robot, weather, sun)
    daylight = parts.direct_w_m2 + parts.diffuse_w_m2
    np.testing.assert_allclose(daylight + parts.lamp_w_m2, light.plane_w_m2[:, 0], atol=1e-9)
    by_lamp = parts.lamp_w_m2 * 300.0
    assert (parts.lux - by_lamp >= 99.9 * daylight - 1e-9).all()
    assert (parts.lux - by_lamp <= 137.1 * daylight + 1e-9).all()
    assert by_lamp.max() == pytest.approx(300.0)


def test_direct_sun_comes_through_a_south_window_about_noon(make_robot, year):
    """The sun is on a panel by a south window around noon, longer in winter than the high sun of June lets it."""
    weather, sun = year
    robot = behind(make_robot(0.0), distance_m=1.2, panel_height_m=0.9)
    share = window_light(robot.panels[0], robot, weather=weather, sun=sun).sun_share
    hour = sun.azimuth_deg
    assert not share[(hour < 90.0) | (hour > 270.0)].any()
    month = weather.times.month
    assert share[month == 1].sum() > 0.0
    assert share[month == 6].sum() < 0.5 * share[month == 2].sum()


def test_cautions_behind_glass(make_robot, year):
    """No window, no caution; a clear one says what no file tells; a coated one says the factor; dim cells are named."""
    weather, sun = year
    outdoors = make_robot(30.0, heading_deg=180.0)
    assert window_cautions(outdoors, lights_on(outdoors, weather, sun)) == ()
    clear = behind(outdoors, distance_m=0.2)
    [glass] = [c for c in window_cautions(clear, lights_on(clear, weather, sun)) if c.code == "behind-glass"]
    assert "curtains" in glass.text
    assert "Coated" not in glass.text
    deep = behind(outdoors, distance_m=3.0, clear_share=0.7)
    found = {caution.code: caution.text for caution in window_cautions(deep, lights_on(deep, weather, sun))}
    assert "factor of 1.5" in found["behind-glass"]
    assert "below 200 W/m²" in found["dim-cells"]


def test_without_a_window_there_is_nothing_to_split(make_robot, year):
    """Asking is the caller's mistake."""
    weather, sun = year
    robot = make_robot(0.0)
    with pytest.raises(ValueError, match="no window"):
        window_light(robot.panels[0], robot, weather=weather, sun=sun)
