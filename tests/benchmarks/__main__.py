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
import tempfile
from concurrent.futures import ThreadPoolExecutor
from datetime import date
from pathlib import Path

from tests.benchmarks import from_site
from tests.benchmarks.asking import asked, fresh_store
from tests.benchmarks.bare_pass import bare_pass
from tests.benchmarks.general_search import general_search, same_events
from tests.benchmarks.measuring import Row, alone, timed
from wanderers.ephemeris.bodies import PLANETS
from wanderers.ephemeris.frames import Frame
from wanderers.events.almanac import almanac
from wanderers.events.catalogue import Query, find_events
from wanderers.events.kept import kept_almanac
from wanderers.events.kinds import Kind
from wanderers.events.scene import Choice

J2000_YEAR_START = 2_451_544.5
DAYS_PER_YEAR = 365.25


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
        cold_run, warm_run, again_run = (
            alone(asked, table, Path(cold), query) for table in (kept_almanac, almanac, kept_almanac)
        )
    assert cold_run.result == warm_run.result == again_run.result
    what = f"every kind, {years} years"
    rows = []
    for name, run in (("cold", cold_run), ("tracks warm", warm_run), ("asked again", again_run)):
        print(f"{what}, {name}: {run.result} events, {run.peaks}")
        rows.append(Row(f"{what}, {name}", run.spent, "bare pass, one core", bare_took))
    return rows


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
