"""The small kernel's store, empty and filled."""

from __future__ import annotations

from pathlib import Path

import pytest

from tests.ephemeris.small_store import FIRST, SECOND, answers, block_files
from wanderers.arrays import Floats
from wanderers.ephemeris.kernels import Kernel, inspect_kernel
from wanderers.ephemeris.store import TrackStore


@pytest.fixture(scope="session")
def small(small_kernel: Path) -> Kernel:
    return inspect_kernel(small_kernel)


@pytest.fixture(scope="session")
def expected(small: Kernel, tmp_path_factory: pytest.TempPathFactory) -> Floats:
    """What every store of the small kernel must give."""
    return answers(TrackStore(small, tmp_path_factory.mktemp("expected")))


@pytest.fixture
def filled(small: Kernel, tmp_path: Path) -> Path:
    """A cache folder with both blocks in it."""
    TrackStore(small, tmp_path).ensure([FIRST, SECOND])
    assert len(block_files(tmp_path)) == 2
    return tmp_path
