"""A line on the terminal that says how long a study will still take."""

from __future__ import annotations

import time
from types import TracebackType
from typing import TextIO

QUIET_S = 1.0
"""Work shorter than this goes without a line."""
CELLS = 24


class Progress:
    """Told the share of the work done, it redraws one line; nothing is written where the stream is no terminal."""

    def __init__(self, stream: TextIO) -> None:
        self._stream = stream
        self._shown = stream.isatty()
        self._began_s = time.monotonic()
        self._width = 0

    def __call__(self, share: float) -> None:
        """Redraw at ``share`` (0 to 1) of the work; the rest is taken to go as fast as what is done."""
        spent_s = time.monotonic() - self._began_s
        if not self._shown or spent_s < QUIET_S or share <= 0:
            return
        left_s = spent_s * (1.0 - share) / share
        if self._width == 0 and left_s < QUIET_S:
            return
        filled = round(CELLS * share)
        self._write(f"[{'#' * filled}{'.' * (CELLS - filled)}] {share:.0%}, about {duration(left_s)} left")

    def __enter__(self) -> Progress:
        return self

    def __exit__(self, kind: type[BaseException] | None, error: BaseException | None, at: TracebackType | None) -> None:
        if self._width:
            self._write("")
            self._stream.write("\r")
            self._stream.flush()

    def _write(self, line: str) -> None:
        self._stream.write("\r" + line.ljust(self._width))
        self._stream.flush()
        self._width = max(self._width, len(line))


def duration(seconds: float) -> str:
    """Seconds up to a minute and a half, minutes beyond, never more exact than an estimate can be."""
    if seconds < 90:
        return f"{max(1, round(seconds))} s"
    return f"{round(seconds / 60)} min"
