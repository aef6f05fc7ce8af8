"""Calendars as they leave the program, read back by two libraries that had no part in writing them.

``ical`` (PyPI) and ``vobject`` (PyPI) parse RFC 5545 each in its own way; what both find in a file must be
what stands in the event table.
"""

from __future__ import annotations

import re
from datetime import UTC, datetime, timedelta
from typing import Any

import polars as pl
import pytest
import vobject
from hypothesis import given
from hypothesis import strategies as st
from ical.calendar_stream import IcsCalendarStream

from tests.report.calendar_samples import (
    CONJUNCTION,
    KERNEL,
    NEAR_SUN,
    ONE_OF_EVERY_KIND,
    STAR,
    STATION,
    STYLE,
    TRANSIT,
    event,
    nearest_minute,
    table,
)
from wanderers import __version__
from wanderers.errors import SpanError
from wanderers.events.kinds import Kind
from wanderers.report import words
from wanderers.report.calendars import Style, calendar_bytes, issue, warnings_about


def written(events: pl.DataFrame) -> bytes:
    return calendar_bytes(events, name=STYLE.name, kernel=KERNEL)


def read_by_ical(content: bytes) -> dict[str, dict[str, Any]]:
    calendar = IcsCalendarStream.calendar_from_ics(content.decode())
    return {
        entry.uid: {
            "start": entry.dtstart,
            "length": entry.duration,
            "summary": entry.summary,
            "description": entry.description,
            "categories": entry.categories,
            "transparent": entry.transparency,
            "stamp": entry.dtstamp,
            "sequence": entry.sequence,
        }
        for entry in calendar.events
    }


def read_by_vobject(content: bytes) -> dict[str, dict[str, Any]]:
    calendar = vobject.readOne(content.decode(), validate=True)
    return {
        entry.uid.value: {
            "start": entry.dtstart.value.astimezone(UTC),
            "length": entry.duration.value,
            "summary": entry.summary.value,
            "description": entry.description.value,
            "categories": entry.categories.value,
            "transparent": entry.transp.value,
            "stamp": entry.dtstamp.value.astimezone(UTC),
            "sequence": int(entry.sequence.value),
        }
        for entry in calendar.vevent_list
    }


READERS = pytest.mark.parametrize("read", [read_by_ical, read_by_vobject])


def description(row: dict[str, Any]) -> str:
    (found,) = read_by_ical(written(table(row))).values()
    return str(found["description"])


@READERS
def test_every_event_of_the_table_is_read_back_field_by_field(read: Any) -> None:
    found = read(written(ONE_OF_EVERY_KIND))
    assert len(found) == ONE_OF_EVERY_KIND.height
    for row in ONE_OF_EVERY_KIND.iter_rows(named=True):
        entry = found[f"{row['event_id']}@wanderers"]
        assert entry["start"] == nearest_minute(row["utc"])
        assert entry["length"] == timedelta(minutes=15)
        assert entry["summary"] == words.summary(row)
        assert entry["categories"] == [row["kind"].replace("_", " ").capitalize()]
        assert entry["transparent"] == "TRANSPARENT"
        assert entry["sequence"] == 0
        assert f"Time: {nearest_minute(row['utc']):%Y-%m-%d %H:%M} UTC" in entry["description"]


def test_the_sample_holds_every_kind() -> None:
    assert set(ONE_OF_EVERY_KIND["kind"]) == {kind.value for kind in Kind}


def test_the_same_table_gives_the_same_octets() -> None:
    assert written(ONE_OF_EVERY_KIND) == written(ONE_OF_EVERY_KIND.clone())


def test_the_order_of_rows_does_not_matter() -> None:
    assert written(ONE_OF_EVERY_KIND.reverse()) == written(ONE_OF_EVERY_KIND)


def test_entries_stand_in_order_of_time() -> None:
    starts = [entry["start"] for entry in read_by_ical(written(ONE_OF_EVERY_KIND)).values()]
    assert starts == sorted(starts)


def test_the_title_stands_in_both_properties_that_programs_look_at() -> None:
    content = calendar_bytes(table(STATION), name="Sky, week; by\nweek", kernel=KERNEL)
    calendar = vobject.readOne(content.decode())
    assert calendar.contents["name"][0].value == "Sky, week; by week"
    assert calendar.contents["x-wr-calname"][0].value == "Sky, week; by week"


def test_no_place_is_given_without_a_site() -> None:
    content = written(ONE_OF_EVERY_KIND)
    assert b"GEO" not in content and b"LOCATION" not in content


@pytest.mark.parametrize(
    ("utc", "start", "marked"),
    [
        ("2027-01-10T12:59:03.120Z", "2027-01-10T12:59", False),
        ("2027-01-10T12:59:30.000Z", "2027-01-10T13:00", False),
        ("2027-01-10T23:58:30.000Z", "2027-01-10T23:59", False),
        ("2027-01-10T23:59:29.999Z", "2027-01-10T23:59", False),
        ("2027-12-31T23:59:30.000Z", "2027-12-31T23:59", True),
        ("9999-12-31T23:59:59.999Z", "9999-12-31T23:59", True),
        ("0001-01-01T00:00:00.000Z", "0001-01-01T00:00", False),
    ],
)
def test_rounding_to_the_minute_never_changes_the_date_unmarked(utc: str, start: str, marked: bool) -> None:
    content = written(table(STATION | {"utc": utc}))
    (stamp,) = re.findall(rb"^DTSTART:(.*)\r$", content, flags=re.MULTILINE)
    assert stamp.decode() == start.replace("-", "").replace(":", "") + "00Z"
    assert (b"so that the date stays right" in content.replace(b"\r\n ", b"")) is marked


@pytest.mark.parametrize("year", ["0000", "-0500", "+10000"])
def test_years_that_the_format_cannot_hold_are_refused_with_the_way_out(year: str) -> None:
    row = STATION | {"event_id": "b", "utc": f"{year}-06-01T00:00:00.000Z"}
    with pytest.raises(SpanError, match=r"0001 to 9999.*--format csv"):
        written(table(STATION, row))


@pytest.mark.parametrize(
    ("year", "warned"), [("1969", True), ("1970", False), ("2100", False), ("2101", True)]
)
def test_years_that_many_programs_cannot_show_are_warned_of(year: str, warned: bool) -> None:
    lines = warnings_about(table(STATION | {"utc": f"{year}-06-01T00:00:00.000Z"}))
    assert any("1970 to 2100" in line for line in lines) is warned


@pytest.mark.parametrize(("count", "warned"), [(1000, False), (1001, True)])
def test_more_than_a_thousand_events_are_warned_of(count: int, warned: bool) -> None:
    rows = [STATION | {"event_id": str(number)} for number in range(count)]
    assert any("--split" in line for line in warnings_about(table(*rows))) is warned


def test_an_empty_calendar_is_warned_of() -> None:
    assert warnings_about(table()) != []
    assert read_by_ical(written(table())) == {}


def test_a_caution_stands_where_any_body_may_be_under_20_degrees_from_the_sun() -> None:
    # needs: "Target under 20 degrees from the Sun"; Mercury stands at 22.5, Neptune within 3 degrees of it.
    assert words.NEAR_SUN_CAUTION in description(NEAR_SUN)
    assert words.NEAR_SUN_CAUTION not in description(NEAR_SUN | {"separation_deg": 2.4})
    assert words.NEAR_SUN_CAUTION in description(STATION | {"elongation_deg": 19.99})
    assert words.NEAR_SUN_CAUTION not in description(STATION | {"elongation_deg": 20.0})


def test_a_transit_warns_of_the_sun_itself_and_tells_its_contacts() -> None:
    text = description(TRANSIT)
    assert words.SUN_CAUTION in text
    assert "Contacts: first 2032-11-13 06:41, fourth 2032-11-13 11:07 UTC." in text


def test_what_stands_in_the_glare_is_said_to_be_out_of_sight() -> None:
    text = description(STATION | {"elongation_deg": 6.4})
    assert "Mars not observable: only 6 degrees from the Sun" in text
    assert "not observable" not in description(STATION | {"elongation_deg": 10.0})


def test_a_text_names_its_figures_its_definition_and_where_they_come_from() -> None:
    text = description(CONJUNCTION)
    assert "equal right ascension (true equator and equinox of date)" in text
    assert "Separation: 0.42 degrees (25 arcminutes)." in text
    assert "in the constellation Leo, 33.0 degrees from the Sun, magnitude -3.9" in text
    assert "Lasts 15 minutes here only to be shown" in text
    assert text.endswith(f"Computed from DE999 (SHA-256 0123456789ab) by wanderers {__version__}.")


def test_a_doubtful_time_says_so_and_a_sure_one_does_not() -> None:
    assert "Time uncertain by about 1.9 seconds" in description(TRANSIT)
    assert "uncertain" not in description(STATION)


def test_no_alarm_rings_unless_asked_for() -> None:
    assert b"VALARM" not in written(ONE_OF_EVERY_KIND)


def test_alarms_are_shown_before_the_start() -> None:
    content = issue(table(STATION), Style(STYLE.name, KERNEL, (0, 90))).content
    (entry,) = vobject.readOne(content.decode(), validate=True).vevent_list
    assert [alarm.trigger.value for alarm in entry.valarm_list] == [timedelta(), timedelta(minutes=-90)]
    assert {alarm.action.value for alarm in entry.valarm_list} == {"DISPLAY"}
    assert {alarm.description.value for alarm in entry.valarm_list} == {words.summary(STATION)}


# RFC 5545, 3.1: lines of at most 75 octets without the break, folded by CRLF and one blank, never inside a
# character; every line, the last included, ends with CRLF.
HARD_TO_FOLD = [STAR | {"event_id": str(length), "other": f"X{'é' * length}"} for length in range(1, 160, 3)]


@pytest.mark.parametrize("events", [ONE_OF_EVERY_KIND, table(*HARD_TO_FOLD)], ids=["every kind", "not ASCII"])
def test_lines_are_folded_by_octets_between_characters(events: pl.DataFrame) -> None:
    content = written(events)
    assert content.endswith(b"END:VCALENDAR\r\n")
    assert b"\n" not in content.replace(b"\r\n", b"") and b"\r" not in content.replace(b"\r\n", b"")
    lines = content.split(b"\r\n")[:-1]
    assert max(len(line) for line in lines) <= 75
    for line in lines:
        line.decode()  # raises if a character was cut in two
        assert line.strip() != b""


def test_folding_is_undone_without_loss() -> None:
    found = read_by_ical(written(table(*HARD_TO_FOLD)))
    for row in HARD_TO_FOLD:
        assert found[f"{row['event_id']}@wanderers"]["summary"] == f"Moon passes in front of {row['other']}"


@READERS
def test_hostile_names_come_back_as_they_were(read: Any) -> None:
    (entry,) = read(written(table(STAR))).values()
    assert entry["summary"] == "Moon passes in front of Citalá, the jaguar; a\\N star"


TEXT = st.text(st.characters(exclude_categories=("Cc", "Cs", "Zl", "Zp")), min_size=1, max_size=120)


@READERS
@given(text=TEXT)
def test_any_text_comes_back_as_it_was(read: Any, text: str) -> None:
    row = STAR | {"event_id": "a", "other": f"<{text}>"}
    (entry,) = read(written(table(row))).values()
    assert entry["summary"] == f"Moon passes in front of <{text}>"


@READERS
@given(text=st.text(st.characters(categories=("Cc", "Zl", "Zp")), min_size=1))
def test_control_characters_never_reach_the_file(read: Any, text: str) -> None:
    content = written(table(STAR | {"event_id": "a", "other": f"X{text}x"}))
    (entry,) = read(content).values()
    assert re.fullmatch("Moon passes in front of X[\n\t]*x", entry["summary"])
    assert not re.search(rb"[\x00-\x08\x0b\x0c\x0e-\x1f\x7f]", content)


@given(st.datetimes(datetime(1, 1, 1), datetime(9999, 12, 31, 23, 59, 59, 999_000)))
def test_any_instant_is_rounded_within_its_day(instant: datetime) -> None:
    utc = instant.isoformat(timespec="milliseconds") + "Z"
    shown = datetime.fromisoformat(words.minute(utc))
    assert shown.date() == instant.date()
    assert abs(shown - instant) <= timedelta(seconds=30) or words.is_held_back(utc)
    assert shown.second == 0


def test_a_row_without_figures_still_makes_an_entry() -> None:
    (entry,) = read_by_ical(written(table(event("opposition", STATION["utc"])))).values()
    assert entry["summary"] == "Mars at opposition to the Sun"


def test_a_title_that_is_no_text_loses_what_cannot_be_written() -> None:
    content = calendar_bytes(table(STATION), name="a\udcffb", kernel=KERNEL)
    assert b"\r\nNAME:ab\r\n" in content
