"""The sites, and what they see."""

from __future__ import annotations

import polars as pl
import pytest

from tests.report.site_calendars.samples import SITES, issued
from tests.site.places import HILL
from wanderers.ephemeris.dates import parse_date
from wanderers.ephemeris.store import TrackStore
from wanderers.events.almanac import almanac
from wanderers.events.catalogue import Query
from wanderers.events.scene import Choice
from wanderers.site.almanac import seen_from_site
from wanderers.site.places import Site


@pytest.fixture(scope="session")
def events(store: TrackStore) -> pl.DataFrame:
    """Six weeks over which clocks change in the north and in the south."""
    return almanac(
        store, Query(parse_date("2027-03-01"), parse_date("2027-04-15"), choice=Choice(stars_for=()))
    )


@pytest.fixture(scope="session", params=SITES, ids=lambda site: site.zone)
def site(request: pytest.FixtureRequest) -> Site:
    found: Site = request.param
    return found


@pytest.fixture(scope="session")
def seen(store: TrackStore, events: pl.DataFrame, site: Site) -> pl.DataFrame:
    return seen_from_site(store, site, events)


@pytest.fixture(scope="session")
def content(seen: pl.DataFrame, site: Site) -> bytes:
    return issued(seen, site).content


@pytest.fixture(scope="session")
def from_hill(store: TrackStore, events: pl.DataFrame) -> pl.DataFrame:
    return seen_from_site(store, HILL, events)
