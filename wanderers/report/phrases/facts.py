"""The facts of an event as the words of a language: what stands for each field of its phrases."""

from __future__ import annotations

from collections.abc import Callable, Iterator, Mapping
from typing import Final

from wanderers.ephemeris.constellations import full_name
from wanderers.events.kinds import Kind
from wanderers.report.names import label
from wanderers.report.phrases import figures
from wanderers.report.phrases.language import Language
from wanderers.report.phrases.moments import (
    Row,
    event_date,
    moment_of,
    precision,
    read_moment,
    time_text,
    uncertainty_text,
)
from wanderers.report.words import NEAR_SUN_DEG

Fact = Callable[[Row, Language], str | None]

FAR_FROM_SUN_DEG: Final = 150.0
"""From this elongation on a body is up most of the night: neither an evening's nor a morning's sight."""
UNNUMBERED: Final = frozenset({"sun", "moon"})
"""Bodies whose magnitude nobody asks for."""


class Facts(Mapping[str, str | None]):
    """The fields of one event in one language, worked out when asked for."""

    def __init__(self, row: Row, words: Language, sources: Mapping[str, Fact]) -> None:
        """Take the row, the language and what knows the fields."""
        self.row, self.words, self.sources = row, words, sources
        self._known: dict[str, str | None] = {}

    def __getitem__(self, name: str) -> str | None:
        """Return the text of a field, None where it does not apply."""
        if name not in self._known:
            self._known[name] = self._looked_up(name)
        return self._known[name]

    def _looked_up(self, name: str) -> str | None:
        if name in self.sources:
            return self.sources[name](self.row, self.words)
        role, _, form = name.partition("_")
        return ROLES[role](self.row, self.words, form)

    def __iter__(self) -> Iterator[str]:
        """Iterate over the fields that need no form of a name."""
        return iter(self.sources)

    def __len__(self) -> int:
        """Return how many those are."""
        return len(self.sources)


def name_form(name: str, words: Language, form: str) -> str:
    """Return a body's or star's name in a grammatical form that the language's file defines."""
    known = words.table("names").get(name.lower())
    if known is None:
        return words.phrase("forms", "name", form).format(name=label(name))
    return str(known.get(form) or words.phrase("forms", "name", form).format(name=known["name"]))


def constellation_form(abbreviation: str, words: Language, form: str) -> str:
    """Return a constellation's name in a form of the language, its Latin name where the file has no other."""
    known = words.table("constellations").get(abbreviation, {})
    default = words.phrase("forms", "constellation", form)
    return str(known.get(form) or default.format(name=known.get("name") or full_name(abbreviation)))


def _body(event: Row, words: Language, form: str) -> str | None:
    return name_form(event["body"], words, form or "name")


def _other(event: Row, words: Language, form: str) -> str | None:
    return None if event["other"] is None else name_form(event["other"], words, form or "name")


def _constellation(event: Row, words: Language, form: str) -> str | None:
    known = event["constellation"]
    return None if known is None else constellation_form(known, words, form or "name")


def _left(event: Row, words: Language, form: str) -> str | None:
    entered = event["kind"] == Kind.CONSTELLATION_ENTRY and event["detail"]
    return constellation_form(event["detail"], words, form) if entered else None


ROLES: Final[dict[str, Callable[[Row, Language, str], str | None]]] = {
    "body": _body,
    "other": _other,
    "constellation": _constellation,
    "left": _left,
}


def _gap(manner: str) -> Fact:
    def text(event: Row, words: Language) -> str | None:
        value = event["separation_deg"]
        return None if value is None else figures.angle(value, words, manner)

    return text


def figure(column: str, printed: Callable[[float, Language], str]) -> Fact:
    """Return a fact that prints one column, unknown where it is null."""
    return lambda event, words: None if event[column] is None else printed(event[column], words)


def _said(table: str, column: str) -> Fact:
    """Return a fact that a column chooses from a table of the language, unknown where it is null."""
    return lambda event, words: words.table(table).get(event[column]) if event.get(column) else None


def _sky(event: Row, words: Language) -> str | None:
    """Return in which part of the night a body is up; nothing where it is lost near the Sun."""
    elongation, side = event["elongation_deg"], event.get("solar_side")
    if elongation is None or elongation < NEAR_SUN_DEG or side is None:
        return None
    return words.phrase("sky", "night" if elongation > FAR_FROM_SUN_DEG else side)


def _magnitude(event: Row, words: Language) -> str | None:
    value = event["magnitude"]
    if value is None or event["body"] in UNNUMBERED:
        return None
    return words.phrase("units", "magnitude").format(n=words.number(value, 1))


def _geocentric(event: Row, words: Language) -> str | None:
    """Return that the place is that from the Earth's centre, where that makes a difference one can see."""
    return words.phrase("document", "geocentric") if event["body"] == "moon" else None


def _contact(number: int) -> Fact:
    def text(event: Row, words: Language) -> str | None:
        first, last = event.get("contact1_utc"), event.get("contact4_utc")
        if first is None or last is None or moment_of(event).is_local or precision(event) != "minute":
            return None
        ends = read_moment(first), read_moment(last)
        return ends[number].clock if ends[0].date == ends[1].date else None

    return text


def members(event: Row) -> tuple[str, ...]:
    """Return the bodies of a gathering."""
    return tuple((event["detail"] or "").split("+"))


def _gathered(form: str) -> Fact:
    return lambda event, words: (
        words.listed(tuple(name_form(body, words, form) for body in members(event)))
        if event["kind"] == Kind.GATHERING
        else None
    )


def _count(event: Row, words: Language) -> str | None:
    if event["kind"] != Kind.GATHERING:
        return None
    unit = "body" if {"sun", "moon"} & set(members(event)) else "planet"
    return words.counted(unit, str(len(members(event))))


def _date(form: str) -> Fact:
    return lambda event, words: event_date(event, words, form)


def _time(manner: str) -> Fact:
    return lambda event, words: time_text(event, words, manner)


SOURCES: Final[dict[str, Fact]] = {
    "gap": _gap("signs"),
    "gap_words": _gap("units"),
    "side": _said("sides", "pair_side"),
    "side_brief": _said("brief_sides", "pair_side"),
    "frame": _said("frames", "frame"),
    "frame_brief": _said("brief_frames", "frame"),
    "elongation": figure("elongation_deg", figures.whole_degrees),
    "elongation_fine": figure("elongation_deg", figures.fine_degrees),
    "sky": _sky,
    "magnitude": _magnitude,
    "km": figure("distance_au", figures.kilometres),
    "million_km": figure("distance_au", figures.million_kilometres),
    "au": figure("distance_au", figures.astronomical_units),
    "geocentric": _geocentric,
    "contact_first": _contact(0),
    "contact_last": _contact(1),
    "bodies": _gathered("name"),
    "bodies_subject": _gathered("subject"),
    "count": _count,
    "date": _date("full"),
    "day": _date("day"),
    "brief_date": _date("brief"),
    "brief_day": _date("brief_day"),
    "time": _time("time"),
    "at": _time("at"),
    "uncertainty": uncertainty_text,
}
"""Fields of the phrases that are no forms of a name."""
