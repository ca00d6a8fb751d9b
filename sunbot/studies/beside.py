"""A helper that works beside the caller: on the second core where that is safe, else on a thread."""

from __future__ import annotations

import ctypes
import multiprocessing
import signal
import sys
import threading
import warnings
from collections.abc import Callable
from multiprocessing.connection import Connection
from types import TracebackType
from typing import Any, Generic, Protocol, TypeVar, cast

Q = TypeVar("Q")
A = TypeVar("A")

_DIE_WITH_PARENT = 1
"""PR_SET_PDEATHSIG of Linux, prctl(2)."""

Ready = Callable[[], Callable[[Q], A]]
"""Does the preparing, which may take long, and returns what answers questions."""


class _Worker(Protocol):
    def ask(self, question: Any) -> None: ...
    def answer(self) -> Any: ...
    def close(self) -> None: ...


class Beside(Generic[Q, A]):
    """Prepares at once, and answers questions one after the other, while the caller does something else.

    A numpy loop of small steps holds the interpreter lock, so that only a second process uses the second core. One is
    forked on Linux where the caller has no other threads; elsewhere a thread does the preparing.
    """

    def __init__(self, ready: Ready[Q, A]) -> None:
        forks = sys.platform == "linux" and threading.active_count() == 1
        self._worker: _Worker = _Fork(ready) if forks else _Thread(ready)

    def ask(self, question: Q) -> None:
        """Put a question; `answer` gives what it came to."""
        self._worker.ask(question)

    def answer(self) -> A:
        """Wait for the answer; raises what preparing or answering raised."""
        return cast(A, self._worker.answer())

    def __enter__(self) -> Beside[Q, A]:
        return self

    def __exit__(self, kind: type[BaseException] | None, error: BaseException | None, at: TracebackType | None) -> None:
        self._worker.close()


class _Thread:
    """Prepares on a thread that nobody waits for at an interrupt; answers on the caller's own."""

    def __init__(self, ready: Ready[Any, Any]) -> None:
        self._ready = ready
        self._answer: Callable[[Any], Any] | None = None
        self._error: BaseException | None = None
        self._question: Any = None
        self._thread = threading.Thread(target=self._prepare, daemon=True)
        self._thread.start()

    def _prepare(self) -> None:
        try:
            self._answer = self._ready()
        except Exception as error:
            self._error = error

    def ask(self, question: Any) -> None:
        self._question = question

    def answer(self) -> Any:
        self._thread.join()
        if self._answer is None:
            raise self._error or RuntimeError("the helper ended early")
        return self._answer(self._question)

    def close(self) -> None:
        return None


class _Fork:
    """A child that shares what the caller has in memory."""

    def __init__(self, ready: Ready[Any, Any]) -> None:
        context = multiprocessing.get_context("fork")
        self._mine, its = context.Pipe()
        self._process = context.Process(target=_serve, args=(ready, its), daemon=True)
        with warnings.catch_warnings():
            # The linear algebra library keeps idle threads, of which newer Pythons warn at a fork; we use none of them.
            warnings.simplefilter("ignore", DeprecationWarning)
            self._process.start()
        its.close()

    def ask(self, question: Any) -> None:
        self._mine.send(question)

    def answer(self) -> Any:
        try:
            good, value = self._mine.recv()
        except EOFError as error:
            raise RuntimeError("the helper ended early") from error
        if not good:
            raise value
        return value

    def close(self) -> None:
        self._mine.close()
        self._process.kill()
        self._process.join()


def _serve(ready: Ready[Any, Any], pipe: Connection) -> None:
    """Answer until the caller is gone."""
    signal.signal(signal.SIGINT, signal.SIG_DFL)
    # The kernel ends a child at work when its parent ends in whatever way.
    ctypes.CDLL(None).prctl(_DIE_WITH_PARENT, signal.SIGKILL)
    try:
        answer = ready()
        while True:
            pipe.send((True, answer(pipe.recv())))
    except (EOFError, BrokenPipeError):
        return
    except Exception as error:
        pipe.send((False, error))
