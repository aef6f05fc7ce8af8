"""Files of the cache: sealed with a checksum of their content and of what it was made from.

So neither a damaged file nor a whole one under another's name is ever taken for the right one.
"""

from __future__ import annotations

import zlib
from pathlib import Path
from typing import Final

from wanderers.files import write_bytes_atomically

SEAL_BYTES: Final = 4


def write_sealed(path: Path, content: bytes, made_from: str) -> None:
    """Write content atomically, with a seal at its end; missing folders are made.

    Args:
        path: where to.
        content: what the file holds.
        made_from: names everything that the content depends on.

    Raises:
        OSError: the file cannot be written.
    """
    path.parent.mkdir(parents=True, exist_ok=True)
    write_bytes_atomically(path, content + _seal(content, made_from))


def read_sealed(path: Path, made_from: str) -> bytes:
    """Return what a file holds, its seal unbroken.

    Raises:
        OSError: it cannot be read.
        ValueError: it is damaged, or was made from something else.
    """
    whole = path.read_bytes()
    content = whole[:-SEAL_BYTES]
    if _seal(content, made_from) != whole[-SEAL_BYTES:]:
        raise ValueError("damaged, or made from something else")
    return content


def what_is_wrong(error: OSError | ValueError) -> str:
    """Return what keeps a sealed file from being used, in words."""
    return f"cannot be read ({error.strerror})" if isinstance(error, OSError) else "is damaged or foreign"


def _seal(content: bytes, made_from: str) -> bytes:
    """Return a CRC-32: it notices damage, and takes a quarter of the time of a cryptographic digest."""
    return zlib.crc32(content, zlib.crc32(made_from.encode())).to_bytes(SEAL_BYTES, "big")
