"""The questions: the stages joined by a chain, asked by check, pick, season and survey."""

from .checking import CheckResult, check

__all__ = ["CheckResult", "check"]
