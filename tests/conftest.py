"""Fixtures that the whole suite shares: the embedded kernel and one cache of tracks a session."""

from __future__ import annotations

import os
from collections.abc import Callable, Iterator
from pathlib import Path

import hypothesis
import polars as pl
import pytest
from jplephem.commandline import main as excerpt
from skyfield.api import load_file

from tests.direct import Direct
from tests.ephemeris.kernel_files import DE421
from wanderers.cli.main import LIBRARY_THREADS
from wanderers.ephemeris.bodies import BODIES, Body
from wanderers.ephemeris.frames import Frame
from wanderers.ephemeris.kernels import Kernel, find_kernel, inspect_kernel
from wanderers.ephemeris.store import TrackStore
from wanderers.events.almanac import almanac
from wanderers.events.catalogue import Query
from wanderers.events.kinds import Kind
from wanderers.events.scene import Choice

CACHE_VARIABLE = "WANDERERS_TEST_CACHE"
"""Names a folder for tracks that outlive a session, for quick repeats."""

LONG = "long"

# Examples are drawn alike in every run, and nothing is measured against the clock.
hypothesis.settings.register_profile("suite", deadline=None, derandomize=True, database=None)
hypothesis.settings.load_profile("suite")


def pytest_collection_modifyitems(config: pytest.Config, items: list[pytest.Item]) -> None:
    """Leave the proofs that take many minutes to those who ask for them by name."""
    if LONG in config.getoption("-m"):
        return
    for item in items:
        if item.get_closest_marker(LONG):
            item.add_marker(pytest.mark.skip(reason="takes many minutes: run with -m long"))


@pytest.fixture(autouse=True)
def own_environment() -> Iterator[None]:
    """Take back what the program sets for itself: processes started later would round sums otherwise."""
    before = os.environ.get(LIBRARY_THREADS)
    yield
    if before is None:
        os.environ.pop(LIBRARY_THREADS, None)
    else:
        os.environ[LIBRARY_THREADS] = before


@pytest.fixture(scope="session")
def cache_folder(tmp_path_factory: pytest.TempPathFactory) -> Path:
    """A cache folder for the whole run; workers of a parallel run share it, as processes of a user do."""
    root = tmp_path_factory.getbasetemp()
    shared = root.parent if "PYTEST_XDIST_WORKER" in os.environ else root
    folder = Path(os.environ.get(CACHE_VARIABLE) or shared / "cache")
    folder.mkdir(parents=True, exist_ok=True)
    return folder


@pytest.fixture(scope="session")
def kernel(cache_folder: Path) -> Kernel:
    return inspect_kernel(find_kernel(None, cache_folder, {}), cache_folder)


@pytest.fixture(scope="session")
def store(kernel: Kernel, cache_folder: Path) -> TrackStore:
    return TrackStore(kernel, cache_folder)


@pytest.fixture(scope="session")
def de421_store(cache_folder: Path) -> TrackStore:
    return TrackStore(inspect_kernel(DE421, cache_folder), cache_folder)


@pytest.fixture(scope="session")
def small_kernel(tmp_path_factory: pytest.TempPathFactory) -> Path:
    """DE421 from 2000 to 2003 with Earth, Sun, Mercury to Jupiter: no Moon, nothing beyond Jupiter."""
    path = tmp_path_factory.mktemp("kernels") / "small.bsp"
    targets = "1,2,3,4,5,10,199,299,399"
    excerpt(["excerpt", "--targets", targets, "2000/1/1", "2004/1/1", str(DE421), str(path)])
    return path


@pytest.fixture(scope="session")
def direct(kernel: Kernel) -> Iterator[Direct]:
    """Places that Skyfield computes from the same kernel, one evaluation an instant."""
    opened = load_file(str(kernel.path))
    yield Direct(opened)
    opened.close()


@pytest.fixture(scope="session")
def published_almanac(store: TrackStore) -> Callable[..., pl.DataFrame]:
    """Return the event table of a TT span, with the meetings of the bodies given."""

    def table(
        jd_from: float, jd_to: float, kinds: list[str], frames: list[str], bodies: list[str]
    ) -> pl.DataFrame:
        chosen = tuple(body for body in BODIES if body in {Body(name) for name in bodies}) or BODIES
        query = Query(
            jd_from,
            jd_to,
            frozenset(Kind(name) for name in kinds),
            frozenset(Frame(name) for name in frames),
            Choice(chosen, stars_for=chosen),
        )
        return almanac(store, query)

    return table
