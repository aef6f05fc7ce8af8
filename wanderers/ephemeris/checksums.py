"""SHA-256 checksums of large files, remembered so that they are computed once."""

from __future__ import annotations

import hashlib
import json
import re
from collections.abc import Callable
from contextlib import suppress
from pathlib import Path
from typing import Any, Final

from wanderers.files import write_bytes_atomically

CHECKSUMS_NAME: Final = "kernel_checksums.json"
_VERSION: Final = 1


def sha256_of(path: Path) -> str:
    """Return the SHA-256 of a file, hexadecimal.

    Raises:
        OSError: the file cannot be read.
    """
    with path.open("rb") as file:
        return hashlib.file_digest(file, "sha256").hexdigest()


def remembered_sha256(
    path: Path, cache_dir: Path | None, warn: Callable[[str], None] = lambda line: None
) -> str:
    """Return the SHA-256 of a file, computed anew only when its size or times have changed.

    Args:
        path: the file.
        cache_dir: where checksums are remembered; made if missing. None, or a folder that cannot be written,
            remembers nothing.
        warn: called with one line when what was remembered is damaged and starts anew.

    Raises:
        OSError: the file cannot be read.
    """
    if cache_dir is None:
        return sha256_of(path)
    place = str(path.resolve())
    found = path.stat()
    # The time of the last status change too: a copy can carry the other one over from another file.
    mark = [found.st_size, found.st_mtime_ns, found.st_ctime_ns]
    rows = _remembered(cache_dir / CHECKSUMS_NAME, warn)
    if place in rows and rows[place][:3] == mark:
        return str(rows[place][3])
    sha256 = sha256_of(path)
    with suppress(OSError):
        cache_dir.mkdir(parents=True, exist_ok=True)
        _remember(cache_dir / CHECKSUMS_NAME, rows | {place: [*mark, sha256]})
    return sha256


def _remembered(file: Path, warn: Callable[[str], None]) -> dict[str, list[Any]]:
    """Return [size, mtime, ctime, checksum] by path; empty where there is no good file."""
    try:
        content = json.loads(file.read_bytes())
    except OSError:
        return {}
    except (ValueError, RecursionError):
        content = None
    rows = content.get("kernels") if isinstance(content, dict) else None
    known_version = isinstance(content, dict) and content.get("version") == _VERSION
    if known_version and isinstance(rows, dict) and all(_is_row(row) for row in rows.values()):
        return rows
    warn(f"cache file {file} is damaged or foreign: rebuilt")
    return {}


def _is_row(row: object) -> bool:
    """Tell whether something read is [size, mtime, ctime, checksum]."""
    return (
        isinstance(row, list)
        and len(row) == 4
        and all(isinstance(number, int) for number in row[:3])
        and isinstance(row[3], str)
        and re.fullmatch("[0-9a-f]{64}", row[3]) is not None
    )


def _remember(file: Path, rows: dict[str, list[Any]]) -> None:
    content = json.dumps({"version": _VERSION, "kernels": rows}, indent=1).encode("ascii")
    write_bytes_atomically(file, content)
