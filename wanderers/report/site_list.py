"""What a site can watch, for the top of its page: each meeting once, in order of time, by what it needs."""

from __future__ import annotations

from dataclasses import dataclass
from typing import Final

import polars as pl

from wanderers.ephemeris.bodies import BODIES
from wanderers.events.kinds import Kind
from wanderers.report import site_words, words
from wanderers.site.visibility import Verdict

SIGHTS: Final = (
    Kind.APPULSE,
    Kind.CONJUNCTION,
    Kind.OCCULTATION,
    Kind.TRANSIT,
    Kind.OPPOSITION,
    Kind.GREATEST_ELONGATION,
    Kind.GREATEST_BRILLIANCY,
    Kind.GATHERING,
)
"""Kinds that somebody would go out for; the others stand in the whole table only."""
GROUPS: Final = (
    (Verdict.NAKED_EYE, "With the naked eye"),
    (Verdict.BINOCULARS, "With binoculars"),
    (Verdict.TELESCOPE, "With a telescope"),
    (Verdict.NOT_VISIBLE, "Not to be seen from here"),
)
OF_BODIES: Final = pl.col("other").is_null() | pl.col("other").is_in([body.value for body in BODIES])


@dataclass(frozen=True, slots=True)
class Sight:
    """One line.

    Attributes:
        event_id: the row it comes from.
        day: date of the evening, weekday first; of the instant where nothing can be seen.
        what: what happens.
        hours: from when to when to look, local time; empty where nothing can be seen.
        best: the best moment, local time; likewise.
        where: height and direction then; likewise.
        how: how well it shows, or why not, how two stand to each other, what becomes of discs.
        instant: the instant itself by the local clock.
        caution: what to mind.
    """

    event_id: str
    day: str
    what: str
    hours: str
    best: str
    where: str
    how: str
    instant: str
    caution: str


@dataclass(frozen=True, slots=True)
class SightGroup:
    """The sights that need one aid, or cannot be seen."""

    title: str
    sights: tuple[Sight, ...]


def sight_groups(events: pl.DataFrame) -> tuple[SightGroup, ...]:
    """Return the sights of an event table seen from a site, easiest first."""
    chosen = one_a_meeting(events.filter(pl.col("kind").is_in([kind.value for kind in SIGHTS]), OF_BODIES))
    in_time = chosen.sort(pl.coalesce("best_utc", "utc"))
    groups = [
        SightGroup(title, tuple(map(_sight, in_time.filter(pl.col("verdict") == verdict.value).to_dicts())))
        for verdict, title in GROUPS
    ]
    return tuple(group for group in groups if group.sights)


def one_a_meeting(events: pl.DataFrame) -> pl.DataFrame:
    """Return events with one line a meeting: where two come closest, else the first conjunction."""
    ranked = events.with_columns(
        _meeting=pl.coalesce("meeting_id", "event_id"), _rank=pl.col("kind") != Kind.APPULSE.value
    ).sort("_rank", "separation_deg")
    first = ranked.unique("_meeting", keep="first", maintain_order=True)
    return first.select(events.columns).sort("jd_tt")


def _sight(event: words.Event) -> Sight:
    seen = site_words.is_watchable(event)
    start, best, end = (
        (site_words.local(event[f"{name}_local"]) for name in ("window_start", "best", "window_end"))
        if seen
        else (None, None, None)
    )
    return Sight(
        event["event_id"],
        site_words.night_of(start, end) if start and end else site_words.day_words(event["local_date"]),
        words.summary(event),
        f"{site_words.clock(start)}–{site_words.clock(end)}" if start and end else "",
        site_words.clock(best) if best else "",
        f"{event['altitude_deg']:.0f}° {event['compass']}" if seen else "",
        _how(event, seen=seen),
        words.minute(f"{event['local_date']}T{event['local_time']}"),
        site_words.caution(event)[0] if event["caution"] else "",
    )


def _how(event: words.Event, *, seen: bool) -> str:
    parts = [site_words.sentence(event["verdict_reason"]) + "."]
    if seen and event["seen_placement"]:
        parts.append(site_words.placed(event))
    shown = event.get("circumstances") or ""
    if shown.startswith(("hidden", "partly", "on the Sun")):
        parts.append(site_words.sentence(shown) + ".")
    return " ".join(parts)
