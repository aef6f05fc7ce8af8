"""Calendars against RFC 5545 itself: its rules (data/icalendar.csv) and the examples in its text.

The lines are taken apart here by hand, as section 3.1 describes them, so that no library's leniency helps.
"""

from __future__ import annotations

import re
from collections import Counter
from collections.abc import Iterator
from datetime import UTC, datetime, timedelta

import pytest
from icalendar import vDuration

from tests.reference.published import rows
from tests.report.calendar_samples import KERNEL, ONE_OF_EVERY_KIND, table
from wanderers.report.calendar_entries import entry_of, escaped, unescaped, unfolded
from wanderers.report.calendar_update import read_calendar
from wanderers.report.calendars import Style, issue

RULES = {row["id"]: row for row in rows("icalendar")}
STYLE = Style("Rules", KERNEL, (15,))
FIRST = issue(ONE_OF_EVERY_KIND, STYLE).content
CANCELLED = issue(
    table(),
    STYLE,
    published=read_calendar(FIRST),
    span=(datetime(2000, 1, 1, tzinfo=UTC), datetime(2100, 1, 1, tzinfo=UTC)),
).content
FILES = pytest.mark.parametrize("content", [FIRST, CANCELLED], ids=["first issue", "all cancelled"])


def components(content: bytes) -> Iterator[tuple[str, list[tuple[str, str]]]]:
    """Give the name of every component and its own properties, each with its parameters cut off."""
    open_ones: list[tuple[str, list[tuple[str, str]]]] = []
    text = content.decode(RULES["charset"]["what"])
    for line in text.replace("\r\n ", "").removesuffix("\r\n").split("\r\n"):
        name, value = line.split(":", 1)
        if name == "BEGIN":
            open_ones.append((value, []))
        elif name == "END":
            assert open_ones[-1][0] == value
            yield open_ones.pop()
        else:
            open_ones[-1][1].append((name.split(";")[0], value))
    assert open_ones == []


def named(rule: str) -> list[str]:
    return RULES[rule]["what"].split(",")


@FILES
@pytest.mark.parametrize(
    ("rule", "component"),
    [("calendar-required", "VCALENDAR"), ("event-required", "VEVENT"), ("alarm-required", "VALARM")],
)
def test_what_is_required_stands_exactly_once(content: bytes, rule: str, component: str) -> None:
    found = [Counter(name for name, _ in lines) for kind, lines in components(content) if kind == component]
    assert found or (content is CANCELLED and component == "VALARM")
    assert all(counts[name] == 1 for counts in found for name in named(rule))


@FILES
def test_what_may_stand_once_stands_at_most_once_and_length_is_told_one_way(content: bytes) -> None:
    for kind, lines in components(content):
        if kind == "VEVENT":
            counts = Counter(name for name, _ in lines)
            assert all(counts[name] <= 1 for name in named("event-once"))
            assert sum(counts[name] for name in named("end-or-duration")) == 1


@FILES
def test_values_have_the_form_the_standard_gives_them(content: bytes) -> None:
    for kind, lines in components(content):
        values = dict(lines)
        if kind == "VCALENDAR":
            assert values["VERSION"] == RULES["version"]["what"]
        if kind == "VEVENT":
            assert values["STATUS"] in named("status")
            in_utc = {*named("stamp-utc"), "DTSTART", "LAST-MODIFIED"} & values.keys()
            assert all(re.fullmatch(r"\d{8}T\d{6}Z", values[name]) for name in in_utc)  # 3.3.5, form 2
            assert values["SEQUENCE"].isdecimal()


@FILES
def test_no_time_zone_is_named_so_that_none_need_be_described(content: bytes) -> None:
    # 3.2.19: every TZID needs a VTIMEZONE; 3.3.5: UTC takes none.
    assert b"TZID" not in content and b"VTIMEZONE" not in content


def test_a_duration_is_written_as_in_the_standard() -> None:
    length = timedelta(days=15, hours=5, seconds=20)
    assert vDuration(length).to_ical().decode() == RULES["duration"]["what"]


# RFC 5545, 3.3.11, the example of a TEXT value; from memory.
PROJECT = "Project XYZ Final Review\nConference Room - 3B\nCome Prepared."
PROJECT_RAW = r"Project XYZ Final Review\nConference Room - 3B\nCome Prepared."


def test_text_is_escaped_as_in_the_standard() -> None:
    assert escaped(PROJECT) == PROJECT_RAW
    assert unescaped(PROJECT_RAW) == unescaped(PROJECT_RAW.replace(r"\n", r"\N")) == PROJECT


@pytest.mark.parametrize(
    ("text", "raw"),
    [
        ("\\", r"\\"),  # 3.3.11: ESCAPED-CHAR = ("\\" / "\;" / "\," / "\N" / "\n")
        (";", r"\;"),
        (",", r"\,"),
        ("\n", r"\n"),
        (":", ":"),  # 3.3.11: a colon MUST NOT be escaped
        ('"', '"'),
        (r"\n", r"\\n"),
        (r"\N", r"\\N"),
        (r"\;", r"\\\;"),
    ],
)
def test_each_character_that_needs_it_is_escaped_and_no_other(text: str, raw: str) -> None:
    assert escaped(text) == raw
    assert unescaped(raw) == text


def test_folding_is_undone_as_in_the_standard() -> None:
    # RFC 5545, 3.1, the example of a folded line; from memory.
    folded = "DESCRIPTION:This is a lo\r\n ng description\r\n  that exists on a long line.\r\n"
    assert unfolded(folded) == ["DESCRIPTION:This is a long description that exists on a long line."]
    assert unfolded(folded.replace("\r\n ", "\r\n\t")) == unfolded(folded)


@pytest.mark.parametrize("character", ["x", "é", "→", "𝛼"], ids=["1", "2", "3", "4"])  # octets of each
@pytest.mark.parametrize("length", [60, 73, 74, 75, 76, 150, 151])
def test_lines_end_before_the_76th_octet(character: str, length: int) -> None:
    line = f"SUMMARY:{character * length}"
    pieces = entry_of([line]).octets.removesuffix(b"\r\n").split(b"\r\n")
    assert all(len(piece) <= 75 for piece in pieces)
    assert all(piece.startswith(b" ") for piece in pieces[1:])
    assert pieces[0].decode() + "".join(piece[1:].decode() for piece in pieces[1:]) == line
    if len(line.encode()) <= 74:
        assert len(pieces) == 1
