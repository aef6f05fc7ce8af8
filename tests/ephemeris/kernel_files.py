"""Tiny and broken SPK files for tests, laid out by hand after NAIF's DAF and SPK Required Reading.

https://naif.jpl.nasa.gov/pub/naif/toolkit_docs/FORTRAN/req/daf.html ("The File Record", "The Summary
Record") and .../req/spk.html ("Type 2", "Type 3"). Written without the library that the program reads with.
"""

from __future__ import annotations

import struct
from dataclasses import dataclass, replace
from pathlib import Path

import skyfield
import skyfield_data

from wanderers.ephemeris.spk_files import Contents, open_spk, usable_contents

DE421 = Path(skyfield_data.__file__).parent / "data" / "de421.bsp"
DE441_AROUND_1969 = Path(skyfield.__file__).parent / "tests" / "data" / "de441-1969.bsp"
"""DE441 splits each orbit in two segments at JD 2440432.5; this excerpt of skyfield's tests keeps both."""

J2000_JD = 2_451_545.0
FTP_TEST = b"FTPSTR:\r:\n:\r\n:\r\x00:\x81:\x10\xce:ENDFTP"
PLANET_PAIRS = ((0, 1), (1, 199), (0, 2), (2, 299), (0, 4), (0, 5), (0, 6), (0, 7), (0, 8), (0, 9))
EARTH_AND_SUN = ((0, 3), (3, 399), (0, 10))


@dataclass(frozen=True)
class Segment:
    """One segment, in each record of which the body moves by ``drift_km`` on either side of ``place_km``."""

    center: int
    target: int
    data_type: int = 2
    frame: int = 1
    start_jd: float = J2000_JD
    record_days: float = 32.0
    records: int = 2
    declared_from_day: float = 0.0
    declared_to_day: float | None = None
    place_km: float = 1.0e8
    drift_km: float = 1.0e6
    source: bytes = b"DE-0999LE-0999"

    @property
    def days(self) -> float:
        return self.record_days * self.records

    def words(self) -> list[float]:
        """Coefficients record by record, then INIT, INTLEN, RSIZE and N."""
        radius_s = self.record_days * 43_200.0
        start_s = (self.start_jd - J2000_JD) * 86_400.0
        series = [self.place_km, self.drift_km] * 3
        if self.data_type == 3:
            series += [self.drift_km / radius_s, 0.0] * 3
        words: list[float] = []
        for number in range(self.records):
            words += [start_s + (2 * number + 1) * radius_s, radius_s, *series]
        return [*words, start_s, 2.0 * radius_s, float(len(series) + 2), float(self.records)]


def segments(*pairs: tuple[int, int], **changes: object) -> list[Segment]:
    """Return a segment for each pair, alike but for the pair."""
    return [replace(Segment(*pair), **changes) for pair in pairs]


def spk_bytes(
    parts: list[Segment],
    *,
    order: str = "<",
    magic: bytes = b"DAF/SPK ",
    counts: tuple[int, int] = (2, 6),
    next_record: float = 0.0,
    tail: dict[int, float] | None = None,
) -> bytes:
    """Return a whole SPK file with up to 25 segments.

    Args:
        parts: its segments.
        order: ``<`` or ``>``, the byte order.
        magic: the first eight bytes.
        counts: doubles and integers of a summary, as the file record states them.
        next_record: what the directory says comes after it; 0 says it is the last.
        tail: words to change in each segment, by place from its end (-1 the last).
    """
    words: list[float] = []
    summaries, names = b"", b""
    for part in parts:
        own = part.words()
        for place, value in (tail or {}).items():
            own[place] = value
        first = 3 * 128 + len(words) + 1
        first_day = part.start_jd - J2000_JD
        start_s = (first_day + part.declared_from_day) * 86_400.0
        end_s = (first_day + (part.declared_to_day or part.days)) * 86_400.0
        codes = (part.target, part.center, part.frame, part.data_type, first, first + len(own) - 1)
        summaries += struct.pack(f"{order}dd6i", start_s, end_s, *codes)
        names += part.source.ljust(40)
        words += own
    free = 3 * 128 + len(words) + 1
    head = struct.pack(f"{order}8sii60siii", magic, *counts, b"made for a test".ljust(60), 2, 2, free)
    head += {"<": b"LTL-IEEE", ">": b"BIG-IEEE"}[order]
    head = head.ljust(699, b"\0") + FTP_TEST
    directory = struct.pack(f"{order}ddd", next_record, 0.0, float(len(parts))) + summaries
    records = head.ljust(1024, b"\0") + directory.ljust(1024, b"\0") + names.ljust(1024)
    return records + struct.pack(f"{order}{len(words)}d", *words)


def whole(**changes: object) -> bytes:
    """Return a good file with the Earth and the Sun."""
    return spk_bytes(segments(*EARTH_AND_SUN, **changes))


def written(folder: Path, content: bytes) -> Path:
    """Write a file of that content."""
    path = folder / "given.bsp"
    path.write_bytes(content)
    return path


def contents(path: Path) -> Contents:
    """Return what the program can use of a file."""
    with open_spk(path) as spk:
        return usable_contents(path, spk)


def tiny_kernel(path: Path, *pairs: tuple[int, int], **changes: object) -> Path:
    """Write a kernel with the Earth, the Sun and these pairs."""
    path.write_bytes(spk_bytes(segments(*EARTH_AND_SUN, *pairs, **changes)))
    return path
