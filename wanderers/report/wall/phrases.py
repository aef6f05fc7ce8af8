"""What a box says of an event: several wordings, the longest first. No more is said than is known."""

from __future__ import annotations

from collections.abc import Callable
from typing import Final

from wanderers.constants import AU_KM
from wanderers.ephemeris.constellations import full_name
from wanderers.events.kinds import Kind
from wanderers.report import facts
from wanderers.report.names import label
from wanderers.report.words import FRAME_LABELS, Event, gathered_names, minute
from wanderers.site import compass

Wordings = tuple[str, ...]
LETTERS: Final = dict(zip(compass.POINTS, compass.LETTERS, strict=True))
AIDED: Final = frozenset({"binoculars", "telescope"})
HIDING_DEG: Final = 0.5
"""Farther away than this at the best moment, the Moon is no longer said to hide anything."""
FAR_DEG: Final = 99.0
SIDES: Final = {"east": ("eastern", "evening"), "west": ("western", "morning")}


def wordings(event: Event, *, date: str = "") -> Wordings:
    """Return what happens.

    Args:
        event: a row of the event table.
        date: of the instant itself, where it is another than that of the moment to look.
    """
    said = _WORDINGS[Kind(event["kind"])](event)
    return tuple(f"{text} on {date}" for text in said) if date else said


def with_look(event: Event, said: Wordings) -> Wordings:
    """Add where to look and with what to what happens, where the row tells."""
    if not watched(event):
        return said
    tool = f" ({event['verdict']})" if event["verdict"] in AIDED else ""
    full, short = _look(event)
    places = ((said[0], full), (said[-1], full), (said[-1], short)) if full else ()
    texts = [f"{text}, {place}" for text, place in places] or list(said)
    return tuple(dict.fromkeys(f"{text}{tool}" for text in (*texts, said[-1])))


def angle_text(angle_deg: float) -> str:
    """Print an angle: tenths of a degree, smaller ones in arcminutes or arcseconds."""
    arcmin = angle_deg * 60.0
    if angle_deg >= 0.095:
        return f"{angle_deg:.1f}°"
    return f"{arcmin:.0f}′" if arcmin >= 1.5 else f"{arcmin * 60.0:.0f}″"


def separation_deg(event: Event) -> float:
    """Return how far two bodies are apart, from the site where that is known; large where nothing is."""
    seen = event.get("seen_separation_deg")
    apart = event["separation_deg"] if seen is None else seen
    return FAR_DEG if apart is None else float(apart)


def happens_here(event: Event) -> bool:
    """Return whether the row says that one hides the other at the site."""
    return event.get("local_contact1_local") is not None


def misses(event: Event) -> bool:
    """Return whether an occultation is none at the site, or not at the moment to look."""
    if happens_here(event):
        return False
    return "local_contact1_local" in event or (watched(event) and separation_deg(event) > HIDING_DEG)


def _between(event: Event) -> str:
    """Return when it is hidden, of those contacts that happen above the horizon."""
    up = {n: (event.get(f"local_contact{n}_altitude_deg") or 0.0) > 0.0 for n in (1, 4)}
    at = {n: day_and_clock(event[f"local_contact{n}_local"])[1] for n in (1, 4) if up[n]}
    if len(at) == 2:
        return f" {at[1]}–{at[4]}"
    return f" from {at[1]}" if 1 in at else f" until {at[4]}" if 4 in at else ""


def day_and_clock(local: str) -> tuple[str, str]:
    """Return the date and the minute of a local instant, ISO 8601 with its offset; rounded within the day."""
    day, clock = minute(local[: -len("+01:00")]).split(" ")
    return day, clock


def watched(event: Event) -> bool:
    """Return whether the row says that it can be seen from a site; nobody is sent to look at the Sun."""
    seen = event.get("verdict") not in (None, "not_visible") and event.get("best_local") is not None
    return seen and event["body"] != "sun"


def _look(event: Event) -> tuple[str, str]:
    """Return where to look, in two lengths; nothing where that is not known."""
    if event.get("compass") is None or event.get("altitude_deg") is None:
        return "", ""
    point = LETTERS[event["compass"]]
    return f"{event['altitude_deg']:.0f}° up in the {point}", point


def _body(event: Event) -> str:
    return label(event["body"])


def _pair(event: Event) -> Wordings:
    """Name two bodies and how far they are apart, from the site where that is known."""
    body, other = _body(event), label(event["other"])
    seen, placement = event.get("seen_separation_deg"), event.get("seen_placement")
    if watched(event) and seen is None:
        return (f"{body} near {other}",)
    apart = seen if watched(event) else event["separation_deg"]
    if apart is None:
        return (f"{body} and {other} in conjunction",)
    angle = angle_text(float(apart))
    plain = (f"{body} and {other} {angle} apart", f"{body}, {other} {angle}")
    if not (watched(event) and placement):
        return plain
    near = "the Moon" if body == "Moon" else body
    link = "" if placement in ("above", "below") else " of"
    side = str(placement).removeprefix("to the ")
    return (f"{other} {angle} {side}{link} {near}", *plain)


def _occultation(event: Event) -> Wordings:
    """Say that one hides the other somewhere; from where is not in the table."""
    body, other = _body(event), label(event["other"])
    if event["body"] != "moon":
        return (f"{body} passes over {other}", f"{body} over {other}")
    if happens_here(event):
        return (f"Moon hides {other}{_between(event)}", f"Moon hides {other}")
    if misses(event):
        return _pair(event)
    hides = f"Moon hides {other} for parts of the Earth"
    return (hides, f"Moon hides {other} (in places)")


def _station(event: Event) -> Wordings:
    turns = f"{_body(event)} turns {event['detail']}"
    return (f"{turns} {FRAME_LABELS[event['frame']]}", turns) if event["frame"] else (turns,)


def _greatest_elongation(event: Event) -> Wordings:
    side, sky = SIDES[event["detail"]]
    angle = f"{event['elongation_deg']:.0f}°"
    return (
        f"{_body(event)} at greatest {side} elongation, {angle} from the Sun: {sky} sky",
        f"{_body(event)} greatest {side} elongation {angle}",
        f"{_body(event)} {angle} {event['detail']} of Sun",
    )


def _solar_conjunction(event: Event) -> Wordings:
    sort = f"{event['detail']} " if event["detail"] else ""
    return (
        f"{_body(event)} at {sort}conjunction with the Sun",
        f"{_body(event)} {sort}conjunction with the Sun",
    )


def _distance_extremum(event: Event) -> Wordings:
    nearest = "closest to" if event["kind"] == Kind.PERIGEE else "farthest from"
    short = nearest.split()[0]
    if event["body"] == "sun":
        return (f"Earth {nearest} the Sun",)
    if event["body"] == "moon":
        return (f"Moon {short}, {round(event['distance_au'] * AU_KM, -2):,.0f} km", f"Moon {short}")
    return (f"{_body(event)} {nearest} the Earth, {event['distance_au']:.2f} au", f"{_body(event)} {short}")


def _brilliancy(event: Event) -> Wordings:
    if event["magnitude"] is None:
        return (f"{_body(event)} at greatest brilliancy",)
    magnitude = facts.signed(event["magnitude"], 1)
    return (f"{_body(event)} at greatest brilliancy, magnitude {magnitude}", f"{_body(event)} brightest")


def _gathering(event: Event) -> Wordings:
    names, angle = gathered_names(event), angle_text(event["separation_deg"])
    return (f"{names} within {angle}", f"{names.replace(' and ', ', ')} in {angle}")


def _season_point(event: Event) -> Wordings:
    turn, month = event["detail"].split("_")
    return (f"{month.capitalize()} {turn}",)


def _rings(event: Event) -> Wordings:
    side = "seen" if event["detail"] == "earth" else "lit"
    return (f"{_body(event)}'s rings {side} edge-on",)


def _filled(*texts: str) -> Callable[[Event], Wordings]:
    return lambda event: tuple(text.format(body=_body(event)) for text in texts)


_WORDINGS: Final[dict[Kind, Callable[[Event], Wordings]]] = {
    Kind.STATION: _station,
    Kind.OPPOSITION: _filled("{body} at opposition to the Sun", "{body} at opposition"),
    Kind.SOLAR_CONJUNCTION: _solar_conjunction,
    Kind.QUADRATURE: _filled("{body} at quadrature"),
    Kind.GREATEST_ELONGATION: _greatest_elongation,
    Kind.PERIGEE: _distance_extremum,
    Kind.APOGEE: _distance_extremum,
    Kind.PERIHELION: _filled("{body} at perihelion"),
    Kind.APHELION: _filled("{body} at aphelion"),
    Kind.GREATEST_BRILLIANCY: _brilliancy,
    Kind.CONJUNCTION: _pair,
    Kind.APPULSE: _pair,
    Kind.OCCULTATION: _occultation,
    Kind.TRANSIT: _filled("{body} crosses the Sun's disc (transit)", "Transit of {body}"),
    Kind.GATHERING: _gathering,
    Kind.CONSTELLATION_ENTRY: lambda e: (f"{_body(e)} enters {full_name(e['constellation'])}",),
    Kind.NODE: _filled("{body} crosses the ecliptic"),
    Kind.SEASON_POINT: _season_point,
    Kind.RING_PLANE_CROSSING: _rings,
    Kind.MOON_PHASE: lambda e: (str(e["detail"]).replace("_", " ").capitalize(),),
}
