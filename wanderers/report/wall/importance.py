"""What belongs on a wall, and what gives way to what in a box too small. An editor's choice, no source."""

from __future__ import annotations

from collections.abc import Callable
from functools import cache
from typing import Final

from wanderers.ephemeris.bodies import NAKED_EYE_PLANETS, Body
from wanderers.ephemeris.stars import ecliptic_stars
from wanderers.events.kinds import Kind
from wanderers.report.wall.phrases import AIDED, misses, separation_deg
from wanderers.report.words import Event

BRIGHT: Final = frozenset(body.value for body in NAKED_EYE_PLANETS)
FAINT: Final = frozenset({Body.URANUS.value, Body.NEPTUNE.value})
"""For binoculars. Pluto is for nobody's wall."""
FIRST_MAGNITUDE: Final = 1.6
"""Visual magnitude up to which the public knows a star; Castor and brighter."""
PLEIADES: Final = "Pleiades"
FOREMOST: Final = 0
HEADLINE: Final = 1
"""Highest rank that the year at a glance names."""

Rank = int | None


def rank(event: Event) -> Rank:
    """Return how soon an event gives way, 0 last of all; None if it is not for a wall."""
    by_kind = _RANKS.get(Kind(event["kind"]))
    found = by_kind(event) if by_kind else None
    return found if found is None or event.get("verdict") not in AIDED else found + 1


@cache
def known_stars() -> frozenset[str]:
    """Return the stars near the ecliptic that the public knows, and the Pleiades."""
    stars = ecliptic_stars()
    bright = (name for name, v_mag in zip(stars.name, stars.v_mag, strict=True) if v_mag < FIRST_MAGNITUDE)
    return frozenset(bright) | {PLEIADES}


def _of_planet(bright: Rank, faint: Rank = None) -> Callable[[Event], Rank]:
    def ranked(event: Event) -> Rank:
        return bright if event["body"] in BRIGHT else faint if event["body"] in FAINT else None

    return ranked


def _always(value: int) -> Callable[[Event], Rank]:
    return lambda event: value


def _first(apart: float, *limits: tuple[float, int]) -> Rank:
    """Return the rank of the first limit that a separation lies below."""
    return next((value for limit, value in limits if apart < limit), None)


def _meeting(event: Event) -> Rank:
    """Rank the meeting of two bodies by how close it is and how bright they are."""
    body, other, apart = event["body"], event["other"], separation_deg(event)
    planets = {body, other} & (BRIGHT | FAINT)
    if body == Body.MOON:
        return _moon_meeting(other, apart)
    if {body, other} <= BRIGHT:
        return _first(apart, (2.0, 0), (5.0, 2))
    if len(planets) == 2 and planets & BRIGHT:
        return _first(apart, (0.5, 1), (2.0, 3))
    if body in BRIGHT and other in known_stars():
        return _first(apart, (2.0, 1), (5.0, 3))
    if body in BRIGHT and not str(other).startswith("HIP") and other != Body.PLUTO:
        return _first(apart, (0.5, 3), (1.0, 4))
    return None


def _moon_meeting(other: str, apart: float) -> Rank:
    if other in BRIGHT:
        return _first(apart, (2.0, 1), (7.0, 2))
    if other in FAINT:
        return _first(apart, (0.5, 4))
    return _first(apart, (2.0, 3), (5.0, 4)) if other in known_stars() else None


def _occultation(event: Event) -> Rank:
    if event["body"] == Body.MOON:
        if misses(event):
            return _moon_meeting(event["other"], separation_deg(event))
        known = event["other"] in BRIGHT | known_stars()
        return 0 if known else 3 if event["other"] in FAINT else 4
    return 0 if {event["body"], event["other"]} <= BRIGHT else 1


def _perigee(event: Event) -> Rank:
    return {"mars": 2, "sun": 3, "moon": 5}.get(event["body"])


def _apogee(event: Event) -> Rank:
    return {"sun": 3, "moon": 5}.get(event["body"])


_RANKS: Final[dict[Kind, Callable[[Event], Rank]]] = {
    Kind.TRANSIT: _always(0),
    Kind.SEASON_POINT: _always(0),
    Kind.RING_PLANE_CROSSING: _always(0),
    Kind.GATHERING: _always(1),
    Kind.STATION: _of_planet(0, 3),
    Kind.OPPOSITION: _of_planet(0, 1),
    Kind.GREATEST_ELONGATION: _of_planet(0),
    Kind.GREATEST_BRILLIANCY: _of_planet(1),
    Kind.SOLAR_CONJUNCTION: _of_planet(2),
    Kind.CONJUNCTION: _meeting,
    Kind.APPULSE: _meeting,
    Kind.OCCULTATION: _occultation,
    Kind.PERIGEE: _perigee,
    Kind.APOGEE: _apogee,
}
