"""The event table: what was found, described and printed in the contract's columns."""

from __future__ import annotations

from collections.abc import Sequence
from concurrent.futures import ThreadPoolExecutor
from typing import Final

import numpy as np
import polars as pl

from wanderers import schema
from wanderers.arrays import Floats, Ints
from wanderers.ephemeris import constellations, timescales
from wanderers.ephemeris.appearance import appearance
from wanderers.ephemeris.blocks import block_start_jd
from wanderers.ephemeris.bodies import BODIES
from wanderers.ephemeris.dates import datetime64_from_jd, iso_strings
from wanderers.ephemeris.sky import FIRST_STAR
from wanderers.ephemeris.store import TrackStore
from wanderers.ephemeris.vectors import separation_deg
from wanderers.events.catalogue import Found, Query, find_events, sky_of, stars_met
from wanderers.events.kinds import NOBODY, Kind

SIGNIFICANT_DELTA_T_UNCERTAINTY_S: Final = 1.0
"""Uncertainty of UTC from which it is printed beside it."""

NOT_ENTERED: Final = -1
CONTACTS: Final = (1, 2, 3, 4)
UNNAMEABLE: Final = r"[^a-z0-9+_-]+"
"""What does not belong in a name of an event: blanks and accents of star names."""


def almanac(store: TrackStore, query: Query) -> pl.DataFrame:
    """Return the event table of a span, in order of time; columns: ``schema.EVENT_COLUMNS``."""
    return event_table(store, find_events(store, query))


def event_table(store: TrackStore, found: Sequence[Found]) -> pl.DataFrame:
    """Describe found events as a table."""
    ledger = pl.concat([_entries(one) for one in found] or [_entries_schema()])
    ledger = ledger.sort("jd_tt", "event_id")
    described = ledger.with_columns(**_appearance_columns(store, ledger), **_time_columns(ledger))
    return described.select(pl.col(name).cast(kind) for name, kind in schema.EVENT_COLUMNS.items())


def target_names() -> tuple[str, ...]:
    """Return the names of all targets by number: bodies, then stars."""
    return tuple(body.value for body in BODIES) + stars_met().name


def _entries(found: Found) -> pl.DataFrame:
    """Turn one batch into rows of a ledger: what is known before anything is looked up."""
    batch = found.batch
    names = pl.Series(target_names())
    none = np.full(batch.jd.size, np.nan)
    other = pl.Series(np.where(batch.other == NOBODY, 0, batch.other))
    alone = pl.Series(batch.other == NOBODY)
    contacts = np.full((batch.jd.size, 4), np.nan) if batch.contacts_jd is None else batch.contacts_jd
    entries = pl.DataFrame(
        {
            "kind": pl.repeat(batch.kind.value, batch.jd.size, eager=True),
            "detail": pl.Series([word or None for word in batch.details], dtype=pl.String).gather(batch.detail),
            "body": names.gather(batch.body),
            "other": names.gather(other).zip_with(~alone, pl.Series([None], dtype=pl.String)),
            "frame": pl.repeat(
                batch.frame.value if batch.frame else None, batch.jd.size, eager=True, dtype=pl.String
            ),
            "jd_tt": batch.jd,
            "figure_deg": none if batch.figure_deg is None else batch.figure_deg,
            "round": found.rounds,
            "ordinal": found.ordinals,
            "entered": np.full(batch.jd.size, NOT_ENTERED) if batch.entered is None else batch.entered,
            "body_number": batch.body,
            "other_number": batch.other,
        }
        | {f"contact{number}_jd_tt": contacts[:, number - 1] for number in CONTACTS}
    )
    return entries.with_columns(event_id=_event_id(batch.kind), **_meeting_columns(found))


def _meeting_columns(found: Found) -> dict[str, pl.Expr | pl.Series]:
    """Name the meeting an event belongs to and its part of it."""
    if found.meeting is None:
        nothing = pl.lit(None, dtype=pl.String)
        return {"meeting_id": nothing, "meeting_part": nothing}
    number, part, parts = (
        pl.Series(values) for values in (found.meeting.number, found.meeting.part, found.meeting.parts)
    )
    pair = pl.concat_str(pl.col("body"), pl.lit("-"), pl.col("other")).str.to_lowercase()
    return {
        "meeting_id": pl.concat_str(pair.str.replace_all(UNNAMEABLE, "_"), pl.lit("-m"), number),
        "meeting_part": pl.concat_str(part, pl.lit(" of "), parts),
    }


def _event_id(kind: Kind) -> pl.Expr:
    """Compose the name of an event from what never changes about it."""
    detail = pl.lit(None, dtype=pl.String) if kind is Kind.APPULSE else pl.col("detail")
    parts = [pl.col("kind"), pl.col("frame"), pl.col("body"), pl.col("other"), detail]
    named = pl.concat_str(parts, separator="-", ignore_nulls=True).str.to_lowercase()
    count = pl.concat_str(pl.lit("-c"), pl.col("round"), pl.lit("-"), pl.col("ordinal"))
    return named.str.replace_all(UNNAMEABLE, "_") + count


def _appearance_columns(store: TrackStore, ledger: pl.DataFrame) -> dict[str, pl.Series]:
    """Look up place, brightness and size of every event's body, block by block."""
    jd = ledger["jd_tt"].to_numpy()
    body, other = ledger["body_number"].to_numpy(), ledger["other_number"].to_numpy()
    indices = store.block_indices(float(jd[0]), float(jd[-1])) if jd.size else range(0)
    edges = np.searchsorted(jd, [block_start_jd(index) for index in (*indices[1:], indices.stop)])
    starts = np.concatenate([[0], edges[:-1]])

    def look_up(start: int, end: int) -> dict[str, np.ndarray]:
        some = slice(start, end)
        return _looked_up(store, body[some], other[some], jd[some])

    with ThreadPoolExecutor() as pool:
        parts = list(pool.map(look_up, starts.tolist(), [*edges[:-1].tolist(), jd.size]))
    joined = {name: np.concatenate([part[name] for part in parts]) for name in parts[0]}
    entered = ledger["entered"].to_numpy()
    stood_in = np.where(entered == NOT_ENTERED, joined.pop("constellation"), entered)
    constellation = pl.Series(constellations.ABBREVIATIONS).gather(stood_in)
    by_finder = ledger["kind"].is_in([Kind.GATHERING.value, Kind.TRANSIT.value])
    columns = {name: pl.Series(values, nan_to_null=True) for name, values in joined.items()}
    columns["separation_deg"] = ledger["figure_deg"].zip_with(by_finder, columns["separation_deg"])
    return columns | {"constellation": constellation}


def _looked_up(store: TrackStore, body: Ints, other: Ints, jd: Floats) -> dict[str, np.ndarray]:
    """Describe the bodies of one block's events."""
    if jd.size == 0:
        jd, body, other = np.array([store.span_jd[0]]), np.zeros(1, np.int64), np.zeros(1, np.int64)
        return {name: values[:0] for name, values in _looked_up(store, body, other, jd).items()}
    sky = sky_of(store, float(jd[0]), float(jd[-1]))
    seen = appearance(sky, body, jd)
    apart = np.full(jd.size, np.nan)
    pair = other != NOBODY
    apart[pair] = separation_deg(
        sky.apparent(body[pair], jd[pair])[0], sky.apparent(other[pair], jd[pair])[0]
    )
    return {
        "longitude_deg": seen.longitude_deg,
        "latitude_deg": seen.latitude_deg,
        "ra_deg": seen.ra_deg,
        "dec_deg": seen.dec_deg,
        "separation_deg": apart,
        "elongation_deg": seen.elongation_deg,
        "distance_au": seen.distance_au,
        "magnitude": seen.magnitude,
        "diameter_arcsec": seen.diameter_arcsec,
        "constellation": seen.constellation,
    }


def _time_columns(ledger: pl.DataFrame) -> dict[str, pl.Series]:
    """Print instants in TT and UTC, and how sure UTC is where it is not."""
    jd = ledger["jd_tt"].to_numpy()
    uncertainty = timescales.utc_uncertainty_s(jd)
    unsure = uncertainty > SIGNIFICANT_DELTA_T_UNCERTAINTY_S
    columns = {
        "tt": time_texts(jd, ""),
        "utc": time_texts(timescales.jd_utc_from_tt(jd), "Z"),
        "delta_t_s": pl.Series(np.where(unsure, timescales.delta_t_s(jd), np.nan), nan_to_null=True),
        "utc_uncertainty_s": pl.Series(np.where(unsure, uncertainty, np.nan), nan_to_null=True),
    }
    for number in CONTACTS:
        contact = ledger[f"contact{number}_jd_tt"].to_numpy()
        columns[f"contact{number}_utc"] = time_texts(timescales.jd_utc_from_tt(contact), "Z")
    return columns


def time_texts(jd: Floats, suffix: str) -> pl.Series:
    """Print Julian dates as ISO 8601 to the millisecond, null where NaN."""
    instants = datetime64_from_jd(jd)
    if np.isnan(jd).all():
        return pl.repeat(None, jd.size, eager=True, dtype=pl.String)
    years = instants.astype("datetime64[Y]").astype(np.int64) + 1970
    if years.min() < 0 or years.max() > 9999:
        texts = pl.Series(iso_strings(jd, suffix=suffix).tolist(), dtype=pl.String)
        return texts.zip_with(~pl.Series(np.isnan(jd)), pl.Series([None], dtype=pl.String))
    return pl.Series(instants).dt.to_string("%Y-%m-%dT%H:%M:%S%.3f" + suffix)
