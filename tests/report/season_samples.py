"""Seasons of all kinds of planets on JPL's DE421, studied, for the tests of charts and dossiers."""

from __future__ import annotations

from functools import cache
from pathlib import Path

from tests.ephemeris.kernel_files import DE421
from tests.report.report_samples import REQUEST
from wanderers.ephemeris.bodies import Body
from wanderers.ephemeris.kernels import inspect_kernel
from wanderers.ephemeris.store import TrackStore
from wanderers.events.kinds import Kind
from wanderers.report.contents import Contents, Request, gather

BODIES = (Body.MERCURY, Body.VENUS, Body.MARS, Body.JUPITER, Body.URANUS, Body.NEPTUNE)


@cache
def two_years(cache_folder: Path) -> Contents:
    """Return the contents of 2027 and 2028 for six planets, stations only."""
    store = TrackStore(inspect_kernel(DE421, cache_folder), cache_folder)
    request = Request(
        REQUEST.jd_from, REQUEST.jd_to, "utc", BODIES, (Kind.STATION,), REQUEST.frames, stars_for=()
    )
    return gather(store, request)
