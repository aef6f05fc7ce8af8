"""Events in plain words: a headline, figures, contacts, how far the time can be trusted, cautions.

Numbers are printed as coarsely as people read them, so that a text changes only when the facts do. Degree
signs stand in headlines only; the figures below spell the unit out.
"""

from __future__ import annotations

from collections.abc import Callable, Mapping
from typing import Any, Final

from wanderers.constants import AU_KM
from wanderers.ephemeris.constellations import full_name
from wanderers.events.kinds import Kind
from wanderers.report.names import label

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


def category(event: Event) -> str:
    """Return the kind as people write it."""
    return str(event["kind"]).replace("_", " ").capitalize()


def figures(event: Event) -> list[str]:
    """Return the figures that apply, a line for the pair and a line for the body."""
    lines = []
    if event["separation_deg"] is not None:
        size = "Diameter of the circle" if event["kind"] == Kind.GATHERING else "Separation"
        lines.append(f"{size}: {_long_angle(event['separation_deg'])}.")
    seen = [print_figure(event) for column, print_figure in _FIGURES if event[column] is not None]
    if seen:
        lines.append(f"{body_name(event)}: {', '.join(seen)}.")
    return lines


def cautions(event: Event) -> list[str]:
    """Return warnings that belong to an event: looking at or near the Sun, what cannot be seen, the Moon."""
    if event["kind"] == Kind.TRANSIT or (event["body"] == "sun" and event["kind"] != Kind.SEASON_POINT):
        return [SUN_CAUTION]
    lines = []
    elongation = event["elongation_deg"]
    if elongation is not None and elongation < GLARE_DEG:
        lines.append(f"{body_name(event)} not observable: only {elongation:.0f} degrees from the Sun.")
    if near_the_sun(event):
        lines.append(NEAR_SUN_CAUTION)
    if event["body"] == "moon" and event["other"] is not None:
        lines.append("From a place on the Earth the Moon is seen up to 1 degree from the place given here.")
    return lines


def contacts(event: Event) -> list[str]:
    """Return when the edges of two discs touch, to the minute, as far as they do."""
    times = [(ordinal, event[f"contact{number}_utc"]) for number, ordinal in enumerate(_CONTACTS, start=1)]
    known = [f"{ordinal} {minute(time)}" for ordinal, time in times if time is not None]
    return [f"Contacts: {', '.join(known)} UTC."] if known else []


def uncertainty(event: Event) -> str | None:
    """Return how far the time can be trusted, where it cannot be trusted to a second."""
    error_s = event["utc_uncertainty_s"]
    if error_s is None:
        return None
    return (
        f"Time uncertain by about {_seconds(error_s)}: UTC rests on an estimate of the Earth's rotation "
        f"(Delta-T about {_seconds(event['delta_t_s'])})."
    )


def near_the_sun(event: Event) -> bool:
    """Return whether a body of an event may stand less than NEAR_SUN_DEG from the Sun.

    The elongation told is that of the first body; the others may stand nearer by the whole separation, unless
    a site has looked at all of them and found no cause for caution.
    """
    elongation = event["elongation_deg"]
    is_cleared = "caution" in event and event["caution"] is None
    nearer = 0.0 if is_cleared else event["separation_deg"] or 0.0
    return elongation is not None and elongation - nearer < NEAR_SUN_DEG


def minute(instant: str) -> str:
    """Return an ISO 8601 instant to the minute, ``2027-01-10 12:59``; rounded, but never into another day."""
    day, _, clock = instant.removesuffix("Z").partition("T")
    hours, minutes, seconds = clock.split(":")
    whole = min(int(hours) * 60 + int(minutes) + (float(seconds) >= 30.0), 24 * 60 - 1)
    return f"{day} {whole // 60:02d}:{whole % 60:02d}"


def is_held_back(instant: str) -> bool:
    """Return whether rounding an ISO 8601 instant to the minute would have changed its date."""
    hours, minutes, seconds = instant.removesuffix("Z").partition("T")[2].split(":")
    return (hours, minutes) == ("23", "59") and float(seconds) >= 30.0


def listed(names: tuple[str, ...]) -> str:
    """Return names as a list in a sentence: ``Mars, Jupiter and Saturn``."""
    return " and ".join(filter(None, (", ".join(names[:-1]), *names[-1:])))


def body_name(event: Event) -> str:
    """Return the body's name."""
    return label(event["body"])


def pair_names(event: Event) -> str:
    """Return the names of the two bodies."""
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
    if angle_deg >= 0.095:
        return f"{angle_deg:.2f} degrees ({_small_angle(angle_deg)})"
    return _small_angle(angle_deg)


def _small_angle(angle_deg: float) -> str:
    arcmin = angle_deg * 60.0
    return f"{arcmin:.0f} arcminutes" if arcmin >= 1.5 else f"{arcmin * 60.0:.0f} arcseconds"


def _seconds(seconds: float) -> str:
    """Print a length of time to two digits."""
    scale, unit = next((scale, unit) for scale, unit in _TIME_UNITS if abs(seconds) < 120.0 * scale)
    text = f"{float(f'{seconds / scale:.2g}'):g}"
    return f"{text} {unit.removesuffix('s') if text == '1' else unit}"


def _distance(event: Event) -> str:
    """Print a distance from the Earth; the Moon's in kilometres."""
    if event["body"] == "moon":
        return f"{round(event['distance_au'] * AU_KM, -2):,.0f} km from the Earth"
    return f"{event['distance_au']:.3f} au from the Earth"


def _elongation(event: Event) -> str:
    return f"{event['elongation_deg']:.1f} degrees from the Sun"


def _magnitude(event: Event) -> str:
    return f"magnitude {round(event['magnitude'], 1) + 0.0:.1f}"  # never -0.0


def _diameter(event: Event) -> str:
    arcsec = event["diameter_arcsec"]
    return f"{arcsec / 60.0:.1f} arcminutes across" if arcsec >= 120.0 else f"{arcsec:.1f} arcseconds across"


def _constellation(event: Event) -> str:
    return f"in the constellation {full_name(event['constellation'])}"


_TIME_UNITS: Final = ((1.0, "seconds"), (60.0, "minutes"), (3_600.0, "hours"), (86_400.0, "days"))
_CONTACTS: Final = ("first", "second", "third", "fourth")
_FIGURES: Final[tuple[tuple[str, Callable[[Event], str]], ...]] = (
    ("constellation", _constellation),
    ("elongation_deg", _elongation),
    ("magnitude", _magnitude),
    ("diameter_arcsec", _diameter),
    ("distance_au", _distance),
)


def _station(event: Event) -> str:
    return f"{body_name(event)} turns {event['detail']} {FRAME_LABELS[event['frame']]}"


def _conjunction(event: Event) -> str:
    return f"{pair_names(event)} {_apart(event)}, conjunction {FRAME_LABELS[event['frame']]}"


def _solar_conjunction(event: Event) -> str:
    sort = f"at {event['detail']} conjunction" if event["detail"] else "in conjunction"
    return f"{body_name(event)} {sort} with the Sun"


def _greatest_elongation(event: Event) -> str:
    angle = _short_angle(event["elongation_deg"])
    return f"{body_name(event)} {angle} from the Sun, greatest {_side(event)} elongation"


def _distance_extremum(event: Event) -> str:
    nearest = "closest to" if event["kind"] == Kind.PERIGEE else "farthest from"
    figure = "" if event["distance_au"] is None else f", {_distance(event).removesuffix(' from the Earth')}"
    return f"{body_name(event)} {nearest} the Earth{figure}"


def _hides(event: Event) -> bool:
    """Tell whether it is certain which of the two is in front."""
    other = event["other"]
    return event["body"] == "moon" or event["detail"] == "star" or other in ALWAYS_BEHIND


def _occultation(event: Event) -> str:
    if _hides(event):
        return f"{body_name(event)} passes in front of {label(event['other'])}"
    return f"{pair_names(event)}: one passes in front of the other"


def gathered_names(event: Event) -> str:
    """Return the bodies of a gathering as people list them."""
    return listed(tuple(label(body) for body in event["detail"].split("+")))


def _gathering(event: Event) -> str:
    return f"{gathered_names(event)} within {_short_angle(event['separation_deg'])}"


def _node(event: Event) -> str:
    way = "northward" if event["detail"] == "ascending" else "southward"
    return f"{body_name(event)} crosses the ecliptic {way}"


def _season(event: Event) -> str:
    turn, month = event["detail"].split("_")
    return f"{month.capitalize()} {turn}"


def _phase(event: Event) -> str:
    word = event["detail"].replace("_", " ").capitalize()
    return f"{word} Moon" if event["detail"] in ("new", "full") else word


def _filled(text: str) -> Callable[[Event], str]:
    """Return a writer whose text needs only the names."""

    def write(event: Event) -> str:
        detail = (event["detail"] or "").capitalize()
        return text.format(body=body_name(event), detail=detail, side=_side(event))

    return write


_SUMMARIES: Final[dict[Kind, Callable[[Event], str]]] = {
    Kind.STATION: _station,
    Kind.OPPOSITION: _filled("{body} at opposition to the Sun"),
    Kind.SOLAR_CONJUNCTION: _solar_conjunction,
    Kind.QUADRATURE: _filled("{body} at {side} quadrature"),
    Kind.GREATEST_ELONGATION: _greatest_elongation,
    Kind.PERIGEE: _distance_extremum,
    Kind.APOGEE: _distance_extremum,
    Kind.PERIHELION: _filled("{body} at perihelion, nearest to the Sun"),
    Kind.APHELION: _filled("{body} at aphelion, farthest from the Sun"),
    Kind.GREATEST_BRILLIANCY: lambda e: f"{body_name(e)} at greatest brilliancy, {_magnitude(e)}",
    Kind.CONJUNCTION: _conjunction,
    Kind.APPULSE: lambda e: f"{pair_names(e)} closest, {_apart(e)}",
    Kind.OCCULTATION: _occultation,
    Kind.TRANSIT: _filled("{body} crosses the Sun's disc (transit)"),
    Kind.GATHERING: _gathering,
    Kind.CONSTELLATION_ENTRY: lambda e: f"{body_name(e)} enters {full_name(e['constellation'])}",
    Kind.NODE: _node,
    Kind.SEASON_POINT: _season,
    Kind.RING_PLANE_CROSSING: _filled("{body}'s ring plane passes through the {detail}"),
    Kind.MOON_PHASE: _phase,
}
