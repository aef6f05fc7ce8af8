"""Almanacs of long spans, kept: what was found once is read when it is asked again.

A span is cut where blocks of tracks meet. The events of each piece lie in a sealed file named by all that
they depend on: the kernel, the question, and this program's own code and data, so that a mended finder never
answers with what its forerunner found.
"""

from __future__ import annotations

import hashlib
import io
import os
from collections.abc import Sequence
from contextlib import suppress
from dataclasses import fields, replace
from functools import cache
from importlib.metadata import version
from itertools import groupby, pairwise
from pathlib import Path
from typing import Final

import numpy as np
import polars as pl

from wanderers.ephemeris.blocks import BLOCK_DAYS
from wanderers.ephemeris.store import TrackStore
from wanderers.events.almanac import almanac
from wanderers.events.catalogue import Query, stretches
from wanderers.seals import read_sealed, what_is_wrong, write_sealed

SHORTEST_DAYS: Final = BLOCK_DAYS
"""Spans shorter than this are found anew each time: that takes a second or two."""

FOLDER: Final = "events"
ENDING: Final = ".kept"
MOST_BYTES: Final = 2**30
"""When the kept files together grow beyond this, those that were not read for longest go."""

PACKAGE: Final = Path(__file__).parents[1]
DECISIVE: Final = ("*.py", "data/*.csv", "ephemeris/*.py", "events/*.py")
"""What of this package decides which events there are and how they are described."""

LIBRARIES: Final = ("jplephem", "numpy", "polars", "skyfield")


def kept_almanac(store: TrackStore, query: Query) -> pl.DataFrame:
    """Return what :func:`wanderers.events.almanac.almanac` returns, found now or earlier."""
    if query.jd_to - query.jd_from < SHORTEST_DAYS:
        return almanac(store, query)
    cuts = stretches(store, query.jd_from, query.jd_to)
    pieces = [replace(query, jd_from=start, jd_to=end) for start, end in cuts]
    known = _known(store, pieces)
    tables: list[pl.DataFrame] = []
    for is_known, run in groupby(pieces, key=known.__contains__):
        neighbours = list(run)
        tables += [known[piece] for piece in neighbours] if is_known else _found(store, neighbours)
    new = {piece: table for piece, table in zip(pieces, tables, strict=True) if piece not in known}
    if new:
        _keep(store, new)
    return pl.concat(tables, rechunk=False)


def _found(store: TrackStore, run: Sequence[Query]) -> list[pl.DataFrame]:
    """Find the events of pieces that follow one another."""
    events = almanac(store, replace(run[0], jd_to=run[-1].jd_to))
    inner = np.searchsorted(events["jd_tt"].to_numpy(), [piece.jd_to for piece in run[:-1]])
    edges = [0, *inner.tolist(), events.height]
    return [events[start:end] for start, end in pairwise(edges)]


def _known(store: TrackStore, pieces: Sequence[Query]) -> dict[Query, pl.DataFrame]:
    """Read the events of those pieces that were kept and can be trusted; the others get one warning."""
    known: dict[Query, pl.DataFrame] = {}
    faults: list[str] = []
    for piece in pieces:
        path = _path(store, piece)
        try:
            known[piece] = _read(path, _made_from(store, piece))
        except FileNotFoundError:
            continue
        except (OSError, ValueError) as error:
            faults.append(f"cache file {path} {what_is_wrong(error)}")
    if faults:
        others = f", and {len(faults) - 1} more are not as they should be" if len(faults) > 1 else ""
        store.warn(f"{faults[0]}{others}: rebuilt")
    return known


def _read(path: Path, made_from: str) -> pl.DataFrame:
    """Return kept events, and mark them as read now.

    Raises:
        OSError: the file cannot be read.
        ValueError: it is damaged or something else.
    """
    content = read_sealed(path, made_from)
    with suppress(OSError):
        os.utime(path)
    return pl.read_parquet(io.BytesIO(content))


def _keep(store: TrackStore, tables: dict[Query, pl.DataFrame]) -> None:
    """Keep the events of pieces for the next time, if the cache folder can be written."""
    try:
        for piece, events in tables.items():
            content = io.BytesIO()
            events.write_parquet(content, compression="lz4", statistics=False)
            write_sealed(_path(store, piece), content.getvalue(), _made_from(store, piece))
        with suppress(FileNotFoundError):  # another process makes room too
            _make_room(store.folder / FOLDER)
    except OSError as error:
        place = store.folder / FOLDER
        store.warn(f"cache folder {place} cannot be written ({error.strerror}): events are not kept")


def _make_room(folder: Path) -> None:
    """Remove files that were not read for longest, as many as are too many."""
    held = [(path.stat(), path) for path in folder.glob(f"*{ENDING}")]
    newest_first = sorted(held, key=lambda pair: pair[0].st_mtime_ns, reverse=True)
    together = np.cumsum([facts.st_size for facts, _ in newest_first])
    for _, path in newest_first[int(np.searchsorted(together, MOST_BYTES, side="right")) :]:
        path.unlink(missing_ok=True)


def _path(store: TrackStore, piece: Query) -> Path:
    name = hashlib.sha256(_made_from(store, piece).encode()).hexdigest()[:32]
    return store.folder / FOLDER / f"{name}{ENDING}"


def _made_from(store: TrackStore, piece: Query) -> str:
    """Name all that a piece's events depend on."""
    values = {field.name: getattr(piece, field.name) for field in fields(piece)}
    asked = {name: sorted(value) if isinstance(value, frozenset) else value for name, value in values.items()}
    return f"{store.kernel.sha256} {program_digest()} {asked}"


@cache
def program_digest() -> str:
    """Return a digest of this package's decisive files and of the libraries' versions."""
    digest = hashlib.sha256(" ".join(map(version, LIBRARIES)).encode())
    for path in decisive_files():
        digest.update(f"{path.relative_to(PACKAGE)} {path.stat().st_size} ".encode() + path.read_bytes())
    return digest.hexdigest()


def decisive_files() -> list[Path]:
    """Return the files of this package on which events depend, sorted."""
    return sorted(path for pattern in DECISIVE for path in PACKAGE.glob(pattern))
