"""When and where to look from a site, or why not: what follows the sentence of an event.

Reads the columns that a site adds (:mod:`wanderers.site.columns`), among them ``seen_separation_deg`` and
``seen_placement``: how far the second of a pair stands from the first at the best moment, and where. Any of
them may be absent or null.
"""

from __future__ import annotations

import functools
import re
from collections.abc import Sequence
from typing import Final

from wanderers.events.kinds import Kind
from wanderers.report.phrases import figures
from wanderers.report.phrases.facts import Fact, name_form
from wanderers.report.phrases.language import Language
from wanderers.report.phrases.moments import Moment, Row, date_text, moment_of, read_moment
from wanderers.report.phrases.templates import NOTHING
from wanderers.site.visibility import Verdict

NO_ENDING: Final = (NOTHING,)
DISCS: Final = frozenset({Kind.OCCULTATION.value, Kind.TRANSIT.value})
"""Kinds whose contacts a site has for itself."""
NO_SIGHTS: Final = frozenset(
    {Kind.PERIHELION.value, Kind.APHELION.value, Kind.APOGEE.value, Kind.NODE.value, Kind.SEASON_POINT.value}
)
"""Kinds at which there is nothing to see: nobody looks up for them."""
_MISSED: Final = re.compile(r"misses here by (\d+) (arcminute|arcsecond)")
_OFFSET: Final = re.compile(r"[+-]\d\d:\d\d$")
_FIELD: Final = re.compile(r"\\{(\w+)\\}")
_GROUPS: Final = {"number": r"[-−]?\d+(?:\.\d+)?", "inner": r".+"}
"""What may stand for a field of a reason: a figure, or a reason within a reason."""


def endings(event: Row, words: Language, length: str) -> Sequence[str]:
    """Return the templates of what follows an event's sentence, nothing where no site was asked."""
    table = _table(event)
    if table is None:
        return NO_ENDING
    chosen: Sequence[str] = words.table("sight", table)[length]
    return chosen


def _table(event: Row) -> str | None:
    """Return which table of the language's file says what becomes of an event at the site."""
    verdict = event.get("verdict")
    if verdict is None or event["body"] == "sun" or event["kind"] in NO_SIGHTS:
        return None
    if event["kind"] in DISCS and _MISSED.match(event.get("circumstances") or NOTHING):
        return "missed"
    if verdict == Verdict.NOT_VISIBLE or event.get("best_local") is None:
        return "hidden"
    if event["kind"] in DISCS and event.get("local_contact1_local") and event.get("local_contact4_local"):
        return "contacts"
    return "watchable"


def _local_moment(event: Row, column: str) -> Moment | None:
    text = event.get(column)
    return None if text is None else read_moment(_OFFSET.sub(NOTHING, text), is_local=True)


def _local_time(column: str, form: str, manner: str = NOTHING) -> Fact:
    """Return a fact that tells a time by the site's clock, with its date where that is not the event's."""
    bare, dated = (f"{manner}clock", f"{manner}dated") if manner else ("minute", "dated")

    def text(event: Row, words: Language) -> str | None:
        best = _local_moment(event, column)
        if best is None:
            return None
        if best.date == moment_of(event).date:
            return words.phrase("clock", bare).format(clock=best.clock)
        day = date_text(best, words, form)
        return words.phrase("clock", dated).format(day=day, clock=best.clock)

    return text


def _contact(number: int, form: str) -> Fact:
    """Return a fact that tells a contact's time, unknown where it happens below the horizon."""
    time = _local_time(f"local_contact{number}_local", form)
    altitude = f"local_contact{number}_altitude_deg"
    return lambda event, words: time(event, words) if (event.get(altitude) or 0.0) >= 0.0 else None


def _altitude(event: Row, words: Language) -> str | None:
    value = event.get("altitude_deg")
    return None if value is None else figures.whole_degrees(max(value, 0.0), words)


def _compass(table: str) -> Fact:
    return lambda event, words: words.table(table).get(event.get("compass") or NOTHING)


def _seen_gap(event: Row, words: Language) -> str | None:
    value = event.get("seen_separation_deg")
    return None if value is None else figures.angle(value, words, "signs")


def _placement(event: Row, words: Language) -> str | None:
    return words.table("placements").get(event.get("seen_placement") or NOTHING)


def _tool(table: str) -> Fact:
    return lambda event, words: words.table(table).get(event.get("verdict") or NOTHING)


def _missed(event: Row, words: Language) -> str | None:
    """Return by how much discs miss each other at the site."""
    match = _MISSED.match(event.get("circumstances") or NOTHING)
    if match is None:
        return None
    return figures.angle(int(match[1]) / (60.0 if match[2] == "arcminute" else 3_600.0), words, "signs")


def _reason(event: Row, words: Language) -> str | None:
    given = event.get("verdict_reason")
    return None if given is None else reason_text(given, words)


def _first_reason(event: Row, words: Language) -> str | None:
    """Return the first part of the reason alone."""
    given = event.get("verdict_reason")
    return None if given is None else reason_text(given.partition("; ")[0], words)


def reason_text(given: str, words: Language) -> str | None:
    """Return a verdict's reason in a language, None where its file has no words for a part of it."""
    name, colon, rest = given.partition(": ")
    if colon:
        inner = reason_text(rest, words)
        return None if inner is None else f"{name_form(name, words, 'name')}: {inner}"
    whole = _reason_part(given, words)
    if whole is not None:
        return whole
    parts = [_reason_part(part, words) for part in given.split("; ")]
    return None if None in parts else "; ".join(part for part in parts if part is not None)


def _reason_part(given: str, words: Language) -> str | None:
    for pattern, template in _reasons(tuple(words.table("reasons").items())):
        match = pattern.fullmatch(given)
        if match is None:
            continue
        found = match.groupdict()
        if "inner" in found:
            inner = reason_text(found["inner"], words)
            if inner is None:
                return None
            found["inner"] = inner
        if "number" in found:
            found["number"] = found["number"].replace(".", words.phrase("numbers", "decimal"))
        return template.format_map(found)
    return None


@functools.cache
def _reasons(rows: tuple[tuple[str, str], ...]) -> tuple[tuple[re.Pattern[str], str], ...]:
    """Return patterns of reasons, and what a language says for each."""
    return tuple((re.compile(_FIELD.sub(_group, re.escape(key))), template) for key, template in rows)


def _group(field: re.Match[str]) -> str:
    return f"(?P<{field[1]}>{_GROUPS[field[1]]})"


SOURCES: Final[dict[str, Fact]] = {
    "best": _local_time("best_local", "day", "at_"),
    "best_brief": _local_time("best_local", "brief_day"),
    "begins": _contact(1, "day"),
    "ends": _contact(4, "day"),
    "begins_brief": _contact(1, "brief_day"),
    "ends_brief": _contact(4, "brief_day"),
    "missed": _missed,
    "altitude": _altitude,
    "toward": _compass("toward"),
    "toward_brief": _compass("toward_brief"),
    "seen_gap": _seen_gap,
    "placement": _placement,
    "tool": _tool("tools"),
    "tool_brief": _tool("brief_tools"),
    "reason": _reason,
    "reason_brief": _first_reason,
}
"""Fields of what follows the sentence."""
