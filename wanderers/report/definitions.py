"""What exactly happens at the instant of an event, and what is easily mistaken for it."""

from __future__ import annotations

from collections.abc import Callable
from typing import Final

from wanderers.ephemeris.constellations import full_name
from wanderers.events.kinds import Kind
from wanderers.report.words import FRAME_LABELS, Event, body_name, gathered_names, pair_names

QUANTITIES: Final = {
    "ecliptic": "ecliptic longitude (true ecliptic and equinox of date)",
    "equator": "right ascension (true equator and equinox of date)",
    "j2000": "ecliptic longitude against the stars (fixed ecliptic of J2000)",
}


def definition(event: Event) -> str:
    """Return what exactly happens at the instant, and what is easily mistaken for it."""
    text = _DEFINITIONS[Kind(event["kind"])](event)
    return f"{text[:1].upper()}{text[1:]}"


def _the(event: Event) -> str:
    """Return the body's name as a sentence needs it."""
    return f"the {body_name(event)}" if event["body"] in ("sun", "moon") else body_name(event)


def _filled(text: str) -> Callable[[Event], str]:
    """Return a writer whose text needs only the body's name."""
    return lambda event: text.format(body=_the(event), detail=event["detail"])


def _station_defined(event: Event) -> str:
    way = "westward" if event["detail"] == "retrograde" else "eastward"
    return (
        f"The {QUANTITIES[event['frame']]} of {_the(event)} stops changing; from here on the planet "
        f"moves {way}. Counted in another frame, the station falls hours or days away."
    )


def _conjunction_defined(event: Event) -> str:
    return (
        f"{pair_names(event)} have equal {QUANTITIES[event['frame']]}. This is a conjunction "
        f"{FRAME_LABELS[event['frame']]}: counted in another frame it falls at another time, and so does the "
        "least separation."
    )


def _appulse_defined(event: Event) -> str:
    alone = " No conjunction belongs to this approach." if event["detail"] == "quasi" else ""
    return f"Least true separation of {pair_names(event)} during this approach (appulse).{alone}"


def _greatest_elongation_defined(event: Event) -> str:
    sky = "evening" if event["detail"] == "east" else "morning"
    return (
        f"Largest true angle between {_the(event)} and the Sun, in the {sky} sky. The best {sky} to see "
        "it depends on the season and the latitude."
    )


def _distance_extremum_defined(event: Event) -> str:
    least = "Least" if event["kind"] == Kind.PERIGEE else "Largest"
    kind = event["kind"]
    return f"{least} geometric distance between the centres of {_the(event)} and the Earth ({kind})."


def _constellation_entry_defined(event: Event) -> str:
    left = f"from {full_name(event['detail'])} " if event["detail"] else ""
    entered = full_name(event["constellation"])
    return (
        f"{_the(event)} crosses {left}into {entered}, by the boundaries of the IAU. "
        "Constellations are not the signs of the zodiac."
    )


def _ring_plane_defined(event: Event) -> str:
    seen = "seen edge-on" if event["detail"] == "earth" else "lit edge-on"
    crossed = event["detail"].capitalize()
    return f"The plane of {body_name(event)}'s rings passes through the {crossed}: they are {seen}."


def _season_defined(event: Event) -> str:
    degrees = {"equinox_march": 0, "solstice_june": 90, "equinox_september": 180, "solstice_december": 270}
    return f"The Sun's apparent ecliptic longitude of date is {degrees[event['detail']]} degrees."


def _phase_defined(event: Event) -> str:
    degrees = {"new": 0, "first_quarter": 90, "full": 180, "last_quarter": 270}[event["detail"]]
    return f"The Moon is {degrees} degrees ahead of the Sun in apparent ecliptic longitude of date."


_DEFINITIONS: Final[dict[Kind, Callable[[Event], str]]] = {
    Kind.STATION: _station_defined,
    Kind.OPPOSITION: _filled(
        "Apparent ecliptic longitudes of {body} and the Sun differ by 180 degrees. This is neither the day "
        "of least distance nor exactly that of greatest brightness."
    ),
    Kind.SOLAR_CONJUNCTION: _filled("{body} and the Sun have equal apparent ecliptic longitude of date."),
    Kind.QUADRATURE: _filled("{body} is 90 degrees {detail} of the Sun in ecliptic longitude of date."),
    Kind.GREATEST_ELONGATION: _greatest_elongation_defined,
    Kind.PERIGEE: _distance_extremum_defined,
    Kind.APOGEE: _distance_extremum_defined,
    Kind.PERIHELION: _filled("Least distance of {body} from the Sun on this orbit."),
    Kind.APHELION: _filled("Largest distance of {body} from the Sun on this orbit."),
    Kind.GREATEST_BRILLIANCY: _filled(
        "Brightest between greatest elongation and inferior conjunction, by a model of its phases. The "
        "brightness stays within a few hundredths of a magnitude for two weeks."
    ),
    Kind.CONJUNCTION: _conjunction_defined,
    Kind.APPULSE: _appulse_defined,
    Kind.OCCULTATION: _filled(
        "Least separation while the two discs overlap as seen from the Earth's centre. From a place on the "
        "Earth it may be seen at another time, or not at all."
    ),
    Kind.TRANSIT: _filled(
        "Least separation of {body} from the middle of the Sun's disc, as seen from the Earth's centre. From "
        "a place on the Earth the contacts differ by minutes."
    ),
    Kind.GATHERING: lambda e: f"Moment when the circle that holds {gathered_names(e)} is smallest.",
    Kind.CONSTELLATION_ENTRY: _constellation_entry_defined,
    Kind.NODE: _filled("Apparent ecliptic latitude of date of {body} is zero ({detail} node)."),
    Kind.SEASON_POINT: _season_defined,
    Kind.RING_PLANE_CROSSING: _ring_plane_defined,
    Kind.MOON_PHASE: _phase_defined,
}
