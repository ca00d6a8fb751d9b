"""Where an answer goes: the terminal, JSON, CSV and plot files that were asked for."""

from __future__ import annotations

import json
from collections.abc import Callable
from dataclasses import dataclass
from pathlib import Path
from typing import Any, Protocol

from ..errors import Fault, InputError

PLOT_FORMATS = (".png", ".svg", ".pdf")


class Answer(Protocol):
    """What every study returns."""

    @property
    def cautions(self) -> Any: ...

    def to_dict(self) -> dict[str, Any]: ...


@dataclass(frozen=True)
class Outputs:
    """What the user asked to have written; see `ready`."""

    as_json: bool = False
    csv: Path | None = None
    plot: Path | None = None

    def ready(self) -> None:
        """Refuse at once what could not be written after minutes of work."""
        faults = [
            Fault(str(path), f"there is no folder {path.parent}", "a path in a folder that exists")
            for path in (self.csv, self.plot)
            if path is not None and not path.parent.is_dir()
        ]
        if self.plot is not None and self.plot.suffix.lower() not in PLOT_FORMATS:
            wrong = "no plot can be written in this format"
            faults.append(Fault(f"--plot {self.plot}", wrong, "a name ending in .png, .svg or .pdf"))
        if faults:
            raise InputError(faults)


def deliver(
    answer: Answer,
    outputs: Outputs,
    *,
    text: Callable[[Any], str],
    csv: Callable[[Any, Path], None],
    figure: Callable[[Any], Any],
    notes: Callable[[str], None],
) -> str:
    """Write the files asked for and return what belongs on stdout; in JSON mode the cautions go to ``notes``."""
    if outputs.csv is not None:
        csv(answer, outputs.csv)
    if outputs.plot is not None:
        from .plots import save_figure

        save_figure(figure(answer), outputs.plot)
    if not outputs.as_json:
        return text(answer)
    for caution in answer.cautions:
        notes(f"{caution.where}: {caution.text} [{caution.code}]")
    return json.dumps(answer.to_dict(), indent=2, ensure_ascii=False, allow_nan=False) + "\n"
