"""What sunbot says when the user's input is wrong."""

from __future__ import annotations

from collections.abc import Iterable
from dataclasses import dataclass


@dataclass(frozen=True)
class Fault:
    """One mistake in the input: where it stands, what is wrong, what to write instead.

    where : file, part and key, e.g. ``robot.toml: panel 1 ("deck"): tilt_deg``
    wrong : e.g. ``110 is outside 0 to 90``
    instead : completes the sentence "Write ...", without a full stop at its end
    """

    where: str
    wrong: str
    instead: str

    def __str__(self) -> str:
        return f"{self.where}: {self.wrong}. Write {self.instead}."


class InputError(ValueError):
    """The user's input cannot be used; ``faults`` holds every mistake found, so that all are mended at once."""

    def __init__(self, faults: Fault | Iterable[Fault]) -> None:
        self.faults: tuple[Fault, ...] = (faults,) if isinstance(faults, Fault) else tuple(faults)
        super().__init__("\n".join(str(fault) for fault in self.faults))


class UndeliveredError(InputError):
    """A file could not be written after the work was done; ``answer`` is what belongs on stdout all the same."""

    def __init__(self, faults: Fault | Iterable[Fault], *, answer: str) -> None:
        self.answer = answer
        super().__init__(faults)
