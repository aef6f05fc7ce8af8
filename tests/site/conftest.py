"""One store of tracks for all tests of the site, and the sky of a stretch of time."""

from __future__ import annotations

import os
from collections.abc import Callable
from pathlib import Path

import numpy as np
import pytest

from wanderers.arrays import Floats
from wanderers.ephemeris import kernels
from wanderers.ephemeris.sky import Sky
from wanderers.ephemeris.store import TrackStore

SkyAt = Callable[[Floats], Sky]


@pytest.fixture(scope="session")
def store(tmp_path_factory: pytest.TempPathFactory) -> TrackStore:
    """The embedded kernel's tracks in a cache of their own."""
    folder: Path = tmp_path_factory.mktemp("tracks")
    environment = {name: value for name, value in os.environ.items() if name != "WANDERERS_KERNEL"}
    return TrackStore(kernels.inspect_kernel(kernels.find_kernel(None, folder, environment), folder), folder)


@pytest.fixture(scope="session")
def sky_at(store: TrackStore) -> SkyAt:
    """A function that returns the sky over instants."""
    return lambda jd: Sky(store.tracks(float(np.min(jd)), float(np.max(jd))))
