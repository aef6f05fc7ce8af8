"""The event table against the dense search of ``tests/oracle``: none missing, none invented, none late."""

from __future__ import annotations

from collections.abc import Iterator

import polars as pl
import pytest

from tests.oracle.compare import Comparison, match
from tests.oracle.kinds_single import one_per_orbit
from tests.oracle.places import Sky, open_sky
from tests.oracle.run import KINDS, run
from tests.reference.published import jd_of_date
from wanderers.ephemeris.bodies import BODIES, PLANETS, Body
from wanderers.ephemeris.frames import Frame
from wanderers.ephemeris.kernels import Kernel
from wanderers.ephemeris.store import TrackStore
from wanderers.events.almanac import almanac
from wanderers.events.catalogue import Query
from wanderers.events.kinds import Kind
from wanderers.events.scene import Choice

PLANETS_ONLY = ("sun", *(body.value for body in PLANETS))
COMPARED = tuple(name for name in KINDS if name not in {"gathering", "moon_phase"})
GATHERED = (("mercury", "venus", "mars"), ("mercury", "venus", "jupiter"), ("venus", "mars", "saturn"))

LONG_ORBITS = (Body.URANUS, Body.NEPTUNE, Body.PLUTO)
"""Their orbits are longer than the spans: within one the dense search takes wobbles by the Sun's reflex
motion for perihelia and aphelia, of which the program gives one an orbit; these are compared by themselves,
over the whole kernel."""
SHORTEST_VISIT_DAYS = {"planets": 0.25 / 20.0, "moon": 0.05 / 20.0}
"""The dense search looks into a constellation's corner 20 times a step: every 18 minutes, for the Moon 3.6.
Shorter visits are real, found by the program and not by that search, and allowed for that reason alone."""


@pytest.fixture(scope="module")
def sky(kernel: Kernel) -> Iterator[Sky]:
    with open_sky(kernel.path) as opened:
        yield opened


def compared(store: TrackStore, sky: Sky, years: tuple[str, str], *, moon: bool) -> Comparison:
    """Search a span both ways; appulses are held up to the program's usual limits."""
    span = jd_of_date(f"{years[0]}-01-01"), jd_of_date(f"{years[1]}-01-01")
    names = (*COMPARED, "moon_phase") if moon else COMPARED
    bodies = BODIES if moon else tuple(Body(name) for name in PLANETS_ONLY)
    kinds = frozenset(Kind(name) for name in names)
    ours = almanac(store, Query(*span, kinds, frozenset(Frame), Choice(bodies, stars_for=())))
    theirs = run(sky, span, names, moon=moon, bodies=[body.value for body in bodies])
    limit = pl.when(pl.col("body") == "moon").then(6.0).otherwise(10.0)
    theirs = theirs.filter((pl.col("kind") != "appulse") | (pl.col("separation_deg") < limit))
    # The dense search does not follow the Sun's own distance.
    of_the_sun = (pl.col("body") == "sun") & pl.col("kind").is_in(["perigee", "apogee"])
    alike = ours.filter(pl.col("kind").is_in(theirs["kind"].unique().to_list()) & ~of_the_sun)
    slow = pl.col("body").is_in([body.value for body in LONG_ORBITS])
    apsides = pl.col("kind").is_in(["perihelion", "aphelion"]) & slow
    return match(alike.filter(~apsides), theirs.filter(~apsides), span=span)


def unexplained(extra: pl.DataFrame) -> pl.DataFrame:
    """Leave out visits to constellations too short for the dense search: an entry, and the entry back."""
    entries = extra.filter(kind="constellation_entry").sort("body", "jd_tt")
    limit = pl.when(pl.col("body") == "moon").then(SHORTEST_VISIT_DAYS["moon"]).otherwise(
        SHORTEST_VISIT_DAYS["planets"]
    )  # fmt: skip
    near = [
        (pl.col("jd_tt") - pl.col("jd_tt").shift(step).over("body")).abs().fill_null(float("inf")) < limit
        for step in (1, -1)
    ]
    brief = entries.filter(near[0] | near[1]).select("body", "jd_tt")
    return extra.join(brief, on=["body", "jd_tt"], how="anti")


def require_complete(outcome: Comparison) -> None:
    assert outcome.matched.height > 100
    assert outcome.missing.is_empty(), outcome.missing
    assert unexplained(outcome.extra).is_empty(), unexplained(outcome.extra)
    assert outcome.late.is_empty(), outcome.late


@pytest.mark.parametrize("year", [1612, 1993, 2417])
def test_nothing_is_missing_invented_or_late_in_a_year(store: TrackStore, sky: Sky, year: int) -> None:
    require_complete(compared(store, sky, (str(year), str(year + 1)), moon=False))


@pytest.mark.long
@pytest.mark.parametrize("years", [("1990", "2060"), ("1600", "1640"), ("2400", "2440")])
def test_nothing_is_missing_invented_or_late_in_decades(
    store: TrackStore, sky: Sky, years: tuple[str, str]
) -> None:
    require_complete(compared(store, sky, years, moon=False))


@pytest.mark.long
@pytest.mark.parametrize("years", [("1580", "1650"), ("1990", "2060"), ("2560", "2630")])
def test_nothing_is_missing_invented_or_late_in_two_centuries_with_the_moon(
    store: TrackStore, sky: Sky, years: tuple[str, str]
) -> None:
    require_complete(compared(store, sky, years, moon=True))


@pytest.mark.long
@pytest.mark.parametrize("body", LONG_ORBITS)
def test_perihelia_of_long_orbits_are_those_of_the_dense_search(
    store: TrackStore, sky: Sky, body: Body
) -> None:
    span = jd_of_date("1555-01-01"), jd_of_date("2645-01-01")
    kinds = (Kind.PERIHELION, Kind.APHELION)
    ours = almanac(store, Query(*span, frozenset(kinds), choice=Choice((body,), stars_for=())))
    theirs = one_per_orbit(run(sky, span, [kind.value for kind in kinds], bodies=[body.value]))
    outcome = match(ours, theirs, span=span)
    assert outcome.matched.height > 5
    assert outcome.complete, (outcome.missing, outcome.extra, outcome.late)


def gatherings_compared(store: TrackStore, sky: Sky, years: tuple[str, str]) -> Comparison:
    span = jd_of_date(f"{years[0]}-01-01"), jd_of_date(f"{years[1]}-01-01")
    choice = Choice(stars_for=())
    ours = almanac(store, Query(*span, frozenset({Kind.GATHERING}), choice=choice))
    ours = ours.filter(pl.col("detail").is_in(["+".join(group) for group in GATHERED]))
    theirs = run(sky, span, ["gathering"], gathered=GATHERED)
    theirs = theirs.filter(pl.col("separation_deg") < choice.limits.gathering_deg)
    return match(ours, theirs, span=span)


@pytest.mark.parametrize("years", [("2000", "2003"), pytest.param(("1990", "2060"), marks=pytest.mark.long)])
def test_gatherings_are_those_of_the_dense_search(
    store: TrackStore, sky: Sky, years: tuple[str, str]
) -> None:
    outcome = gatherings_compared(store, sky, years)
    assert outcome.matched.height > 1
    assert outcome.complete, (outcome.missing, outcome.extra, outcome.late)


def test_a_table_with_an_event_left_out_or_moved_does_not_pass(store: TrackStore, sky: Sky) -> None:
    span = jd_of_date("2001-01-01"), jd_of_date("2003-01-01")
    query = Query(*span, frozenset({Kind.STATION}), frozenset(Frame), Choice((Body.MARS,), stars_for=()))
    ours, theirs = almanac(store, query), run(sky, span, ["station"], bodies=["mars"])
    assert match(ours, theirs, span=span).complete
    assert match(ours[1:], theirs, span=span).missing.height == 1
    assert match(ours, theirs[1:], span=span).extra.height == 1
    moved = ours.with_columns(pl.col("jd_tt") + 2.0 / 86_400.0)
    assert match(moved, theirs, span=span).late.height == ours.height
