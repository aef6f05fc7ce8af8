"""Writing files so that a name holds either the whole new content or what was there before."""

from __future__ import annotations

import os
import secrets
import shutil
from collections.abc import Callable, Iterator
from contextlib import contextmanager, suppress
from pathlib import Path
from typing import BinaryIO, Final

from wanderers.errors import InputError, OutputError

_ADVICE: Final = "choose another place or correct its permissions"
_KEPT_OF_NAME: Final = 40
"""Letters of the final name that a temporary one carries: at most 160 bytes of UTF-8, of 255 allowed."""


def write_atomically(path: Path, write: Callable[[BinaryIO], None]) -> None:
    """Write a file under its final name only when it is complete.

    The content goes to a hidden temporary file in the same folder, is flushed to the disk and renamed. On any
    exception, a keyboard interrupt included, the temporary file goes and an older file of that name stays.
    A symbolic link is followed; a device or a pipe, which cannot be renamed over, is written directly.

    Args:
        path: where to; its folder exists.
        write: given the open binary file.

    Raises:
        OSError: the file cannot be written.
    """
    if path.exists() and not path.is_file():
        with path.open("wb") as file:
            write(file)
        return
    final = Path(os.path.realpath(path))
    temporary = _temporary_name(final.parent, final.name)
    try:
        with temporary.open("xb") as file:
            write(file)
            file.flush()
            os.fsync(file.fileno())
        with suppress(FileNotFoundError):
            shutil.copymode(final, temporary)
        temporary.replace(final)
    finally:
        temporary.unlink(missing_ok=True)


def write_bytes_atomically(path: Path, content: bytes) -> None:
    """Write finished content under a file's name as :func:`write_atomically` does.

    Raises:
        OSError: the file cannot be written.
    """

    def write(file: BinaryIO) -> None:
        file.write(content)

    write_atomically(path, write)


def write_output(path: Path, content: bytes) -> None:
    """Write finished content where a user wants it; folders above it that are missing are made.

    Raises:
        OutputError: it cannot be written.
    """
    with reported_as_output_error(path):
        path.parent.mkdir(parents=True, exist_ok=True)
        write_bytes_atomically(path, content)


def read_text(path: Path) -> str:
    """Return the text of a file that a user named, UTF-8 with or without a mark of byte order.

    Raises:
        InputError: it cannot be read; says why.
    """
    try:
        return path.read_text(encoding="utf-8-sig")
    except (OSError, UnicodeDecodeError) as error:
        raise InputError(f"cannot read {path}: {why_unreadable(error)}; name another file") from error


def why_unreadable(error: OSError | UnicodeDecodeError) -> str:
    """Return what keeps a text file from being read, in words."""
    return str(error.strerror or error) if isinstance(error, OSError) else "it is no UTF-8 text"


def require_writable(path: Path, *, folder: bool = False) -> None:
    """Make sure, before long work starts, that a file or a folder can be written.

    Nothing is left behind: folders are not made, and the file that is made for a trial is removed.

    Args:
        path: what is going to be written; folders above it may be missing.
        folder: whether ``path`` is meant to be a folder.

    Raises:
        OutputError: it cannot; says why.
    """
    with reported_as_output_error(path):
        final = Path(os.path.realpath(path))
        if folder and final.exists() and not final.is_dir():
            raise OutputError(f"cannot write into {path}: it is a file, not a folder; {_ADVICE}")
        if not folder and final.is_dir():
            raise OutputError(f"cannot write {path}: it is a folder; name a file in it")
        if not folder and final.exists():
            _require_replaceable(path)
        if folder or final.is_file() or not final.exists():
            _try_folder(path, final if folder else final.parent)


@contextmanager
def reported_as_output_error(path: Path) -> Iterator[None]:
    """Turn what the system says about writing ``path`` into one clear line.

    Raises:
        OutputError: instead of any OSError inside.
    """
    try:
        yield
    except OSError as error:
        raise OutputError(f"cannot write {path}: {error.strerror or error}; {_ADVICE}") from error


def _require_replaceable(path: Path) -> None:
    """Respect a file that its owner made read-only, though renaming over it would succeed."""
    if not os.access(path, os.W_OK):
        raise OutputError(f"cannot write {path}: it is read-only; {_ADVICE}")


def _try_folder(path: Path, folder: Path) -> None:
    """Make and remove a file in the nearest folder that exists: permissions alone do not tell enough."""
    nearest = folder
    while not nearest.exists():
        nearest = nearest.parent
    if not nearest.is_dir():
        raise OutputError(f"cannot write {path}: {nearest} is a file, not a folder; {_ADVICE}")
    trial = _temporary_name(nearest, path.name)
    try:
        trial.open("xb").close()
    finally:
        trial.unlink(missing_ok=True)


def _temporary_name(folder: Path, name: str) -> Path:
    """Return a fresh hidden name; it never ends like a file the program looks for."""
    return folder / f".{name[:_KEPT_OF_NAME]}.{secrets.token_hex(8)}.tmp"
