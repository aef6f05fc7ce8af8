"""The ledger: found events as rows of numbers and names, described but not yet printed."""

from __future__ import annotations

import re
from collections.abc import Callable, Iterator, Sequence
from functools import cache
from itertools import pairwise
from typing import Final

import numpy as np
import polars as pl

from wanderers import processes
from wanderers.arrays import Floats, Ints
from wanderers.ephemeris import constellations
from wanderers.ephemeris.appearance import appearance
from wanderers.ephemeris.blocks import block_start_jd
from wanderers.ephemeris.bodies import BODIES
from wanderers.ephemeris.store import TrackStore
from wanderers.ephemeris.vectors import separation_deg
from wanderers.events.catalogue import Found, sky_of, stars_met
from wanderers.events.kinds import NOBODY, Kind

NOT_ENTERED: Final = -1
CONTACTS: Final = (1, 2, 3, 4)
UNNAMEABLE: Final = r"[^a-z0-9+_-]+"
"""What does not belong in a name of an event: blanks and accents of star names."""

LOOKED_UP: Final = (
    "longitude_deg",
    "latitude_deg",
    "ra_deg",
    "dec_deg",
    "separation_deg",
    "elongation_deg",
    "distance_au",
    "magnitude",
    "diameter_arcsec",
    "constellation",
)

Arrays = dict[str, np.ndarray]


def ledger(store: TrackStore, found: Sequence[Found]) -> pl.DataFrame:
    """Return found events as rows, in order of time; None-like values are null.

    Besides columns of the event table there are ``round``, ``ordinal`` and ``approach`` (what names are made
    of), ``figure_deg`` (what the finder measured), the contacts as Julian dates, and the target numbers.
    """
    return pl.concat(ledgers(store, found))


def ledgers(store: TrackStore, found: Sequence[Found]) -> Iterator[pl.DataFrame]:
    """Yield the ledger in pieces, a block of tracks each, so that no more need be in memory."""
    parts = _by_block(store, found)
    columns = processes.side_by_side(lambda number: _looked_up(store, parts[number]), range(len(parts)))
    for part, looked_up in zip(parts, columns, strict=True):
        entries = pl.concat([_entries(one) for one in part])
        yield entries.with_columns(**_appearance_columns(entries, looked_up)).sort("jd_tt", "event_id")


def _by_block(store: TrackStore, found: Sequence[Found]) -> list[list[Found]]:
    """Cut batches where blocks of tracks meet; the last part may be without events."""
    ends = [end for one in found if one.batch.jd.size for end in one.batch.jd[[0, -1]].tolist()]
    ends = ends or [store.span_jd[0]]
    starts = [block_start_jd(index) for index in store.block_indices(min(ends), max(ends))]
    edges = [np.searchsorted(one.batch.jd, [-np.inf, *starts[1:], np.inf]) for one in found]
    return [
        [one.chosen(slice(*edge[number : number + 2])) for one, edge in zip(found, edges, strict=True)]
        for number in range(len(starts))
    ]


def target_names() -> tuple[str, ...]:
    """Return the names of all targets by number: bodies, then stars."""
    return tuple(body.value for body in BODIES) + stars_met().name


def _entries(found: Found) -> pl.DataFrame:
    """Turn one batch into rows of a ledger: what is known before anything is looked up."""
    batch = found.batch
    names = pl.Series(target_names())
    none = np.full(batch.jd.size, np.nan)
    contacts = np.full((batch.jd.size, 4), np.nan) if batch.contacts_jd is None else batch.contacts_jd
    entries = pl.DataFrame(
        {
            "detail": pl.Series([word or None for word in batch.details], dtype=pl.String).gather(
                batch.detail
            ),
            "body": names.gather(batch.body),
            "other": _of_pairs(names, batch.other),
            "jd_tt": batch.jd,
            "figure_deg": none if batch.figure_deg is None else batch.figure_deg,
            "round": found.rounds,
            "ordinal": found.ordinals,
            "approach": np.zeros_like(found.rounds) if found.meeting is None else found.meeting.approach,
            "entered": np.full(batch.jd.size, NOT_ENTERED) if batch.entered is None else batch.entered,
            "body_number": batch.body,
            "other_number": batch.other,
        }
        | {f"contact{number}_jd_tt": contacts[:, number - 1] for number in CONTACTS}
    )
    frame = pl.lit(batch.frame.value if batch.frame else None, dtype=pl.String)
    return entries.with_columns(
        kind=pl.lit(batch.kind.value), frame=frame, event_id=_event_id(found), **_meeting_columns(found)
    )


def event_ids(found: Found) -> pl.Series:
    """Return the names of a batch's events."""
    return _entries(found)["event_id"]


def _meeting_columns(found: Found) -> dict[str, pl.Expr | pl.Series]:
    """Name the meeting an event belongs to and its part of it."""
    if found.meeting is None:
        nothing = pl.lit(None, dtype=pl.String)
        return {"meeting_id": nothing, "meeting_part": nothing}
    number, part, parts = (
        pl.Series(values) for values in (found.meeting.number, found.meeting.part, found.meeting.parts)
    )
    names = _nameable(target_names())
    body, other = names.gather(found.batch.body), names.gather(found.batch.other)
    return {
        "meeting_id": pl.concat_str(body, pl.lit("-"), other, pl.lit("-m"), number),
        "meeting_part": pl.when(parts > 0).then(pl.concat_str(part, pl.lit(" of "), parts)),
    }


def _event_id(found: Found) -> pl.Expr:
    """Compose the names of a batch's events from what never changes about them.

    Words are made nameable before they are handed out to the events: there are few of them.
    """
    batch = found.batch
    targets, kind = _nameable(target_names()), _nameable((batch.kind.value,))[0]
    parts: list[pl.Expr | pl.Series] = [pl.lit(kind)]
    if batch.kind is not Kind.GATHERING:
        parts += [pl.lit(batch.frame.value)] if batch.frame else []
        parts += [targets.gather(batch.body), _of_pairs(targets, batch.other)]
    if batch.kind is not Kind.APPULSE:
        parts.append(_nameable(batch.details).gather(batch.detail))
    if batch.entered is not None:
        parts.append(_nameable(constellations.ABBREVIATIONS).gather(batch.entered))
    count = pl.concat_str(pl.lit("c"), pl.col("round"), pl.lit("-"), pl.col("ordinal"))
    return pl.concat_str([*parts, count], separator="-", ignore_nulls=True)


@cache
def _nameable(words: tuple[str, ...]) -> pl.Series:
    """Return words as they stand in names of events, null for an empty one."""
    named = [re.sub(UNNAMEABLE, "_", word.lower()) or None for word in words]
    return pl.Series(named, dtype=pl.String)


def _of_pairs(names: pl.Series, other: Ints) -> pl.Series:
    """Return the names of second bodies, null where there is none."""
    alone = pl.Series(other == NOBODY)
    named = names.gather(np.where(other == NOBODY, 0, other))
    return named.zip_with(~alone, pl.Series([None], dtype=pl.String))


def _appearance_columns(entries: pl.DataFrame, looked_up: Arrays) -> dict[str, pl.Series]:
    """Return columns of place, brightness and size of every event's body."""
    entered = entries["entered"].to_numpy()
    stood_in = np.where(entered == NOT_ENTERED, looked_up.pop("constellation"), entered)
    constellation = pl.Series(constellations.ABBREVIATIONS).gather(stood_in)
    by_finder = entries["kind"].is_in([Kind.GATHERING.value, Kind.TRANSIT.value])
    columns = {name: pl.Series(values, nan_to_null=True) for name, values in looked_up.items()}
    columns["separation_deg"] = entries["figure_deg"].zip_with(by_finder, columns["separation_deg"])
    return columns | {"constellation": constellation}


def by_block(store: TrackStore, jd: Floats, look_up: Callable[[slice], Arrays]) -> Arrays:
    """Apply a function to the events of each block of tracks, on all cores, and join what it returns.

    Args:
        store: the tracks.
        jd: TT Julian dates, rising, shape (n,).
        look_up: takes a slice of the events, returns arrays of its length.
    """
    if jd.size == 0:
        return look_up(slice(0, 0))
    indices = store.block_indices(float(jd[0]), float(jd[-1]))
    inner = np.searchsorted(jd, [block_start_jd(index) for index in indices[1:]]).tolist()
    edges = sorted({0, *inner, jd.size})
    parts = list(processes.side_by_side(look_up, [slice(*ends) for ends in pairwise(edges)]))
    return {name: np.concatenate([part[name] for part in parts]) for name in parts[0]}


def _looked_up(store: TrackStore, part: Sequence[Found]) -> Arrays:
    """Look up the bodies of one block's events, batch after batch."""
    body, other, jd = (
        np.concatenate([getattr(one.batch, name) for one in part]) for name in ("body", "other", "jd")
    )
    if jd.size == 0:
        return {name: np.empty(0, dtype=np.int64 if name == "constellation" else float) for name in LOOKED_UP}
    sky = sky_of(store, float(jd.min()), float(jd.max()))
    seen = appearance(sky, body, jd)
    apart = np.full(jd.size, np.nan)
    pair = other != NOBODY
    apart[pair] = separation_deg(seen.direction[:, pair], sky.apparent(other[pair], jd[pair])[0])
    return {name: getattr(seen, name, apart) for name in LOOKED_UP}
