"""What an occultation, a transit or a close pass of the Moon comes to at a site: columns, words, verdict."""

from __future__ import annotations

from typing import Final

import numpy as np
import polars as pl

from wanderers.arrays import Floats, Ints
from wanderers.ephemeris.bodies import Body
from wanderers.ephemeris.sky import SUN
from wanderers.ephemeris.store import TrackStore
from wanderers.events.catalogue import sky_of, stars_met
from wanderers.events.discs import Pairs
from wanderers.events.kinds import Kind
from wanderers.site import clock, columns, disc_words
from wanderers.site.disc_verdicts import Contacts, judged
from wanderers.site.event_targets import parties_of
from wanderers.site.event_view import evenings_around
from wanderers.site.local_discs import PARALLAX_DEG, LocalDiscs, local_discs
from wanderers.site.places import Site
from wanderers.site.rules import Rules
from wanderers.site.sightings import Watch, watch

CLOSE_PASS: Final = (
    (pl.col("kind") == Kind.APPULSE.value)
    & (pl.col("body") == Body.MOON.value)
    & (pl.col("separation_deg") < PARALLAX_DEG)
)
CLUSTERS: Final = [
    name for name, kind in zip(stars_met().name, stars_met().kind, strict=True) if kind == "cluster"
]
"""Wider than the Moon: never hidden as a whole."""
IS_DISC: Final = pl.col("kind").is_in([Kind.OCCULTATION.value, Kind.TRANSIT.value]) | CLOSE_PASS & ~pl.col(
    "other"
).is_in(CLUSTERS)


def with_circumstances(
    store: TrackStore, site: Site, table: pl.DataFrame, rules: Rules | None = None
) -> pl.DataFrame:
    """Add what discs that meet come to at a site, and let their contacts decide the verdict.

    Args:
        store: the tracks.
        site: from where.
        table: events with ``columns.EVENT_VIEW_COLUMNS``.
        rules: what counts as watchable.

    Returns:
        the same rows with ``columns.LOCAL_DISC_COLUMNS`` added, null for other events.
    """
    rows = table.with_row_index("row")
    some = rows.filter(IS_DISC).sort("jd_tt")
    if some.is_empty():
        empty = (pl.lit(None, dtype=kind).alias(name) for name, kind in columns.LOCAL_DISC_COLUMNS.items())
        return table.with_columns(empty)
    described = _described(store, site, some, rules or Rules())
    others = rows.filter(~IS_DISC)
    return (
        pl.concat([described, others], how="diagonal").sort("row").drop("row").select(described.columns[1:])
    )


def _described(store: TrackStore, site: Site, events: pl.DataFrame, rules: Rules) -> pl.DataFrame:
    parties = parties_of(events)
    some = evenings_around(store, site, parties)
    sky = sky_of(store, float(some.start_jd[0]), float(some.end_jd[-1]))
    watched = watch(sky, some, rules)
    pairs = _pairs(parties.member, events, parties.jd)
    discs = local_discs(sky, site, pairs)
    contacts = judged(watched, pairs, discs)
    added = pl.DataFrame(_columns(watched, discs, contacts)).with_columns(
        circumstances=disc_words.circumstances(watched, pairs, discs, contacts)
    )
    added = columns.arranged(added, columns.LOCAL_DISC_COLUMNS)
    return _decided(watched, events, pairs, contacts, added["circumstances"]).hstack(added)


def _pairs(member: Ints, events: pl.DataFrame, jd: Floats) -> Pairs:
    """Return which bodies meet: the Sun comes first in a transit, as what is in front is known then."""
    transit = (events["kind"] == Kind.TRANSIT.value).to_numpy()
    second = member[:, min(1, member.shape[1] - 1)]
    return Pairs(np.where(transit, SUN, member[:, 0]), np.where(transit, member[:, 0], second), jd)


def _columns(watched: Watch, discs: LocalDiscs, contacts: Contacts) -> dict[str, pl.Series]:
    """Return instants, angles and limbs."""
    zone = watched.evenings.zone
    out = {
        "local_closest_utc": clock.utc_texts(discs.closest_jd),
        "local_closest_local": clock.local_texts(zone, discs.closest_jd),
        "local_separation_deg": pl.Series(discs.separation_deg),
    }
    for number in columns.CONTACTS:
        jd = discs.contacts_jd[:, number - 1]
        out[f"local_contact{number}_utc"] = clock.utc_texts(jd)
        out[f"local_contact{number}_local"] = clock.local_texts(zone, jd)
        altitude = contacts.altitude_deg[:, number - 1]
        out[f"local_contact{number}_altitude_deg"] = pl.Series(altitude, nan_to_null=True)
    limbs = (("disappears_limb", 0), ("reappears_limb", 3))
    return out | {name: _limb(discs, contacts, at) for name, at in limbs}


def _limb(discs: LocalDiscs, contacts: Contacts, at: int) -> pl.Series:
    """Return at which limb of the Moon a contact is; null without the Moon or where it does not happen."""
    known = contacts.by_moon & np.isfinite(discs.contacts_jd[:, at])
    words = pl.Series(["bright", "dark"]).gather(pl.Series(discs.by_dark_limb[:, at].astype(np.int64)))
    return words.zip_with(pl.Series(known), pl.Series([None], dtype=pl.String))


def _decided(
    watched: Watch, events: pl.DataFrame, pairs: Pairs, contacts: Contacts, circumstances: pl.Series
) -> pl.DataFrame:
    """Let contacts, not the pair, decide what can be seen of an occultation or a transit."""
    own = pl.Series((events["kind"] != Kind.APPULSE.value).to_numpy())
    replaced = disc_words.verdict_columns(watched, pairs, contacts)
    happens = pl.Series(contacts.happens)
    replaced["verdict_reason"] = replaced["verdict_reason"].zip_with(happens, circumstances)
    replaced["evening_date"] = events["local_date"].zip_with(
        pl.Series(contacts.is_transit), replaced["evening_date"]
    )
    replaced["caution"] = replaced["caution"].zip_with(replaced["caution"].is_not_null(), events["caution"])
    return events.with_columns(
        pl.when(own).then(values).otherwise(pl.col(name)).alias(name) for name, values in replaced.items()
    )
