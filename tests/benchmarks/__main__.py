"""Print the benchmark table: ``python -m tests.benchmarks [--years N]``.

Every row is a ratio of two processor-bound runs on the same work in the same session; results are compared
with each other first. Reference: skyfield's general search functions as its documentation shows them.
"""

from __future__ import annotations

import argparse
import os
import platform
import resource
import tempfile
import time
from collections.abc import Callable
from concurrent.futures import ThreadPoolExecutor
from dataclasses import dataclass
from datetime import date
from pathlib import Path

from tests.benchmarks.bare_pass import bare_pass
from tests.benchmarks.general_search import general_search, same_events
from wanderers.ephemeris.bodies import PLANETS
from wanderers.ephemeris.frames import Frame
from wanderers.ephemeris.kernels import find_kernel, inspect_kernel
from wanderers.ephemeris.store import TrackStore
from wanderers.events.almanac import almanac
from wanderers.events.catalogue import Query, find_events
from wanderers.events.kinds import Kind
from wanderers.events.scene import Choice

J2000_YEAR_START = 2_451_544.5
DAYS_PER_YEAR = 365.25


@dataclass(frozen=True, slots=True)
class Row:
    """One line of the table."""

    work: str
    ours_s: float
    against: str
    theirs_s: float

    def __str__(self) -> str:
        faster = self.theirs_s / self.ours_s
        ours, theirs = f"{self.ours_s:9.2f} s", f"{self.theirs_s:9.2f} s"
        return f"{self.work:<58} {ours}  {self.against:<22} {theirs}  {faster:8.2f} x"


def timed(work: Callable[[], object]) -> tuple[float, object]:
    """Return seconds of wall time and the result."""
    start = time.perf_counter()
    result = work()
    return time.perf_counter() - start, result


def fresh_store(folder: Path) -> TrackStore:
    """Return a store with nothing in memory."""
    kernel = inspect_kernel(find_kernel(None, folder, {}), folder)
    return TrackStore(kernel, folder)


def against_general_search(years: int) -> list[Row]:
    """Time stations and planet-pair conjunctions, cold and warm, against skyfield's own search."""
    span = (J2000_YEAR_START, J2000_YEAR_START + DAYS_PER_YEAR * years)
    kinds = frozenset({Kind.STATION, Kind.CONJUNCTION})
    query = Query(*span, kinds, frozenset({Frame.ECLIPTIC}), Choice(PLANETS, stars_for=()))
    theirs_s, theirs = timed(lambda: general_search(span))
    with tempfile.TemporaryDirectory() as folder:
        cold_s, _ = timed(lambda: find_events(fresh_store(Path(folder)), query))
        warm_s, ours = timed(lambda: almanac(fresh_store(Path(folder)), query))
    print(f"stations and conjunctions of {years} years: {same_events(ours, theirs)}")
    what = f"stations and conjunctions, {years} years"
    return [
        Row(f"{what}, tracks cold", cold_s, "skyfield's search", theirs_s),
        Row(f"{what}, tracks warm", warm_s, "skyfield's search", theirs_s),
    ]


def against_bare_pass(folder: Path, years: int) -> list[Row]:
    """Time every kind over a long span, cold and warm, against one bare pass over the track nodes."""
    store = fresh_store(folder)
    low, high = store.span_jd
    span = (low, high) if years >= 1100 else (low, low + DAYS_PER_YEAR * years)
    query = Query(*span, frames=frozenset(Frame), choice=Choice(stars_for=PLANETS))
    indices = store.block_indices(*span)
    bare_s, _ = timed(lambda: [bare_pass(store, index) for index in indices])
    with tempfile.TemporaryDirectory() as cold:
        cold_s, _ = timed(lambda: almanac(fresh_store(Path(cold)), query))
        warm_s, table = timed(lambda: almanac(fresh_store(Path(cold)), query))
    what = f"every kind, {years} years"
    print(f"{what}: {table.height} events, peak memory {_peak_gigabytes():.2f} GB")
    return [
        Row(f"{what}, cold", cold_s, "bare pass, one core", bare_s),
        Row(f"{what}, warm", warm_s, "bare pass, one core", bare_s),
    ]


def _peak_gigabytes() -> float:
    return resource.getrusage(resource.RUSAGE_SELF).ru_maxrss / 1e6


def main() -> None:
    """Run the benchmarks and print the table."""
    parser = argparse.ArgumentParser(description=__doc__)
    parser.add_argument("--years", type=int, default=100, help="span of the general search (default 100)")
    parser.add_argument("--long-years", type=int, default=1100, help="span of every kind (default 1100)")
    choice = parser.parse_args()
    machine = f"{platform.machine()}  {os.cpu_count()} cores  Python {platform.python_version()}"
    print(f"{date.today()}  {machine}")
    rows = against_general_search(choice.years)
    with tempfile.TemporaryDirectory() as folder:
        for years in sorted({choice.long_years // 10, choice.long_years}):
            rows += against_bare_pass(Path(folder), years)
    print("\n".join(str(row) for row in rows))


if __name__ == "__main__":
    with ThreadPoolExecutor(1):  # so that the thread machinery is loaded before anything is timed
        main()
