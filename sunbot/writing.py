"""Files written whole or not at all."""

from __future__ import annotations

import contextlib
import os
import tempfile
from collections.abc import Callable
from pathlib import Path

from .errors import Fault, InputError


def write_whole(path: Path, write: Callable[[Path], None]) -> None:
    """Let ``write`` fill a temporary file beside ``path``, then move it into place.

    Whatever stood at ``path`` stays untouched until the new file is complete; after an error or an interrupt no
    temporary file is left.

    Raises
    ------
    InputError
        The folder does not exist, or the file cannot be written there (no right, no space).
    """
    if not path.parent.is_dir():
        raise InputError(Fault(str(path), f"there is no folder {path.parent}", "a path in a folder that exists"))
    try:
        handle, name = tempfile.mkstemp(prefix=f".{path.stem}-", suffix=path.suffix, dir=path.parent)
        os.close(handle)
    except OSError as error:
        raise _cannot_write(path, error) from error
    temporary = Path(name)
    try:
        write(temporary)
        os.chmod(temporary, 0o666 & ~_umask())
        os.replace(temporary, path)
    except OSError as error:
        raise _cannot_write(path, error) from error
    finally:
        with contextlib.suppress(FileNotFoundError):
            temporary.unlink()


def write_text(path: Path, text: str) -> None:
    """Write ``text`` as UTF-8, whole or not at all."""

    def write(temporary: Path) -> None:
        temporary.write_text(text, encoding="utf-8")

    write_whole(path, write)


def _umask() -> int:
    mask = os.umask(0)
    os.umask(mask)
    return mask


def _cannot_write(path: Path, error: OSError) -> InputError:
    reason = error.strerror or str(error)
    return InputError(Fault(str(path), f"cannot be written ({reason})", "a path with room and the right to write"))
