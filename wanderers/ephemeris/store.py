"""Tracks on disk: blocks are computed once, kept, checked when read, and extended when more is asked.

A block file is a sealed ``.npz`` archive, named by the kernel's SHA-256 and the format's version and written
atomically, so a damaged or foreign file is noticed and rebuilt, and an interrupted build keeps every block
that was finished.
"""

from __future__ import annotations

import io
import threading
from collections.abc import Callable, Iterable
from concurrent.futures import Executor, Future, as_completed
from dataclasses import dataclass, field
from pathlib import Path
from typing import Final

import numpy as np

from wanderers import processes
from wanderers.ephemeris import blocks, tracks
from wanderers.ephemeris.blocks import Block
from wanderers.ephemeris.bodies import Body
from wanderers.ephemeris.chebyshev import Series
from wanderers.ephemeris.kernels import Kernel, usable_span_jd_tt
from wanderers.ephemeris.tracks import Tracks
from wanderers.seals import read_sealed, what_is_wrong, write_sealed

Progress = Callable[[int, int], None]
"""Told, after each block, how many are done of how many."""

BLOCKS_IN_MEMORY: Final = 8
SLACK_DAYS: Final = 64.0
"""How far beyond a span tracks are handed out, where the blocks reach."""


def silent(done: int, total: int) -> None:
    """Report no progress."""


@dataclass(frozen=True, slots=True)
class TrackStore:
    """The tracks of one kernel in one cache folder.

    Attributes:
        kernel: an inspected kernel.
        folder: cache folder; ``tracks/`` is made below it.
        executor: where missing blocks are built, any ``concurrent.futures`` executor; None builds them on
            all cores of this machine.
        progress: called after each block built.
        warn: called with one line when a damaged or foreign file is replaced.
    """

    kernel: Kernel
    folder: Path
    executor: Executor | None = None
    progress: Progress = silent
    warn: Callable[[str], None] = lambda line: None
    _recent: dict[int, Block] = field(default_factory=dict, repr=False, compare=False)
    _whole: set[int] = field(default_factory=set, repr=False, compare=False)
    _lock: threading.Lock = field(default_factory=threading.Lock, repr=False, compare=False)

    @property
    def span_jd(self) -> tuple[float, float]:
        """First and last TT Julian date that can be had from this kernel."""
        return usable_span_jd_tt(self.kernel)

    def tracks(self, jd_from: float, jd_to: float) -> Tracks:
        """Return tracks over a span and a little beyond, clipped to the kernel, building what is missing."""
        indices = self.block_indices(jd_from, jd_to)
        self.ensure(indices)
        held = [self._block(index) for index in indices]
        return tracks.joined(held, jd_from - SLACK_DAYS, jd_to + SLACK_DAYS)

    def block_indices(self, jd_from: float, jd_to: float) -> range:
        """Return the numbers of the blocks that cover a span, clipped to the kernel."""
        low, high = self.span_jd
        first = blocks.block_index(min(max(jd_from, low), high))
        last = blocks.block_index(min(max(jd_to, low), np.nextafter(high, low)))
        return range(first, last + 1)

    def ensure(self, indices: Iterable[int]) -> None:
        """Build and keep every block of these that is missing or damaged."""
        missing = [index for index in indices if not self._is_whole(index)]
        if not missing:
            return
        if self.executor is not None:
            self._build_on(self.executor, missing)
        elif len(missing) == 1:
            self._keep(self._built(missing[0]))
            self.progress(1, 1)
        else:
            with processes.pool(len(missing)) as pool:
                self._build_on(pool, missing)

    def _build_on(self, executor: Executor, missing: list[int]) -> None:
        """Build blocks on an executor; each is kept as soon as it is there."""
        arguments = (self.kernel.path, self.kernel.bodies)
        pending: set[Future[Block]] = {
            executor.submit(blocks.build_block, *arguments, index, self.span_jd) for index in missing
        }
        try:
            for done, future in enumerate(as_completed(set(pending)), start=1):
                self._keep(future.result())
                pending.discard(future)  # and with it the block, which would fill the memory
                self.progress(done, len(missing))
        finally:
            for future in pending:
                future.cancel()

    def _built(self, index: int) -> Block:
        return blocks.build_block(self.kernel.path, self.kernel.bodies, index, self.span_jd)

    def _is_whole(self, index: int) -> bool:
        """Return whether a block is at hand; a file is read once to know."""
        with self._lock:
            if index in self._recent or (index in self._whole and self._path(index).exists()):
                return True
        return self._read(index) is not None

    def _block(self, index: int) -> Block:
        """Return a block from memory or disk, building it if it vanished meanwhile."""
        block = self._read(index)
        if block is None:
            block = self._built(index)
            self._keep(block)
        return block

    def _read(self, index: int) -> Block | None:
        """Return a block that is in memory or on disk, or None."""
        with self._lock:
            if index in self._recent:
                return self._recent[index]
        path = self._path(index)
        if not path.exists():
            return None
        try:
            block = read_block(path, index, self._stamp(), self.kernel.bodies)
            self._whole.add(index)
        except (OSError, ValueError) as error:
            self.warn(f"cache file {path} {what_is_wrong(error)}: rebuilt")
            return None
        self._remember(block)
        return block

    def _keep(self, block: Block) -> None:
        self._remember(block)
        path = self._path(block.index)
        try:
            write_block(path, block, self._stamp())
        except OSError as error:
            self.warn(f"cache folder {path.parent} cannot be written ({error.strerror}): tracks are not kept")

    def _remember(self, block: Block) -> None:
        with self._lock:
            self._recent[block.index] = block
            while len(self._recent) > BLOCKS_IN_MEMORY:
                del self._recent[next(iter(self._recent))]

    def _stamp(self) -> str:
        return f"{self.kernel.sha256} v{blocks.FORMAT_VERSION}"

    def _path(self, index: int) -> Path:
        name = f"{self.kernel.sha256[:16]}-v{blocks.FORMAT_VERSION}"
        return self.folder / "tracks" / name / f"block{index:+04d}.npz"


def write_block(path: Path, block: Block, stamp: str) -> None:
    """Write a block atomically, sealed with its stamp and number.

    Raises:
        OSError: the file cannot be written.
    """
    members: dict[str, object] = {
        "bodies": np.array([body.value for body in block.bodies]),
    }
    for name, series in (("planets", block.planets), ("moon", block.moon), ("observer", block.observer)):
        if series is not None:
            members |= _members(name, series)
    archive = io.BytesIO()
    np.savez(archive, **members)  # type: ignore[arg-type]
    write_sealed(path, archive.getvalue(), f"{stamp} {block.index}")


def read_block(path: Path, index: int, stamp: str, bodies: tuple[Body, ...]) -> Block:
    """Read a block and check that it is whole and the right one.

    Raises:
        OSError: it cannot be read.
        ValueError: it is not what was written, or another kernel's or version's.
    """
    content = read_sealed(path, f"{stamp} {index}")
    with np.load(io.BytesIO(content), allow_pickle=False) as archive:
        held = tuple(Body(name) for name in archive["bodies"].tolist())
        moon = _series("moon", archive) if "moon_head" in archive else None
        block = Block(index, held, _series("planets", archive), moon, _series("observer", archive))
    if set(held) | ({Body.MOON} if moon else set()) != set(bodies):
        raise ValueError("other bodies")
    return block


def _members(name: str, series: Series) -> dict[str, object]:
    return {
        f"{name}_head": np.array([series.origin_jd, series.segment_days, series.first_segment]),
        f"{name}_middle": series.middle_jd,
        f"{name}_half": series.half_days,
        f"{name}_coefficients": series.coefficients,
    }


def _series(name: str, archive: np.lib.npyio.NpzFile) -> Series:
    origin, segment_days, first = archive[f"{name}_head"].tolist()
    coefficients = archive[f"{name}_coefficients"]
    middle, half = archive[f"{name}_middle"], archive[f"{name}_half"]
    return Series(origin, segment_days, int(first), middle, half, coefficients)
