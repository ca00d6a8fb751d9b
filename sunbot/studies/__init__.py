"""The questions: the stages joined by a chain, asked by check, pick, season and survey."""

from .checking import CheckResult, check
from .surveying import SurveyResult, survey

__all__ = ["CheckResult", "SurveyResult", "check", "survey"]
