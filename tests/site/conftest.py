"""The sky of a stretch of time, and a year of events to look at from sites."""

from __future__ import annotations

from collections.abc import Callable

import numpy as np
import polars as pl
import pytest

from wanderers.arrays import Floats
from wanderers.ephemeris.dates import parse_date
from wanderers.ephemeris.sky import Sky
from wanderers.ephemeris.store import TrackStore
from wanderers.events.almanac import almanac
from wanderers.events.catalogue import Query

SkyAt = Callable[[Floats], Sky]


@pytest.fixture(scope="session")
def sky_at(store: TrackStore) -> SkyAt:
    """A function that returns the sky over instants."""
    return lambda jd: Sky(store.tracks(float(np.min(jd)), float(np.max(jd))))


@pytest.fixture(scope="session")
def events_of_2027(store: TrackStore) -> pl.DataFrame:
    """Every event of the first half of 2027."""
    return almanac(store, Query(parse_date("2027-01-01"), parse_date("2027-07-01")))
