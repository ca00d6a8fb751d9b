"""Where an answer goes: the terminal, JSON, CSV and plot files that were asked for."""

from __future__ import annotations

import json
import os
import stat
from collections.abc import Callable, Iterable, Iterator
from dataclasses import dataclass
from pathlib import Path
from typing import Any, Protocol

from ..errors import Fault, InputError, UndeliveredError
from ..writing import refuse_unwritable

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

    def ready(self, read: Iterable[Path] = ()) -> None:
        """Refuse at once what could not, or must not, be written after minutes of work; ``read``: files of the input.

        Raises
        ------
        InputError
            A path that cannot be written to, leads to no ordinary file, to a file of the input, to stdout or to the
            other output, or that names a format of no plot.
        """
        faults: list[Fault] = []
        if self.plot is not None and self.plot.suffix.lower() not in PLOT_FORMATS:
            wrong = "no plot can be written in this format"
            faults.append(Fault(f"--plot {self.plot}", wrong, "a name ending in .png, .svg or .pdf"))
        elif self.plot is not None:
            faults += _faults_of_path("--plot", self.plot, read)
        if self.csv is not None:
            faults += _faults_of_path("--csv", self.csv, read)
        if self.csv is not None and self.plot is not None and _same(self.csv, self.plot):
            faults.append(Fault(f"--plot {self.plot}", "is the file of --csv too", "two names"))
        if faults:
            raise InputError(faults)


def _faults_of_path(option: str, path: Path, read: Iterable[Path]) -> Iterator[Fault]:
    """What speaks against writing to a path."""
    where = f"{option} {path}"
    if any(_same(path, one) for one in read):
        yield Fault(where, "is a file this question is read from, and would be overwritten", "another name")
    elif path.suffix.lower() == ".toml":
        yield Fault(where, "has the ending of a robot or site file", f"another name, e.g. {path.stem}.csv")
    elif _is_stdout(path):
        yield Fault(where, "is where the answer itself goes", "another name")
    else:
        try:
            refuse_unwritable(path)
        except InputError as error:
            yield from (Fault(f"{option} {fault.where}", fault.wrong, fault.instead) for fault in error.faults)


def _same(one: Path, other: Path) -> bool:
    """Whether two paths lead to one file, which need not exist yet."""
    try:
        return one.samefile(other)
    except OSError:
        return os.path.realpath(one) == os.path.realpath(other)


def _is_stdout(path: Path) -> bool:
    try:
        out = os.fstat(1)
        return stat.S_ISREG(out.st_mode) and os.path.samestat(path.stat(), out)
    except OSError:
        return False


def deliver(
    answer: Answer,
    outputs: Outputs,
    *,
    text: Callable[[Any], str],
    csv: Callable[[Any, Path], None],
    figure: Callable[[Any], Any],
    notes: Callable[[str], None],
) -> str:
    """Write the files asked for and return what belongs on stdout; in JSON mode the cautions go to ``notes``.

    Raises
    ------
    UndeliveredError
        A file could not be written; it holds the answer.
    """
    faults: list[Fault] = []
    try:
        if outputs.csv is not None:
            csv(answer, outputs.csv)
    except InputError as error:
        faults += error.faults
    try:
        if outputs.plot is not None:
            from .plots import save_figure

            save_figure(figure(answer), outputs.plot)
    except InputError as error:
        faults += error.faults
    said = _said(answer, outputs, text=text, notes=notes)
    if faults:
        raise UndeliveredError(faults, answer=said)
    return said


def _said(answer: Answer, outputs: Outputs, *, text: Callable[[Any], str], notes: Callable[[str], None]) -> str:
    """The answer in words, or as one JSON document with its cautions told to ``notes``."""
    if not outputs.as_json:
        return text(answer)
    for caution in answer.cautions:
        notes(f"{caution.where}: {caution.text} [{caution.code}]")
    return json.dumps(answer.to_dict(), indent=2, ensure_ascii=False, allow_nan=False) + "\n"
