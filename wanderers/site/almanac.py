"""The event table from a site: what happens, what can be seen of it, and what only this site sees."""

from __future__ import annotations

from dataclasses import replace
from typing import Final

import numpy as np
import polars as pl

from wanderers import schema
from wanderers.ephemeris.bodies import Body
from wanderers.ephemeris.frames import Frame
from wanderers.ephemeris.sky import FIRST_STAR, Sky
from wanderers.ephemeris.store import TrackStore
from wanderers.events.almanac import event_table
from wanderers.events.catalogue import Query, name_events, sky_of, stars_met
from wanderers.events.discs import OCCULTATION_DETAILS, Pairs
from wanderers.events.kept import kept_almanac
from wanderers.events.kinds import Batch, Kind, batch
from wanderers.site.circumstances import with_circumstances
from wanderers.site.event_targets import parties_of
from wanderers.site.event_view import from_site
from wanderers.site.hours import Opening
from wanderers.site.local_discs import PARALLAX_DEG, local_discs
from wanderers.site.places import Site
from wanderers.site.rules import Rules

MARGIN_DAYS: Final = 1.0
MOON_PARALLAX_DEG: Final = 1.05
"""The largest there is: 61.5 arcminutes, with a little to spare."""


def almanac_from_site(
    store: TrackStore,
    query: Query,
    site: Site,
    rules: Rules | None = None,
    opening: Opening | None = None,
) -> pl.DataFrame:
    """Return the event table of a span with what a site sees of each event.

    Occultations by the Moon that happen at the site but not for the Earth's centre are listed too, at the
    instant of the least separation from there.

    Args:
        store: the tracks.
        query: what is asked.
        site: from where.
        rules: what counts as watchable.
        opening: weekdays and hours at which there is anybody to watch.

    Returns:
        ``schema.EVENT_COLUMNS``, ``columns.EVENT_VIEW_COLUMNS`` and ``columns.LOCAL_DISC_COLUMNS``.
    """
    return seen_from_site(store, site, events_of_site(store, query, site), rules, opening)


def seen_from_site(
    store: TrackStore,
    site: Site,
    events: pl.DataFrame,
    rules: Rules | None = None,
    opening: Opening | None = None,
) -> pl.DataFrame:
    """Add to events all that a site sees of them."""
    return with_circumstances(store, site, from_site(store, site, events, rules, opening), rules)


def events_of_site(store: TrackStore, query: Query, site: Site) -> pl.DataFrame:
    """Return the event table of a span with the occultations by the Moon that only the site sees."""
    return with_local_occultations(store, query, site, kept_almanac(store, query))


def with_local_occultations(
    store: TrackStore, query: Query, site: Site, events: pl.DataFrame
) -> pl.DataFrame:
    """Return the event table of a query with the occultations by the Moon that only a site sees."""
    if Kind.OCCULTATION not in query.kinds or Body.MOON not in store.kernel.bodies:
        return events
    passes = _close_passes(store, query, events)
    known = events.filter(pl.col("kind") == Kind.OCCULTATION.value)
    passes = passes.join(known, on=["body", "other", "jd_tt"], how="anti")
    if passes.is_empty():
        return events
    extra = local_occultations(store, site, passes)
    return pl.concat([events, extra]).sort("jd_tt", "event_id")


def with_parallax(query: Query) -> Query:
    """Return a query whose limits for the Moon reach as far as parallax may move it."""
    limits = query.choice.limits
    wider = replace(
        limits, moon_deg=limits.moon_deg + MOON_PARALLAX_DEG, stars_deg=limits.stars_deg + MOON_PARALLAX_DEG
    )
    return replace(query, choice=replace(query.choice, limits=wider))


def _close_passes(store: TrackStore, query: Query, events: pl.DataFrame) -> pl.DataFrame:
    """Return the appulses in which parallax can bring the Moon before a planet or star."""
    limits = query.choice.limits
    if Kind.APPULSE not in query.kinds or min(limits.moon_deg, limits.stars_deg) < PARALLAX_DEG:
        wide = replace(limits, moon_deg=PARALLAX_DEG, stars_deg=PARALLAX_DEG)
        choice = replace(query.choice, limits=wide)
        asked = Query(
            query.jd_from, query.jd_to, frozenset({Kind.APPULSE}), frozenset({Frame.ECLIPTIC}), choice
        )
        events = kept_almanac(store, asked)
    return events.filter(
        pl.col("kind") == Kind.APPULSE.value,
        pl.col("body") == Body.MOON.value,
        pl.col("separation_deg") < PARALLAX_DEG,
        ~pl.col("other").is_in([name for name, is_star in _stars() if not is_star]),
    )


def _stars() -> list[tuple[str, bool]]:
    """Return the names of stars and clusters, and whether each is a star."""
    met = stars_met()
    return [(name, kind == "star") for name, kind in zip(met.name, met.kind, strict=True)]


def local_occultations(store: TrackStore, site: Site, passes: pl.DataFrame) -> pl.DataFrame:
    """Return as events those close passes of the Moon in which it hides the other at a site."""
    jd = passes["jd_tt"].to_numpy()
    member = parties_of(passes).member
    pairs = Pairs(member[:, 0], member[:, 1], jd)
    hides = local_discs(_sky_around(store, jd), site, pairs).gap_deg < 0.0
    if not hides.any():
        return pl.DataFrame(schema=schema.EVENT_COLUMNS)
    return event_table(store, [name_events(_as_batch(pairs.chosen(hides)))])


def _sky_around(store: TrackStore, jd: np.ndarray) -> Sky:
    low, high = store.span_jd
    return sky_of(store, max(float(jd.min()) - MARGIN_DAYS, low), min(float(jd.max()) + MARGIN_DAYS, high))


def _as_batch(pairs: Pairs) -> Batch:
    """Return occultations that happen at the site alone: no contacts for the Earth's centre."""
    detail = np.where(pairs.second >= FIRST_STAR, "star", "moon")
    return batch(
        Kind.OCCULTATION,
        None,
        pairs.jd,
        pairs.first,
        other=pairs.second,
        detail=np.array([OCCULTATION_DETAILS.index(word) for word in detail.tolist()], dtype=np.int64),
        details=OCCULTATION_DETAILS,
    )
