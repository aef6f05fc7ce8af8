"""Between which conjunctions with the Sun a planet has its apparitions, and what happens inside."""

from __future__ import annotations

from collections.abc import Sequence
from dataclasses import dataclass
from itertools import pairwise
from typing import Any, Final

import numpy as np
import polars as pl

from wanderers.ephemeris.bodies import INNER, Body
from wanderers.ephemeris.store import TrackStore
from wanderers.events.almanac import almanac
from wanderers.events.catalogue import Query
from wanderers.events.kinds import Kind
from wanderers.events.scene import Choice

KINDS: Final = frozenset({Kind.SOLAR_CONJUNCTION, Kind.OPPOSITION, Kind.GREATEST_ELONGATION})
LONGEST_DAYS: Final = {Body.MERCURY: 90.0, Body.VENUS: 330.0, Body.MARS: 830.0}
LONG_DAYS: Final = 420.0
"""More than ever lies between two conjunctions of a planet: the last is for all beyond Mars."""
BESIDE_DAYS: Final = 8.0
"""So long a planet far north or south of the Sun is followed in the evening after inferior conjunction, and
in the morning before it: Venus may show on both sides of one night."""

EVENING: Final = "evening"
MORNING: Final = "morning"
BOTH: Final = "morning_to_evening"


@dataclass(frozen=True, slots=True)
class Cycle:
    """The time between two conjunctions with the Sun.

    Attributes:
        body: the planet.
        kind: ``evening``, ``morning``, or ``morning_to_evening`` for a planet beyond the Earth.
        jd_from: TT, the former conjunction, or the beginning of the kernel.
        jd_to: TT, the latter, or the end of the kernel.
        begins: whether ``jd_from`` is a conjunction.
        ends: whether ``jd_to`` is.
        event: the greatest elongation or the opposition inside, a row of the event table, or None.
    """

    body: Body
    kind: str
    jd_from: float
    jd_to: float
    begins: bool
    ends: bool
    event: dict[str, Any] | None

    @property
    def watched_from(self) -> float:
        """TT from which the planet may show in this part of the sky."""
        return self.jd_from - (BESIDE_DAYS if self.kind == MORNING else 0.0)

    @property
    def watched_to(self) -> float:
        """TT until which it may."""
        return self.jd_to + (BESIDE_DAYS if self.kind == EVENING else 0.0)


def cycles(store: TrackStore, jd_from: float, jd_to: float, bodies: Sequence[Body]) -> list[Cycle]:
    """Return the cycles of bodies that reach into a span, TT, body by body in order of time."""
    longest = max(LONGEST_DAYS.get(body, LONG_DAYS) for body in bodies)
    low, high = store.span_jd
    query = Query(
        max(jd_from - longest, low), min(jd_to + longest, high), KINDS, choice=Choice(tuple(bodies))
    )
    events = almanac(store, query)
    found: list[Cycle] = []
    for body in bodies:
        own = events.filter(pl.col("body") == body.value)
        found += [
            cycle
            for cycle in _cycles_of(body, own, store.span_jd)
            if cycle.jd_from < jd_to and cycle.jd_to > jd_from
        ]
    return found


def _cycles_of(body: Body, events: pl.DataFrame, ends: tuple[float, float]) -> list[Cycle]:
    """Return the cycles between a body's conjunctions, and those that the kernel cuts."""
    meetings = events.filter(pl.col("kind") == Kind.SOLAR_CONJUNCTION.value)
    if meetings.is_empty():
        return []
    marks: list[tuple[float, str | None]] = list(zip(meetings["jd_tt"], meetings["detail"], strict=True))
    # Whether an end is the kernel's is known by where it lies: nothing is claimed beyond.
    longest = LONGEST_DAYS.get(body, LONG_DAYS)
    if marks[0][0] - ends[0] < longest:
        marks.insert(0, (ends[0], _opposite(marks[0][1])))
    if ends[1] - marks[-1][0] < longest:
        marks.append((ends[1], _opposite(marks[-1][1])))
    return [
        Cycle(
            body,
            _kind(body, before[1]),
            before[0],
            after[0],
            before[0] != ends[0],
            after[0] != ends[1],
            _inside(events, before[0], after[0]),
        )
        for before, after in pairwise(marks)
    ]


def _opposite(detail: str | None) -> str | None:
    return {"superior": "inferior", "inferior": "superior"}.get(detail or "")


def _kind(body: Body, former: str | None) -> str:
    if body not in INNER:
        return BOTH
    return EVENING if former == "superior" else MORNING


def _inside(events: pl.DataFrame, jd_from: float, jd_to: float) -> dict[str, Any] | None:
    """Return the opposition, or the greatest of the greatest elongations, between two instants."""
    inside = events.filter(
        (pl.col("kind") != Kind.SOLAR_CONJUNCTION.value)
        & (pl.col("jd_tt") > jd_from)
        & (pl.col("jd_tt") < jd_to)
    )
    if inside.is_empty():
        return None
    return inside.row(int(np.argmax(inside["elongation_deg"].to_numpy())), named=True)
