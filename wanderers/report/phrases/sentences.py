"""An event as a sentence in three lengths."""

from __future__ import annotations

from collections.abc import Sequence
from dataclasses import dataclass
from typing import Final

from wanderers.events.kinds import Kind
from wanderers.report.phrases import sight
from wanderers.report.phrases.facts import SOURCES, Facts
from wanderers.report.phrases.language import LENGTHS, Language
from wanderers.report.phrases.moments import Row
from wanderers.report.phrases.templates import composed
from wanderers.report.words import ALWAYS_BEHIND

ANY: Final = "any"
"""Table of a kind's phrases where no other fits."""

VARIANTS: Final[dict[Kind, tuple[str, ...]]] = {
    Kind.STATION: ("retrograde", "direct"),
    Kind.OPPOSITION: (ANY,),
    Kind.SOLAR_CONJUNCTION: ("superior", "inferior", ANY),
    Kind.QUADRATURE: ("east", "west"),
    Kind.GREATEST_ELONGATION: ("east", "west"),
    Kind.PERIGEE: ("sun", "moon", ANY),
    Kind.APOGEE: ("sun", "moon", ANY),
    Kind.PERIHELION: (ANY,),
    Kind.APHELION: (ANY,),
    Kind.GREATEST_BRILLIANCY: (ANY,),
    Kind.CONJUNCTION: (ANY,),
    Kind.APPULSE: ("quasi", ANY),
    Kind.OCCULTATION: ("hidden", ANY),
    Kind.TRANSIT: (ANY,),
    Kind.GATHERING: (ANY,),
    Kind.CONSTELLATION_ENTRY: ("sun", ANY),
    Kind.NODE: ("ascending", "descending"),
    Kind.SEASON_POINT: ("equinox_march", "solstice_june", "equinox_september", "solstice_december"),
    Kind.RING_PLANE_CROSSING: ("earth", "sun"),
    Kind.MOON_PHASE: ("new", "first_quarter", "full", "last_quarter"),
}
"""The tables of phrases of every kind."""


@dataclass(frozen=True, slots=True)
class Sentences:
    """One event in three lengths, at most LENGTHS characters each."""

    short: str
    medium: str
    long: str

    def of(self, lengths: Sequence[str]) -> list[str]:
        """Return the lengths named, in the order named."""
        return [getattr(self, length) for length in lengths]


def sentences(event: Row, words: Language) -> Sentences:
    """Return an event as sentences.

    Args:
        event: a row of the event table; with ``pair_side`` and ``solar_side`` it says north and south,
            evening and morning; with the columns of a site it gives local time and where to look.
        words: the language.
    """
    facts = Facts(event, words, SOURCES | sight.SOURCES)
    phrases = words.table("event", event["kind"], variant(event))
    return Sentences(
        *(
            composed(phrases[length], facts, most, sight.endings(event, words, length))
            for length, most in LENGTHS.items()
        )
    )


def variant(event: Row) -> str:
    """Return which table of its kind's phrases an event takes."""
    kind = Kind(event["kind"])
    if kind is Kind.OCCULTATION:
        return "hidden" if _is_front_certain(event) else ANY
    for name in (event["detail"], event["body"]):
        if name in VARIANTS[kind]:
            return str(name)
    return ANY


def _is_front_certain(event: Row) -> bool:
    """Return whether it is certain that the first of two bodies passes in front."""
    return event["body"] == "moon" or event["detail"] == "star" or event["other"] in ALWAYS_BEHIND
