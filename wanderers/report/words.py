"""Events in plain words: a headline, what exactly is meant by it, figures, cautions.

Numbers are printed as coarsely as people read them, so that a text changes only when the facts do. Degree
signs stand in headlines only; the figures below spell the unit out.
"""

from __future__ import annotations

from collections.abc import Callable, Mapping
from typing import Any, Final

from wanderers.constants import AU_KM
from wanderers.ephemeris.constellations import full_name
from wanderers.events.kinds import Kind
from wanderers.report.tables import label

Event = Mapping[str, Any]
"""One row of the event table, by column name."""

NEAR_SUN_DEG: Final = 20.0
"""Elongation below which optics are dangerous to sweep with. Common practice, no source."""
GLARE_DEG: Final = 10.0
"""Elongation below which nothing but the Sun can be seen. Common practice, no source."""

NEAR_SUN_CAUTION: Final = (
    "CAUTION: close to the Sun in the sky. Never sweep for it with binoculars, a telescope or a camera "
    "while any part of the Sun is above the horizon: wait until the Sun is fully down, or stop before it "
    "rises. Follow local rules."
)
SUN_CAUTION: Final = (
    "CAUTION: never look at the Sun without a filter made for solar use over the front of every instrument, "
    "finder and camera included, checked for damage before each use; or project the image with a guarded "
    "beam; or join a session led by trained people. Hand-held solar viewers (ISO 12312-2) are for the bare "
    "eye only, never with optics. No sunglasses, smoked glass or eyepiece filters. Follow local rules."
)

QUANTITIES: Final = {
    "ecliptic": "ecliptic longitude (true ecliptic and equinox of date)",
    "equator": "right ascension (true equator and equinox of date)",
    "j2000": "ecliptic longitude against the stars (fixed ecliptic of J2000)",
}
FRAME_LABELS: Final = {
    "ecliptic": "in longitude",
    "equator": "in right ascension",
    "j2000": "against the stars",
}
"""A headline names its frame: the same event falls days apart in another."""

ALWAYS_BEHIND: Final = frozenset({"jupiter", "saturn", "uranus", "neptune"})
"""Second bodies of a pair that are farther away than the first whatever the date."""


def summary(event: Event) -> str:
    """Return what happens, in one short line."""
    return _SUMMARIES[Kind(event["kind"])](event)


def definition(event: Event) -> str:
    """Return what exactly happens at the instant, and what is easily mistaken for it."""
    return _DEFINITIONS[Kind(event["kind"])](event)


def category(event: Event) -> str:
    """Return the kind as people write it."""
    return str(event["kind"]).replace("_", " ").capitalize()


def figures(event: Event) -> list[str]:
    """Return the figures that apply, a line for the pair and a line for the body."""
    lines = []
    if event["separation_deg"] is not None:
        size = "Diameter of the circle" if event["kind"] == Kind.GATHERING else "Separation"
        lines.append(f"{size}: {_long_angle(event['separation_deg'])}.")
    seen = [text for cell, text in _FIGURES if event[cell] is not None and (text := text(event))]
    if seen:
        lines.append(f"{label(event['body'])}: {', '.join(seen)}.")
    return lines


def cautions(event: Event) -> list[str]:
    """Return warnings that belong to an event: looking at or near the Sun, what cannot be seen, the Moon."""
    if event["kind"] == Kind.TRANSIT or (event["body"] == "sun" and event["kind"] != Kind.SEASON_POINT):
        return [SUN_CAUTION]
    lines = []
    elongation = event["elongation_deg"]
    # Only the first body's elongation is known; the others are no nearer to the Sun than this.
    nearest = None if elongation is None else elongation - (event["separation_deg"] or 0.0)
    if nearest is not None and nearest < NEAR_SUN_DEG:
        lines.append(NEAR_SUN_CAUTION)
    if elongation is not None and elongation < GLARE_DEG:
        lines.insert(0, f"Not observable: only {elongation:.0f} degrees from the Sun.")
    if event["body"] == "moon" and event["other"] is not None:
        lines.append("Seen from a place on the Earth, the Moon stands up to 1 degree from where it is given here.")
    return lines


def uncertainty(event: Event) -> str | None:
    """Return how far the time can be trusted, where it cannot be trusted to a second."""
    error_s = event["utc_uncertainty_s"]
    if error_s is None:
        return None
    return (
        f"Time uncertain by about {_seconds(error_s)}: UTC rests on an estimate of the Earth's rotation "
        f"(Delta-T about {_seconds(event['delta_t_s'])})."
    )


def _name(event: Event) -> str:
    return label(event["body"])


def _pair(event: Event) -> str:
    return f"{label(event['body'])} and {label(event['other'])}"


def _side(event: Event) -> str:
    return "eastern" if event["detail"] == "east" else "western"


def _apart(event: Event) -> str:
    return f"{_short_angle(event['separation_deg'])} apart"


def _short_angle(angle_deg: float) -> str:
    """Print an angle for a headline: tenths of a degree, smaller ones in smaller units."""
    if angle_deg >= 0.095:
        return f"{angle_deg:.1f}°"
    return _small_angle(angle_deg)


def _long_angle(angle_deg: float) -> str:
    """Print an angle in words."""
    if angle_deg >= 1.0:
        return f"{angle_deg:.1f} degrees"
    return f"{angle_deg:.2f} degrees ({_small_angle(angle_deg)})" if angle_deg >= 0.095 else _small_angle(angle_deg)


def _small_angle(angle_deg: float) -> str:
    arcmin = angle_deg * 60.0
    return f"{arcmin:.0f} arcminutes" if arcmin >= 1.5 else f"{arcmin * 60.0:.0f} arcseconds"


def _seconds(seconds: float) -> str:
    """Print a length of time to two digits."""
    value, unit = (seconds, "seconds") if abs(seconds) < 120.0 else (seconds / 60.0, "minutes")
    return f"{float(f'{value:.2g}'):.0f} {unit}" if abs(value) >= 10.0 else f"{value:.2g} {unit}"


def _distance(event: Event) -> str:
    """Print a distance from the Earth; the Moon's in kilometres."""
    if event["body"] == "moon":
        return f"{round(event['distance_au'] * AU_KM, -2):,.0f} km from the Earth"
    return f"{event['distance_au']:.3f} au from the Earth"


def _elongation(event: Event) -> str:
    return "" if event["body"] == "sun" else f"{event['elongation_deg']:.1f} degrees from the Sun"


def _magnitude(event: Event) -> str:
    return f"magnitude {event['magnitude']:.1f}"


def _diameter(event: Event) -> str:
    arcsec = event["diameter_arcsec"]
    return f"{arcsec / 60.0:.1f} arcminutes across" if arcsec >= 120.0 else f"{arcsec:.1f} arcseconds across"


def _constellation(event: Event) -> str:
    return f"in the constellation {full_name(event['constellation'])}"


_FIGURES: Final[tuple[tuple[str, Callable[[Event], str]], ...]] = (
    ("constellation", _constellation),
    ("elongation_deg", _elongation),
    ("magnitude", _magnitude),
    ("diameter_arcsec", _diameter),
    ("distance_au", _distance),
)


def _station(event: Event) -> str:
    return f"{_name(event)} turns {event['detail']} {FRAME_LABELS[event['frame']]}"


def _station_defined(event: Event) -> str:
    way = "westward" if event["detail"] == "retrograde" else "eastward"
    return (
        f"The {QUANTITIES[event['frame']]} of {_name(event)} stops changing; from here on the planet moves "
        f"{way}. Counted in another frame, the station falls hours or days away."
    )


def _conjunction(event: Event) -> str:
    return f"{_pair(event)} {_apart(event)}, conjunction {FRAME_LABELS[event['frame']]}"


def _conjunction_defined(event: Event) -> str:
    return (
        f"{_pair(event)} have equal {QUANTITIES[event['frame']]}. This is a conjunction "
        f"{FRAME_LABELS[event['frame']]}: counted in another frame it falls at another time, and so does the "
        "least separation."
    )


def _appulse_defined(event: Event) -> str:
    alone = " No conjunction belongs to this approach." if event["detail"] == "quasi" else ""
    return f"Least true separation of {_pair(event)} during this approach (appulse).{alone}"


def _solar_conjunction(event: Event) -> str:
    sort = f"at {event['detail']} conjunction" if event["detail"] else "in conjunction"
    return f"{_name(event)} {sort} with the Sun"


def _greatest_elongation_defined(event: Event) -> str:
    sky = "evening" if event["detail"] == "east" else "morning"
    return (
        f"Largest true angle between {_name(event)} and the Sun, in the {sky} sky. The best {sky} to see it "
        "depends on the season and the latitude."
    )


def _distance_extremum(event: Event) -> str:
    nearest = "closest to" if event["kind"] == Kind.PERIGEE else "farthest from"
    figure = "" if event["distance_au"] is None else f", {_distance(event).removesuffix(' from the Earth')}"
    return f"{_name(event)} {nearest} the Earth{figure}"


def _distance_extremum_defined(event: Event) -> str:
    least = "Least" if event["kind"] == Kind.PERIGEE else "Largest"
    return f"{least} geometric distance between the centres of {_name(event)} and the Earth ({event['kind']})."


def _hides(event: Event) -> bool:
    """Tell whether it is certain which of the two is in front."""
    other = event["other"]
    return event["body"] == "moon" or event["detail"] == "star" or other in ALWAYS_BEHIND


def _occultation(event: Event) -> str:
    if _hides(event):
        return f"{_name(event)} passes in front of {label(event['other'])}"
    return f"{_pair(event)}: one passes in front of the other"


def _gathered(event: Event) -> str:
    names = [label(name) for name in event["detail"].split("+")]
    return f"{', '.join(names[:-1])} and {names[-1]}" if len(names) > 1 else names[0]


def _gathering(event: Event) -> str:
    return f"{_gathered(event)} within {_short_angle(event['separation_deg'])}"


def _constellation_entry_defined(event: Event) -> str:
    left = f" from {full_name(event['detail'])}" if event["detail"] else ""
    return (
        f"{_name(event)} crosses a boundary of the constellations{left}, as the IAU drew them. "
        "Constellations are not the signs of the zodiac."
    )


def _node(event: Event) -> str:
    return f"{_name(event)} crosses the ecliptic {'northward' if event['detail'] == 'ascending' else 'southward'}"


def _season(event: Event) -> str:
    turn, month = event["detail"].split("_")
    return f"{month.capitalize()} {turn}"


def _season_defined(event: Event) -> str:
    degrees = {"equinox_march": 0, "solstice_june": 90, "equinox_september": 180, "solstice_december": 270}
    return f"The Sun's apparent ecliptic longitude of date is {degrees[event['detail']]} degrees."


def _phase(event: Event) -> str:
    word = event["detail"].replace("_", " ").capitalize()
    return f"{word} Moon" if event["detail"] in ("new", "full") else word


def _phase_defined(event: Event) -> str:
    degrees = {"new": 0, "first_quarter": 90, "full": 180, "last_quarter": 270}[event["detail"]]
    return f"The Moon's apparent ecliptic longitude of date is {degrees} degrees ahead of the Sun's."


def _always(text: str) -> Callable[[Event], str]:
    """Return a writer whose text needs only the names."""

    def write(event: Event) -> str:
        detail = (event["detail"] or "").capitalize()
        return text.format(body=_name(event), detail=detail, side=_side(event), event=event)

    return write


_SUMMARIES: Final[dict[Kind, Callable[[Event], str]]] = {
    Kind.STATION: _station,
    Kind.OPPOSITION: _always("{body} at opposition to the Sun"),
    Kind.SOLAR_CONJUNCTION: _solar_conjunction,
    Kind.QUADRATURE: _always("{body} at {side} quadrature"),
    Kind.GREATEST_ELONGATION: lambda e: f"{_name(e)} at greatest {_side(e)} elongation, {_short_angle(e['elongation_deg'])}",
    Kind.PERIGEE: _distance_extremum,
    Kind.APOGEE: _distance_extremum,
    Kind.PERIHELION: _always("{body} at perihelion, nearest to the Sun"),
    Kind.APHELION: _always("{body} at aphelion, farthest from the Sun"),
    Kind.GREATEST_BRILLIANCY: lambda e: f"{_name(e)} at greatest brilliancy, {_magnitude(e)}",
    Kind.CONJUNCTION: _conjunction,
    Kind.APPULSE: lambda e: f"{_pair(e)} closest, {_apart(e)}",
    Kind.OCCULTATION: _occultation,
    Kind.TRANSIT: _always("{body} crosses the Sun's disc (transit)"),
    Kind.GATHERING: _gathering,
    Kind.CONSTELLATION_ENTRY: lambda e: f"{_name(e)} enters {full_name(e['constellation'])}",
    Kind.NODE: _node,
    Kind.SEASON_POINT: _season,
    Kind.RING_PLANE_CROSSING: _always("{body}'s ring plane passes through the {detail}"),
    Kind.MOON_PHASE: _phase,
}

_DEFINITIONS: Final[dict[Kind, Callable[[Event], str]]] = {
    Kind.STATION: _station_defined,
    Kind.OPPOSITION: _always(
        "Apparent ecliptic longitudes of {body} and the Sun differ by 180 degrees. Neither the day of least "
        "distance nor exactly that of greatest brightness."
    ),
    Kind.SOLAR_CONJUNCTION: _always("{body} and the Sun have equal apparent ecliptic longitude of date."),
    Kind.QUADRATURE: _always("{body} is 90 degrees from the Sun in ecliptic longitude of date, on its {side} side."),
    Kind.GREATEST_ELONGATION: _greatest_elongation_defined,
    Kind.PERIGEE: _distance_extremum_defined,
    Kind.APOGEE: _distance_extremum_defined,
    Kind.PERIHELION: _always("Least distance of {body} from the Sun on this orbit."),
    Kind.APHELION: _always("Largest distance of {body} from the Sun on this orbit."),
    Kind.GREATEST_BRILLIANCY: _always(
        "Brightest between greatest elongation and inferior conjunction, by a model of its phases. The "
        "brightness stays within a few hundredths of a magnitude for two weeks."
    ),
    Kind.CONJUNCTION: _conjunction_defined,
    Kind.APPULSE: _appulse_defined,
    Kind.OCCULTATION: _always(
        "Least separation while the two discs overlap as seen from the Earth's centre. From a place on the "
        "Earth it may be seen at another time, or not at all."
    ),
    Kind.TRANSIT: _always(
        "Least separation of {body} from the middle of the Sun's disc, as seen from the Earth's centre. From a "
        "place on the Earth the contacts differ by minutes."
    ),
    Kind.GATHERING: lambda e: f"Moment when the circle that holds {_gathered(e)} is smallest.",
    Kind.CONSTELLATION_ENTRY: _constellation_entry_defined,
    Kind.NODE: _always("Apparent ecliptic latitude of date of {body} is zero ({event[detail]} node)."),
    Kind.SEASON_POINT: _season_defined,
    Kind.RING_PLANE_CROSSING: _always(
        "The plane of the rings of {body} passes through the {detail}: the rings are edge-on or unlit."
    ),
    Kind.MOON_PHASE: _phase_defined,
}
