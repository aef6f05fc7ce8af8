"""Print the benchmark table: ``python -m tests.benchmarks [--years N]``.

Every row is a ratio of two processor-bound runs on the same work in the same session; results are compared
with each other first. Reference: skyfield's general search functions as its documentation shows them. Besides
the time that passed stands the processor time of all processes: where others use the machine too, the ratio
on free cores lies near the ratio of processor times over the number of cores.
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

from tests.benchmarks import from_site
from tests.benchmarks.bare_pass import bare_pass
from tests.benchmarks.general_search import general_search, same_events
from wanderers.ephemeris.bodies import PLANETS
from wanderers.ephemeris.frames import Frame
from wanderers.ephemeris.kernels import find_kernel, inspect_kernel
from wanderers.ephemeris.store import TrackStore
from wanderers.events.almanac import almanac
from wanderers.events.catalogue import Query, find_events
from wanderers.events.kept import kept_almanac
from wanderers.events.kinds import Kind
from wanderers.events.scene import Choice

J2000_YEAR_START = 2_451_544.5
DAYS_PER_YEAR = 365.25


@dataclass(frozen=True, slots=True)
class Spent:
    """Seconds that passed, and processor seconds of all processes."""

    passed_s: float
    processor_s: float

    def __str__(self) -> str:
        return f"{self.passed_s:8.2f} s ({self.processor_s:.2f})"


@dataclass(frozen=True, slots=True)
class Row:
    """One line of the table."""

    work: str
    ours: Spent
    against: str
    theirs: Spent

    def __str__(self) -> str:
        faster = self.theirs.passed_s / self.ours.passed_s
        sparer = self.theirs.processor_s / self.ours.processor_s
        return (
            f"{self.work:<50} {self.ours}  {self.against:<20} {self.theirs}"
            f"  {faster:8.2f} x ({1.0 / faster:.2f})  processor {sparer:8.2f} x ({1.0 / sparer:.2f})"
        )


def timed(work: Callable[[], object]) -> tuple[Spent, object]:
    """Return what some work took, and its result."""
    start, start_processor = time.perf_counter(), processor_s()
    result = work()
    return Spent(time.perf_counter() - start, processor_s() - start_processor), result


def processor_s() -> float:
    """Return processor seconds of this process and of those it waited for."""
    times = os.times()
    return times.user + times.system + times.children_user + times.children_system


def fresh_store(folder: Path) -> TrackStore:
    """Return a store with nothing in memory."""
    kernel = inspect_kernel(find_kernel(None, folder, {}), folder)
    return TrackStore(kernel, folder)


def against_general_search(years: int) -> list[Row]:
    """Time stations and planet-pair conjunctions, cold, warm and kept, against skyfield's own search."""
    span = (J2000_YEAR_START, J2000_YEAR_START + DAYS_PER_YEAR * years)
    kinds = frozenset({Kind.STATION, Kind.CONJUNCTION})
    query = Query(*span, kinds, frozenset({Frame.ECLIPTIC}), Choice(PLANETS, stars_for=()))
    theirs_took, theirs = timed(lambda: general_search(span))
    with tempfile.TemporaryDirectory() as folder:
        cold_took, _ = timed(lambda: find_events(fresh_store(Path(folder)), query))
        warm_took, ours = timed(lambda: kept_almanac(fresh_store(Path(folder)), query))
        again_took, again = timed(lambda: kept_almanac(fresh_store(Path(folder)), query))
    print(f"stations and conjunctions of {years} years: {same_events(ours, theirs)}")
    assert ours.equals(again)
    what = f"stations and conjunctions, {years} years"
    return [
        Row(f"{what}, tracks cold", cold_took, "skyfield's search", theirs_took),
        Row(f"{what}, tracks warm", warm_took, "skyfield's search", theirs_took),
        Row(f"{what}, asked again", again_took, "skyfield's search", theirs_took),
    ]


def against_bare_pass(folder: Path, years: int) -> list[Row]:
    """Time every kind over a long span, cold, warm and kept, against one bare pass over the track nodes."""
    store = fresh_store(folder)
    low, high = store.span_jd
    span = (low, high) if years >= 1100 else (low, low + DAYS_PER_YEAR * years)
    query = Query(*span, frames=frozenset(Frame), choice=Choice(stars_for=PLANETS))
    indices = store.block_indices(*span)
    bare_took, _ = timed(lambda: [bare_pass(store, index) for index in indices])
    with tempfile.TemporaryDirectory() as cold:
        cold_took, found = timed(lambda: kept_almanac(fresh_store(Path(cold)), query).height)
        warm_took, events = timed(lambda: almanac(fresh_store(Path(cold)), query).height)
        again_took, read = timed(lambda: kept_almanac(fresh_store(Path(cold)), query).height)
    assert found == events == read
    what = f"every kind, {years} years"
    print(f"{what}: {events} events, {_peaks()}")
    return [
        Row(f"{what}, cold", cold_took, "bare pass, one core", bare_took),
        Row(f"{what}, tracks warm", warm_took, "bare pass, one core", bare_took),
        Row(f"{what}, asked again", again_took, "bare pass, one core", bare_took),
    ]


def from_a_site(folder: Path) -> list[Row]:
    """Time a year of nights against Skyfield, and a warm year's almanac with a site against one without."""
    store = fresh_store(folder)
    from_site.our_nights(store)  # tracks warm
    theirs_took, theirs = timed(from_site.their_nights)
    ours_took, ours = timed(lambda: from_site.our_nights(store))
    print(f"nights of a year: {from_site.same_passages(ours, theirs)}")
    from_site.seen_almanac(store)
    bare_took, _ = timed(lambda: from_site.plain_almanac(store))
    seen_took, _ = timed(lambda: from_site.seen_almanac(store))
    return [
        Row("nights, a year, nine bodies", ours_took, "skyfield's functions", theirs_took),
        Row("almanac, a year, with a site", seen_took, "without one", bare_took),
    ]


def _peaks() -> str:
    """Say the peak of this process so far, and of its largest worker, which shares most of it."""
    own, worker = (
        resource.getrusage(who).ru_maxrss / 1e6 for who in (resource.RUSAGE_SELF, resource.RUSAGE_CHILDREN)
    )
    return f"peak memory {own:.2f} GB, of a worker {worker:.2f} GB, most of it shared"


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
        rows += from_a_site(Path(folder))
    print("\n".join(str(row) for row in rows))


if __name__ == "__main__":
    with ThreadPoolExecutor(1):  # so that the thread machinery is loaded before anything is timed
        main()
