"""sunbot: will this panel, controller and battery carry this robot through the worst weeks of the place?

The public names load what they need when first used, so that ``import sunbot`` is cheap.
"""

from __future__ import annotations

from typing import TYPE_CHECKING, Any

__version__ = "0.1.0"

if TYPE_CHECKING:
    from .errors import InputError
    from .inputs import Robot, Site, load_robot, load_site
    from .sky import Weather, weather_for
    from .studies import CheckResult, PickResult, SeasonResult, SurveyResult, check, pick, season, survey

_HOME = {
    "InputError": "errors",
    "Robot": "inputs",
    "Site": "inputs",
    "load_robot": "inputs",
    "load_site": "inputs",
    "Weather": "sky",
    "weather_for": "sky",
    "CheckResult": "studies",
    "check": "studies",
    "PickResult": "studies",
    "pick": "studies",
    "SeasonResult": "studies",
    "season": "studies",
    "SurveyResult": "studies",
    "survey": "studies",
}

__all__ = [
    "CheckResult",
    "InputError",
    "PickResult",
    "Robot",
    "SeasonResult",
    "Site",
    "SurveyResult",
    "Weather",
    "check",
    "load_robot",
    "load_site",
    "pick",
    "season",
    "survey",
    "weather_for",
]


def __getattr__(name: str) -> Any:
    from importlib import import_module

    if name not in _HOME:
        raise AttributeError(f"sunbot has no {name!r}; it has {', '.join(__all__)}")
    return getattr(import_module(f".{_HOME[name]}", __name__), name)


def __dir__() -> list[str]:
    return sorted([*__all__, "__version__"])
