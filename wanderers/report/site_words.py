"""What can be seen of an event from a site, in lines: when and where to look, how well, what to mind."""

from __future__ import annotations

import datetime as dt
from typing import Any, Final

from wanderers.report.names import label
from wanderers.report.words import Event
from wanderers.site.hours import WEEKDAY_NAMES

ROUNDING: Final = dt.timedelta(seconds=30)
FIRST_MORNING_HOUR: Final = 3
"""Earlier is night. Common practice, no source."""
AIDS: Final = {
    "naked_eye": "with the naked eye",
    "binoculars": "with binoculars",
    "telescope": "with a telescope",
}


def has_view(event: Event) -> bool:
    """Return whether an event carries what a site sees of it."""
    return "verdict" in event


def is_watchable(event: Event) -> bool:
    """Return whether there is a moment at which to look."""
    return has_view(event) and event["best_local"] is not None and event["verdict"] != "not_visible"


def where_to_look(event: Event) -> list[str]:
    """Return when and where to look from the site of an event, and how well it shows; or why nothing does."""
    if not has_view(event):
        return []
    circumstances = [f"At {event['site']}: {event['circumstances']}."] if event.get("circumstances") else []
    if not is_watchable(event):
        return [f"Not to be seen from {event['site']}: {event['verdict_reason']}.", *circumstances]
    start, best, end = (local(event[f"{name}_local"]) for name in ("window_start", "best", "window_end"))
    height = f"{event['altitude_deg']:.0f} degrees high in the {event['compass']}"
    return [
        f"From {event['site']}, {AIDS[event['verdict']]}, {night_words(event['evening_date'], best)}: "
        f"{clock(start)} to {clock(end)} local time, best at {clock(best)}, {height}.",
        *([placed(event)] if event["seen_placement"] else []),
        f"{sentence(event['verdict_reason'])}.",
        *circumstances,
    ]


def placed(event: Event) -> str:
    """Return how two bodies stand to each other at the best moment, the horizon level."""
    apart, where = f"{event['seen_separation_deg']:.1f} degrees", event["seen_placement"]
    of = "" if where in ("above", "below") else "of "
    base = "the Moon" if event["body"] == "moon" else label(event["body"])
    return f"{label(event['other'])} is then {apart} {where} {of}{base}."


def night_words(evening_date: str, best: dt.datetime) -> str:
    """Return which evening, night or morning a moment belongs to."""
    if best.date().isoformat() == evening_date:
        return f"on the evening of {day_words(evening_date)}"
    if best.hour < FIRST_MORNING_HOUR:
        return f"in the night after {day_words(evening_date)}"
    return f"on the morning of {day_words(best.date().isoformat())}"


def local(text: str) -> dt.datetime:
    """Return a local instant to the nearest minute, with its offset."""
    return (dt.datetime.fromisoformat(text) + ROUNDING).replace(second=0, microsecond=0)


def clock(moment: dt.datetime) -> str:
    """Return a time of day."""
    return f"{moment:%H:%M}"


def night_of(start: dt.datetime, end: dt.datetime) -> str:
    """Return the date on which a window lies; one that goes past midnight is named by its night."""
    night = "" if start.date() == end.date() else "night after "
    return f"{night}{day_words(start.date().isoformat())}"


def day_words(date: str) -> str:
    """Return a date with its weekday."""
    day = dt.date.fromisoformat(date)
    return f"{WEEKDAY_NAMES[day.weekday()]} {day.isoformat()}"


def sentence(text: str) -> str:
    """Return a text that begins with a capital."""
    return text[:1].upper() + text[1:]


def window(event: Event) -> tuple[dt.datetime, dt.datetime]:
    """Return from when to when to watch, by the local clock, to the minute."""
    start, end = (local(event[name]) for name in ("window_start_local", "window_end_local"))
    return start, max(end, start + dt.timedelta(minutes=1))


def caution(event: Event) -> list[str]:
    """Return the caution that the site's own sunset and sunrise go into."""
    text: Any = event.get("caution")
    return [f"CAUTION: {text}."] if text else []
