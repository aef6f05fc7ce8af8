"""Fixtures that the whole suite shares: the embedded kernel and one cache of tracks a session."""

from __future__ import annotations

import os
from collections.abc import Callable
from pathlib import Path

import polars as pl
import pytest
from skyfield_data import get_skyfield_data_path

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


@pytest.fixture(scope="session")
def cache_folder(tmp_path_factory: pytest.TempPathFactory) -> Path:
    kept = os.environ.get(CACHE_VARIABLE)
    return Path(kept) if kept else tmp_path_factory.mktemp("cache")


@pytest.fixture(scope="session")
def kernel(cache_folder: Path) -> Kernel:
    return inspect_kernel(find_kernel(None, cache_folder, {}), cache_folder)


@pytest.fixture(scope="session")
def store(kernel: Kernel, cache_folder: Path) -> TrackStore:
    return TrackStore(kernel, cache_folder)


@pytest.fixture(scope="session")
def de421_store(cache_folder: Path) -> TrackStore:
    path = Path(get_skyfield_data_path()) / "de421.bsp"
    return TrackStore(inspect_kernel(path, cache_folder), cache_folder)


@pytest.fixture(scope="session")
def published_almanac(store: TrackStore) -> Callable[..., pl.DataFrame]:
    """Return the event table of a TT span, without stars."""

    def table(
        jd_from: float, jd_to: float, kinds: list[str], frames: list[str], bodies: list[str]
    ) -> pl.DataFrame:
        chosen = tuple(body for body in BODIES if body in {Body(name) for name in bodies}) or BODIES
        query = Query(
            jd_from,
            jd_to,
            frozenset(Kind(name) for name in kinds),
            frozenset(Frame(name) for name in frames),
            Choice(chosen, stars_for=()),
        )
        return almanac(store, query)

    return table
