"""Each study's answer with the text, table and picture that belong to it; what draws loads only when asked for."""

from __future__ import annotations

from collections.abc import Callable
from pathlib import Path
from typing import TYPE_CHECKING

from .delivery import Outputs, deliver

if TYPE_CHECKING:
    from matplotlib.figure import Figure

    from ..studies import CheckResult, PickResult, SeasonResult, SurveyResult


def deliver_check(result: CheckResult, outputs: Outputs, *, notes: Callable[[str], None]) -> str:
    """Write what was asked for; return what belongs on stdout."""
    from .text import check_text

    def csv(answer: CheckResult, path: Path) -> None:
        from .tables import trace_table, write_table

        write_table(trace_table(answer), path)

    def figure(answer: CheckResult) -> Figure:
        from .plots import check_figure

        return check_figure(answer)

    return deliver(result, outputs, text=check_text, csv=csv, figure=figure, notes=notes)


def deliver_pick(result: PickResult, outputs: Outputs, *, notes: Callable[[str], None]) -> str:
    """Write what was asked for; return what belongs on stdout."""
    from .pick_text import pick_text

    def csv(answer: PickResult, path: Path) -> None:
        from .tables import write_table

        write_table(answer.pairs_table, path)

    def figure(answer: PickResult) -> Figure:
        from .pick_plots import pick_figure

        return pick_figure(answer)

    return deliver(result, outputs, text=pick_text, csv=csv, figure=figure, notes=notes)


def deliver_season(result: SeasonResult, outputs: Outputs, *, notes: Callable[[str], None]) -> str:
    """Write what was asked for; return what belongs on stdout."""
    from .season_text import season_text

    def csv(answer: SeasonResult, path: Path) -> None:
        from .tables import fortnight_table, write_table

        write_table(fortnight_table(answer), path)

    def figure(answer: SeasonResult) -> Figure:
        from .season_plots import season_figure

        return season_figure(answer)

    return deliver(result, outputs, text=season_text, csv=csv, figure=figure, notes=notes)


def deliver_sky(result: SurveyResult, outputs: Outputs, *, notes: Callable[[str], None]) -> str:
    """Write what was asked for; return what belongs on stdout."""
    from .sky_text import sky_text

    def csv(answer: SurveyResult, path: Path) -> None:
        from .tables import weather_table, write_table

        write_table(weather_table(answer.weather), path)

    def figure(answer: SurveyResult) -> Figure:
        from .sky_plots import sky_figure

        return sky_figure(answer)

    return deliver(result, outputs, text=sky_text, csv=csv, figure=figure, notes=notes)
