"""Files written whole or not at all."""

from __future__ import annotations

import contextlib
import errno
import os
import stat
import tempfile
from collections.abc import Callable
from pathlib import Path

from .errors import Fault, InputError

LONGEST_NAME = 255
"""Bytes of a file name; common practice: the limit of the usual file systems."""


def write_whole(path: Path, write: Callable[[Path], None]) -> None:
    """Let ``write`` fill a temporary file beside the target of ``path``, then move it into place.

    Whatever stood at ``path`` stays untouched until the new file is complete; after an error or an interrupt no
    temporary file is left. A link stays a link: the file it leads to is replaced.

    Raises
    ------
    InputError
        The folder does not exist, the file cannot be written there (no right, no space), or ``path`` leads to
        something that is no ordinary file.
    """
    target = _target_of(path)
    temporary = _temporary_beside(target, path)
    try:
        write(temporary)
        os.chmod(temporary, target.stat().st_mode & 0o777 if target.exists() else 0o666 & ~_umask())
        os.replace(temporary, target)
    except OSError as error:
        raise _cannot_write(path, error) from error
    finally:
        with contextlib.suppress(FileNotFoundError):
            temporary.unlink()


def refuse_unwritable(path: Path) -> None:
    """Try whether `write_whole` could write to ``path`` and leave no trace; raises what it would raise."""
    _temporary_beside(_target_of(path), path).unlink()


def _target_of(path: Path) -> Path:
    """The file that ``path`` names, links followed; refused where a move into place would destroy something."""
    target = Path(os.path.realpath(path))
    try:
        mode = target.stat().st_mode
    except FileNotFoundError:
        return target
    except OSError as error:
        raise _cannot_write(path, error) from error
    if stat.S_ISDIR(mode):
        raise InputError(Fault(str(path), "is a folder", "the name of a file in it"))
    if not stat.S_ISREG(mode):
        raise InputError(Fault(str(path), "is no ordinary file (a device or a pipe)", "the name of a file to be made"))
    if not os.access(target, os.W_OK):
        raise _cannot_write(path, PermissionError(errno.EACCES, "it is write-protected"))
    return target


def _temporary_beside(target: Path, path: Path) -> Path:
    """An empty file in the folder of ``target``, so that moving it into place is one step."""
    if not target.parent.is_dir():
        raise InputError(Fault(str(path), f"there is no folder {target.parent}", "a path in a folder that exists"))
    try:
        handle, name = tempfile.mkstemp(prefix=f".{target.stem[:40]}-", suffix=target.suffix, dir=target.parent)
        os.close(handle)
    except OSError as error:
        raise _cannot_write(path, error) from error
    if len(target.name.encode()) > LONGEST_NAME:
        Path(name).unlink()
        raise _cannot_write(path, OSError(errno.ENAMETOOLONG, "its name is too long"))
    return Path(name)


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
