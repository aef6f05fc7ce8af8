"""Reading SPK files warily: every part that the program relies on is checked when a file is opened.

A file that is cut short, damaged or of another kind is named as such and never gives wrong positions.
Formats: NAIF, SPK Required Reading (data types 2 and 3: Chebyshev series) and DAF Required Reading.
"""

from __future__ import annotations

import errno
import itertools
import re
import stat
import struct
from collections.abc import Iterable, Iterator
from contextlib import contextmanager
from dataclasses import dataclass
from math import isfinite
from pathlib import Path
from typing import Any, BinaryIO, Final

import numpy as np
from jplephem.daf import DAF, FTPSTR, LOCFMT
from jplephem.exceptions import OutOfRangeError
from jplephem.spk import SPK

from wanderers.arrays import Floats
from wanderers.constants import J2000_JD, SECONDS_PER_DAY
from wanderers.ephemeris.bodies import BODIES, EARTH_CHAIN, NAIF_CHAINS, Body
from wanderers.errors import KernelError, SpanError

PLANETARY_ADVICE: Final = "use a planetary kernel such as JPL DE440 with --kernel PATH"
LONGER_ADVICE: Final = "use a longer kernel with --kernel PATH, e.g. JPL DE441 (years -13200 to 17191)"
_ANOTHER: Final = "fetch or copy it again, or use another kernel with --kernel PATH"
_GIVE_FILE: Final = "give an SPK file (*.bsp) with --kernel PATH"

Pair = tuple[int, int]
"""NAIF codes (center, target)."""
Span = tuple[float, float]
"""First and last TDB Julian date."""

_RECORD_BYTES: Final = 1_024
_WORD_BYTES: Final = 8
_SUMMARIES_PER_RECORD: Final = 25
_SPK_COUNTS: Final = (2, 6)
"""Doubles and integers in a summary of an SPK (a PCK has 2 and 5)."""
_FORMAT_BYTES: Final = slice(88, 96)
_FREE_OFFSET_BYTES: Final = 84
_FRAME_J2000: Final = 1
"""NAIF's code of the axes that coincide with the ICRS in JPL's kernels."""
_SERIES_PER_RECORD: Final = {2: 3, 3: 6}
"""Chebyshev series in a record, by data type: position, or position and velocity."""
_JPL_NAME: Final = re.compile(rb"E-0*(\d+)LE-")


@dataclass(frozen=True, slots=True)
class Contents:
    """What the program can use of an SPK file.

    Attributes:
        name: ``DE440``, from the segments; the file's stem where they do not tell.
        span_jd: first and last TDB Julian date that all segments the bodies need have in common.
        bodies: those that can be composed from the segments, in the written order.
    """

    name: str
    span_jd: Span
    bodies: tuple[Body, ...]


@dataclass(frozen=True, slots=True)
class StackedSegment:
    """All segments of one (center, target) as one: DE441 cuts every body's orbit in two in 1969.

    Attributes:
        pieces: jplephem's segments; where two overlap the later one holds, as SPK prescribes.
        spans_jd: first and last TDB Julian date of each.
    """

    pieces: tuple[Any, ...]
    spans_jd: tuple[Span, ...]

    def compute_and_differentiate(self, tdb: Floats, tdb2: Floats | float = 0.0) -> tuple[Floats, Floats]:
        """Return position (km) and velocity (km/day), shape (3, n), at ``tdb + tdb2``, shape (n,) each.

        Raises:
            OutOfRangeError: an instant that no piece covers.
        """
        day, part = np.broadcast_arrays(np.asarray(tdb, dtype=np.float64), tdb2)
        out = np.empty((2, 3, day.size))
        open_yet = np.ones(day.size, dtype=bool)
        for piece, (start, end) in reversed(tuple(zip(self.pieces, self.spans_jd, strict=True))):
            # Less the start first: the sum of day and part would lose what lies beyond a boundary.
            here = open_yet & (day - start + part >= 0.0) & (day - end + part <= 0.0)
            if here.any():
                position, velocity = piece.compute_and_differentiate(day[here], part[here])
                out[0][:, here], out[1][:, here] = position[:3], velocity[:3]
                open_yet &= ~here
        if open_yet.any():
            raise OutOfRangeError("no segment covers every instant", open_yet)
        return out[0], out[1]


@contextmanager
def open_spk(path: Path) -> Iterator[SPK]:
    """Open an SPK file, checked and mapped into memory; always closes it.

    ``spk[center, target].compute_and_differentiate(tdb, tdb2)`` gives position and velocity, shape (3, n),
    whether the file holds one segment for the pair or several, of data type 2 or 3.

    Raises:
        KernelError: missing, damaged, of another kind, or not readable.
        SpanError: an instant asked of it lies outside.
    """
    spk = _opened(path)
    try:
        yield spk
    except OutOfRangeError as error:
        raise SpanError(f"an instant lies outside kernel {path} ({error}): {LONGER_ADVICE}") from error
    finally:
        spk.close()


def usable_contents(path: Path, spk: SPK) -> Contents:
    """Return what can be used of an open SPK file.

    Raises:
        KernelError: it lacks the Earth or the Sun, a segment is of another kind, or no day is common to all.
    """
    bodies = _bodies_held(path, spk)
    start, end = _common_span(_needed_spans(path, spk, bodies))
    if not end - start >= 1.0:
        raise KernelError(
            f"kernel {path} has no whole day on which all its bodies are known; {PLANETARY_ADVICE}"
        )
    return Contents(_name(path, spk), (start, end), bodies)


@contextmanager
def read_errors(path: Path) -> Iterator[None]:
    """Turn what reading a bad file raises into a KernelError."""
    try:
        yield
    except OSError as error:
        raise KernelError(f"kernel {path} cannot be read: {error.strerror or error}; {_ANOTHER}") from error
    except (ValueError, OverflowError, struct.error) as error:
        raise KernelError(f"kernel {path} is damaged ({error}); {_ANOTHER}") from error


def _opened(path: Path) -> SPK:
    """Open and check an SPK file."""
    with read_errors(path):
        size = _regular_file_size(path)
        file = path.open("rb")
        try:
            _check_file_record(path, file, size)
            daf = DAF(file)
            _check_directory(daf, size)
            spk = SPK(daf)
            _check_extents(spk)
            # Maps the file now, so that a failure is met here and not in the midst of the work.
            daf.map_array(1, 1)
            spk.pairs = {pair: _stacked(pieces) for pair, pieces in _by_pair(spk).items()}
        except BaseException:
            file.close()
            raise
    return spk


def _regular_file_size(path: Path) -> int:
    """Return the length of a file in bytes; refuses what is no file before opening could hang."""
    try:
        found = path.stat()
    except OSError as error:
        if error.errno in (errno.ENOENT, errno.ENOTDIR):
            raise KernelError(f"kernel {path} does not exist; {_GIVE_FILE}") from error
        raise
    if stat.S_ISDIR(found.st_mode):
        raise KernelError(f"kernel {path} is a folder; {_GIVE_FILE}")
    if not stat.S_ISREG(found.st_mode):
        raise KernelError(f"kernel {path} is not a regular file; {_GIVE_FILE}")
    if found.st_size == 0:
        raise KernelError(f"kernel {path} is empty; {_ANOTHER}")
    return found.st_size


def _check_file_record(path: Path, file: BinaryIO, size: int) -> None:
    """Check the first record: a SPK at all, and all there.

    Source: NAIF, DAF Required Reading, "The File Record".
    """
    record = file.read(_RECORD_BYTES)
    if not record.startswith((b"DAF/SPK ", b"NAIF/DAF")):
        beginning = record[:8].decode("latin-1")
        raise KernelError(
            f"kernel {path} is not an SPK file (it begins with {beginning!r}); {PLANETARY_ADVICE}"
        )
    if len(record) < _RECORD_BYTES:
        raise KernelError(f"kernel {path} is cut short after {len(record)} bytes; {_ANOTHER}")
    if record.startswith(b"DAF/") and FTPSTR not in record:
        raise KernelError(f"kernel {path} was changed in transfer (copied as text?); {_ANOTHER}")
    order = _byte_order(record)
    if order is None:
        raise KernelError(f"kernel {path} is not an SPK file (its summaries differ); {PLANETARY_ADVICE}")
    (free,) = struct.unpack_from(f"{order}i", record, _FREE_OFFSET_BYTES)
    needed = (free - 1) * _WORD_BYTES
    if needed > size:
        raise KernelError(
            f"kernel {path} is cut short: it should have {needed} bytes, has {size}; {_ANOTHER}"
        )


def _byte_order(record: bytes) -> str | None:
    """Return the byte order in which the file record announces an SPK's summaries; None if in neither."""
    stated = LOCFMT.get(record[_FORMAT_BYTES], "<>")
    fits = [order for order in stated if struct.unpack_from(f"{order}ii", record, 8) == _SPK_COUNTS]
    return fits[0] if fits else None


def _check_directory(daf: DAF, size: int) -> None:
    """Walk the chain of summary records: a damaged one could lead anywhere, or round in a circle."""
    seen: set[int] = set()
    number = daf.fward
    while number:
        if number in seen or not 1 < number < size / _RECORD_BYTES:
            raise ValueError("its directory leads astray")
        seen.add(number)
        following, _, count = struct.unpack_from(f"{daf.endian}ddd", daf.read_record(number))
        if not 0 <= count <= _SUMMARIES_PER_RECORD or count != int(count) or following != int(following):
            raise ValueError("its directory makes no sense")
        number = int(following)


def _check_extents(spk: SPK) -> None:
    """Check that every segment lies inside the part of the file that is said to be in use."""
    for segment in spk.segments:
        if not 1 <= segment.start_i < segment.end_i < spk.daf.free:
            raise ValueError(f"segment {segment.center} to {segment.target} lies outside the file")


def _by_pair(spk: SPK) -> dict[Pair, list[Any]]:
    """Return the segments of each (center, target), in the file's order."""
    found: dict[Pair, list[Any]] = {}
    for segment in spk.segments:
        found.setdefault((segment.center, segment.target), []).append(segment)
    return found


def _stacked(pieces: list[Any]) -> Any:
    """Return one object for all segments of a pair; jplephem's own where it serves."""
    last = pieces[-1]
    if not all(piece.data_type in _SERIES_PER_RECORD for piece in pieces):
        return last
    if len(pieces) == 1 and last.data_type == 2:
        return last
    return StackedSegment(tuple(pieces), tuple(_span_jd(piece) for piece in pieces))


def _span_jd(segment: Any) -> Span:
    """Return the TDB Julian dates for which a segment is meant and really has coefficients.

    The last four words describe the series; the first record's middle and radius (s) must tell the same.

    Source: NAIF, SPK Required Reading, "Type 2: Chebyshev (position only)", and type 3.
    """
    init, length, record_words, count = _words(segment, segment.end_i - 3, segment.end_i)
    middle, radius = _words(segment, segment.start_i, segment.start_i + 1)
    held = segment.end_i - segment.start_i + 1
    consistent = (
        count >= 1.0
        and count * record_words + 4 == held
        and (record_words - 2) % _SERIES_PER_RECORD[segment.data_type] == 0
        and abs(init + radius - middle) < 1.0
        and abs(2.0 * radius - length) < 1.0
        and isfinite(segment.start_jd - segment.end_jd)
    )
    if not consistent:
        raise ValueError(f"segment {segment.center} to {segment.target} contradicts itself")
    first = J2000_JD + init / SECONDS_PER_DAY
    last = J2000_JD + (init + length * count) / SECONDS_PER_DAY
    return max(first, segment.start_jd), min(last, segment.end_jd)


def _words(segment: Any, first: int, last: int) -> list[float]:
    """Return words of a segment's file, both ends included, counted from 1."""
    words: list[float] = segment.daf.read_array(first, last).tolist()
    return words


def _bodies_held(path: Path, spk: SPK) -> tuple[Body, ...]:
    """Return the bodies that can be composed from the segments."""
    pairs = set(_by_pair(spk))
    bodies = tuple(body for body in BODIES if pairs.issuperset(NAIF_CHAINS[body]))
    lacking = [] if pairs.issuperset(EARTH_CHAIN) else ["the Earth"]
    lacking += [] if Body.SUN in bodies else ["the Sun"]
    if lacking:
        raise KernelError(f"kernel {path} lacks {' and '.join(lacking)}; {PLANETARY_ADVICE}")
    return bodies


def _needed_spans(path: Path, spk: SPK, bodies: Iterable[Body]) -> list[list[Span]]:
    """Return, for each pair that the bodies need, the spans of its segments; check that they can be read."""
    by_pair = _by_pair(spk)
    needed = set(EARTH_CHAIN).union(*(NAIF_CHAINS[body] for body in bodies))
    for segment in itertools.chain.from_iterable(by_pair[pair] for pair in needed):
        if segment.data_type not in _SERIES_PER_RECORD:
            raise KernelError(
                f"kernel {path} holds segment {segment.center} to {segment.target} as data type "
                f"{segment.data_type}, where 2 or 3 can be read; {PLANETARY_ADVICE}"
            )
        if segment.frame != _FRAME_J2000:
            raise KernelError(
                f"kernel {path} gives segment {segment.center} to {segment.target} in frame {segment.frame}, "
                f"where 1 (J2000) can be read; {PLANETARY_ADVICE}"
            )
    with read_errors(path):
        return [[_span_jd(segment) for segment in by_pair[pair]] for pair in sorted(needed)]


def _common_span(spans_of_pairs: Iterable[list[Span]]) -> Span:
    """Return the span common to all pairs, each taken as its longest stretch without a gap."""
    longest = [max(_joined(spans), key=lambda span: span[1] - span[0]) for spans in spans_of_pairs]
    return max(start for start, _ in longest), min(end for _, end in longest)


def _joined(spans: list[Span]) -> list[Span]:
    """Join spans that touch or overlap."""
    joined: list[Span] = []
    for start, end in sorted(spans):
        if joined and start <= joined[-1][1]:
            joined[-1] = (joined[-1][0], max(end, joined[-1][1]))
        else:
            joined.append((start, end))
    return joined


def _name(path: Path, spk: SPK) -> str:
    """Return JPL's name, ``DE440``, if all segments that carry one agree, else the file's stem."""
    numbers = {match[1].decode() for segment in spk.segments if (match := _JPL_NAME.search(segment.source))}
    return f"DE{numbers.pop()}" if len(numbers) == 1 else path.stem
