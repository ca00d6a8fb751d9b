"""The questions: the stages joined by a chain, asked by check, pick, season and survey."""

from .checking import CheckResult, check
from .pick_result import PickResult
from .picking import pick
from .seasons import SeasonResult, season
from .surveying import SurveyResult, survey

__all__ = ["CheckResult", "PickResult", "SeasonResult", "SurveyResult", "check", "pick", "season", "survey"]
