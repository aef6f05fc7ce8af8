"""What the words of an event table mean, kind by kind: the definitions that all was computed by."""

from __future__ import annotations

from collections.abc import Iterable
from typing import Final

from wanderers.events.kinds import Kind
from wanderers.report.words import NEAR_SUN_DEG

MEANINGS: Final = {
    Kind.STATION: (
        "The rate of the longitude (on the equator: of the right ascension) passes through zero. Retrograde: "
        "the planet begins to run westward; direct: eastward again. The instant depends on the frame, by "
        "hours or days, and is neither the edge of the loop nor greatest elongation."
    ),
    Kind.OPPOSITION: (
        "Longitude 180 degrees from the Sun's. Least distance and greatest brightness may fall on other days."
    ),
    Kind.SOLAR_CONJUNCTION: (
        "Longitude equal to the Sun's. Mercury and Venus: superior is beyond the Sun, inferior before it."
    ),
    Kind.QUADRATURE: "Longitude 90 degrees east or west of the Sun's; outer planets.",
    Kind.GREATEST_ELONGATION: (
        "Mercury or Venus at its greatest true angle from the Sun; east of it in the evening sky, west of it "
        "in the morning sky. Not the best evening: that depends on season and latitude."
    ),
    Kind.PERIGEE: "Least distance from the Earth, geometric, centre to centre.",
    Kind.APOGEE: "Greatest distance from the Earth, geometric, centre to centre.",
    Kind.PERIHELION: "Least distance from the Sun, one an orbit.",
    Kind.APHELION: "Greatest distance from the Sun, one an orbit.",
    Kind.GREATEST_BRILLIANCY: (
        "Venus brightest between greatest elongation and inferior conjunction, by model magnitudes; it stays "
        "within a few hundredths for two weeks."
    ),
    Kind.CONJUNCTION: (
        "Two bodies at equal longitude or, in the frame called equator, at equal right ascension: two "
        "instants, hours or days apart. The separation is the true angle at that instant."
    ),
    Kind.APPULSE: (
        "Two bodies at their least true separation: it may fall before or after a conjunction, or have none."
    ),
    Kind.OCCULTATION: "One disc covers another, or a star, as seen from the centre of the Earth.",
    Kind.TRANSIT: "Mercury or Venus on the Sun's disc, as seen from the centre of the Earth.",
    Kind.GATHERING: "Several bodies at their closest: the smallest circle that holds them all is least.",
    Kind.CONSTELLATION_ENTRY: (
        "A body crosses the boundary of a constellation as the IAU drew it. Not a sign of the zodiac."
    ),
    Kind.NODE: "The latitude passes through zero, northward (ascending) or southward (descending).",
    Kind.SEASON_POINT: "The Sun's longitude is 0, 90, 180 or 270 degrees.",
    Kind.RING_PLANE_CROSSING: "The plane of Saturn's rings passes through the Earth or the Sun.",
    Kind.MOON_PHASE: "The Moon's longitude is 0, 90, 180 or 270 degrees ahead of the Sun's.",
}

ALWAYS: Final = (
    (
        "Longitude",
        "Unless another frame is named, ecliptic longitude of date, apparent, seen from the Earth's centre.",
    ),
    (
        "Retrograde season",
        "From the first pass over the stretch of longitude between the two stations to the third: the planet "
        "covers it three times. Loop: the path crosses itself; zigzag: it does not.",
    ),
    (
        "Elongation",
        f"The true angle from the Sun, here called From the Sun. Under about {NEAR_SUN_DEG:.0f} degrees a "
        "body is hard or impossible to see, and dangerous to look for with optics.",
    ),
    (
        "UTC and TT",
        "UTC is the time of clocks at longitude 0, without summer time. TT is the even scale of the "
        "computation, some 69 seconds ahead now; how far UTC will fall behind later cannot be foretold.",
    ),
)


def glossary(kinds: Iterable[Kind]) -> tuple[tuple[str, str], ...]:
    """Return terms and meanings for the kinds of events that occur."""
    present = tuple((kind.value.replace("_", " ").capitalize(), MEANINGS[kind]) for kind in kinds)
    return ALWAYS + present
