"""What the tests of plans share."""

from __future__ import annotations

from collections.abc import Iterator
from contextlib import closing
from typing import Any

import pytest
from skyfield.api import load_file

from wanderers.ephemeris.kernels import Kernel


@pytest.fixture(scope="session")
def opened(kernel: Kernel) -> Iterator[Any]:
    """The kernel as skyfield opens it."""
    with closing(load_file(str(kernel.path))) as file:
        yield file
