"""Events from a site: the instant by the local clock and, apart from it, when and how it is best watched."""

from __future__ import annotations

from dataclasses import dataclass
from typing import Final

import numpy as np
import polars as pl

from wanderers.arrays import Bools, Floats
from wanderers.ephemeris.dates import datetime64_from_jd
from wanderers.ephemeris.store import TrackStore
from wanderers.ephemeris.timescales import jd_utc_from_tt
from wanderers.ephemeris.vectors import separation_deg, unit_vectors
from wanderers.events.catalogue import sky_of
from wanderers.site import clock, columns
from wanderers.site.airmass import airmass, dimmed_magnitude
from wanderers.site.compass import POINTS, compass_point
from wanderers.site.evenings import Evenings, evenings
from wanderers.site.event_targets import parties_of
from wanderers.site.event_words import verdict_table
from wanderers.site.hours import Opening
from wanderers.site.pairs import PLACEMENTS, bearing_deg, placement
from wanderers.site.party import Members, members_at
from wanderers.site.places import Site
from wanderers.site.prospects import Parties, Prospects, candidate_evenings, prospects
from wanderers.site.rules import Rules
from wanderers.site.sightings import Watch, watch

EVENTS_AT_ONCE: Final = 2_000
"""Events looked at together, so that memory stays small."""
MARGIN_DAYS: Final = 3.0
OTHER: Final = 1
"""Place of the body met among a party's members."""

Arrays = dict[str, Floats]


def from_site(
    store: TrackStore,
    site: Site,
    events: pl.DataFrame,
    rules: Rules | None = None,
    opening: Opening | None = None,
) -> pl.DataFrame:
    """Return an event table with what can be seen of each event from a site.

    Args:
        store: the tracks.
        site: from where.
        events: columns of ``schema.EVENT_COLUMNS``.
        rules: what counts as watchable.
        opening: weekdays and hours at which there is anybody to watch; None is always.

    Returns:
        the same rows in the same order, with ``columns.EVENT_VIEW_COLUMNS`` added, or replaced.

    Raises:
        UnknownNameError: the site's zone does not exist.
    """
    bare = events.drop(columns.EVENT_VIEW_COLUMNS, strict=False)
    ordered = bare.with_row_index("row").sort("jd_tt")
    parts = [
        _part(store, site, some, rules or Rules(), opening or Opening())
        for some in ordered.iter_slices(EVENTS_AT_ONCE)
    ]
    if not ordered.height:
        return bare.with_columns(
            pl.lit(None, dtype=kind).alias(name) for name, kind in columns.EVENT_VIEW_COLUMNS.items()
        )
    return pl.concat(parts).sort("row").drop("row")


@dataclass(frozen=True, slots=True)
class _View:
    """Events, their best evenings, and how all members stand then and at the instants."""

    watched: Watch
    parties: Parties
    best: Prospects
    members: Members
    at_instant: Members

    @property
    def can(self) -> Bools:
        """Whether there is a best moment."""
        return np.isfinite(self.best.best_jd)


def _part(
    store: TrackStore, site: Site, events: pl.DataFrame, rules: Rules, opening: Opening
) -> pl.DataFrame:
    """Look at a handful of events."""
    parties = parties_of(events)
    some = evenings_around(store, site, parties)
    ends = np.array([some.start_jd[0], some.end_jd[-1], *parties.jd[[0, -1]]])
    sky = sky_of(store, float(ends.min()), float(ends.max()))
    watched = watch(sky, some, rules, opening.stretches(some))
    best = prospects(watched, parties, opening.allows(some.days))
    moment = np.where(np.isnan(best.best_jd), some.middle_jd[best.evening], best.best_jd)
    members = members_at(watched, parties.member, moment)
    instants = members_at(watched, parties.member[:, :1], parties.jd)
    view = _View(watched, parties, best, members, instants)
    verdict = verdict_table(watched, parties, best, members, events)
    added = pl.DataFrame(_texts(view) | _angles(view) | _pair(view, events)).hstack(verdict)
    return events.hstack(columns.arranged(added, columns.EVENT_VIEW_COLUMNS))


def evenings_around(store: TrackStore, site: Site, parties: Parties) -> Evenings:
    """Return the evenings within reach of any of the events, those outside the kernel left out.

    An event at the kernel's end may have none within reach: the nearest is there to tell how things stand.
    """
    low, high = store.span_jd
    ends = np.clip([parties.jd[0] - MARGIN_DAYS, parties.jd[-1] + MARGIN_DAYS], low, high)
    first, last = datetime64_from_jd(jd_utc_from_tt(ends)).astype("datetime64[D]")
    whole = evenings(site, first - np.timedelta64(1, "D"), last + np.timedelta64(2, "D"))
    whole = whole.chosen((whole.start_jd > low) & (whole.end_jd < high))
    _, needed = candidate_evenings(whole.start_jd, whole.end_jd, parties.jd, parties.reach_days)
    nearest = np.searchsorted(whole.end_jd[:-1], parties.jd, side="right")
    return whole.chosen(np.union1d(needed, nearest))


def _texts(view: _View) -> dict[str, pl.Series]:
    """Return names, dates and times."""
    some, best = view.watched.evenings, view.best
    local_date, local_time = clock.local_dates_and_times(some.zone, view.parties.jd)
    times = {"window_start": best.start_jd, "best": best.best_jd, "window_end": best.end_jd}
    return {
        "site": pl.repeat(some.site.name, view.can.size, eager=True),
        "zone": pl.repeat(some.zone.name, view.can.size, eager=True),
        "local_date": local_date,
        "local_time": local_time,
        "evening_date": pl.Series(np.datetime_as_string(some.days)).gather(best.evening),
        **{f"{name}_utc": clock.utc_texts(jd) for name, jd in times.items()},
        **{f"{name}_local": clock.local_texts(some.zone, jd) for name, jd in times.items()},
    }


def _angles(view: _View) -> dict[str, pl.Series]:
    """Return where the body stands, and Sun and Moon with it, null where there is no best moment."""
    members, site = view.members, view.watched.evenings.site
    altitude, azimuth = members.altitude_deg[:, 0], members.azimuth_deg[:, 0]
    extinction = view.watched.rules.criteria.extinction_at(site.elevation_m)
    numbers = {
        "altitude_deg": altitude,
        "airless_altitude_deg": members.airless_altitude_deg[:, 0],
        "azimuth_deg": azimuth,
        "airmass": airmass(altitude),
        "sun_altitude_deg": members.sun_altitude_deg,
        "dimmed_magnitude": dimmed_magnitude(members.magnitude[:, 0], altitude, extinction),
        "moon_illuminated": members.moon_illuminated,
        "moon_separation_deg": members.moon_separation_deg[:, 0],
        "moon_altitude_deg": members.moon_altitude_deg,
    }
    point = pl.Series(POINTS).gather(pl.Series(compass_point(azimuth)))
    now = {
        "instant_altitude_deg": view.at_instant.altitude_deg[:, 0],
        "instant_sun_altitude_deg": view.at_instant.sun_altitude_deg,
    }
    return (
        {name: _known(values, view.can) for name, values in numbers.items()}
        | {name: pl.Series(values) for name, values in now.items()}
        | {"compass": _where(point, view.can)}
    )


def _pair(view: _View, events: pl.DataFrame) -> dict[str, pl.Series]:
    """Return how two bodies that meet stand to each other with the horizon level, null for other events."""
    members = view.members
    paired = view.can & events["other"].is_not_null().to_numpy()
    second = min(OTHER, members.there.shape[1] - 1)
    altitude, azimuth = members.airless_altitude_deg, members.azimuth_deg
    places = [unit_vectors(azimuth[:, slot], altitude[:, slot]) for slot in (0, second)]
    bearing = bearing_deg(altitude[:, 0], azimuth[:, 0], altitude[:, second], azimuth[:, second])
    where = placement(np.where(paired, bearing, 0.0))
    upper = altitude[:, 0] > altitude[:, second]
    left = bearing < 180.0
    return {
        "seen_separation_deg": _known(separation_deg(*places), paired),
        "seen_placement": _where(pl.Series(PLACEMENTS).gather(pl.Series(where)), paired),
        "upper": _where(events["body"].zip_with(pl.Series(upper), events["other"]), paired),
        "left": _where(events["body"].zip_with(pl.Series(left), events["other"]), paired),
        "other_altitude_deg": _known(members.altitude_deg[:, second], paired),
        "other_magnitude": _known(members.magnitude[:, second], paired),
    }


def _known(values: Floats, keep: Bools) -> pl.Series:
    """Return numbers, null where they mean nothing."""
    return pl.Series(np.where(keep, values, np.nan), nan_to_null=True)


def _where(texts: pl.Series, keep: Bools) -> pl.Series:
    """Return texts, null where they mean nothing."""
    return texts.zip_with(pl.Series(keep), pl.Series([None], dtype=pl.String))
