"""The documents of sentences: what stands where, and nothing lost between table and text."""

from __future__ import annotations

import re

import polars as pl
import pytest

from tests.report.calendar_samples import CONJUNCTION, NEAR_SUN, ONE_OF_EVERY_KIND, STATION, TRANSIT, table
from wanderers.ephemeris.store import TrackStore
from wanderers.events.seasons import seasons
from wanderers.report.phrases.language import language
from wanderers.report.phrases.markdown import Source, Wording, events_markdown, seasons_markdown
from wanderers.report.phrases.sentences import sentences

SOURCE = Source("DE999")
ENGLISH = Wording(language("en"))


def ids(text: str) -> list[str]:
    return re.findall(r"<!-- (\S+) -->", text)


@pytest.mark.parametrize("lengths", [("short", "medium", "long"), ("short",), ("medium",), ("long",)])
@pytest.mark.parametrize("code", ["en", "de"])
def test_every_event_stands_once_with_its_id_in_order_of_time(lengths: tuple[str, ...], code: str) -> None:
    rows = ONE_OF_EVERY_KIND.with_columns(jd_tt=pl.col("utc").rank("ordinal").cast(pl.Float64))
    text = events_markdown(rows, Wording(language(code), lengths), SOURCE)
    assert ids(text) == rows.sort("utc")["event_id"].to_list()
    for row in rows.iter_rows(named=True):
        assert all(one in text for one in sentences(row, language(code)).of(lengths))


def test_three_lengths_are_paragraphs_of_their_own() -> None:
    lines = events_markdown(table(STATION), ENGLISH, SOURCE).splitlines()
    start = lines.index("### 10 January 2027, 13h UTC")
    said = sentences(STATION, language("en"))
    assert lines[start + 1 : start + 8] == ["", said.short, "", said.medium, "", said.long, ""]
    assert lines[0] == "# Events" and "## January 2027" in lines


def test_notes_stand_beside_the_event() -> None:
    text = events_markdown(table(NEAR_SUN, TRANSIT), ENGLISH, SOURCE)
    near, transit = text.split("<!-- ")[:2]
    assert "> Caution, close to the Sun" in near and "> Near midnight" in near
    assert "> Caution, the Sun itself" in transit
    listed = events_markdown(table(NEAR_SUN), Wording(language("de"), ("short",)), SOURCE)
    assert "\n  - Vorsicht, nahe der Sonne" in listed


def test_the_head_counts_and_names_the_kernel_and_the_calendar() -> None:
    one = events_markdown(table(STATION), ENGLISH, SOURCE)
    assert "1 event, apparent places from the Earth's centre by DE999. Dates and times are UTC." in one
    two = events_markdown(table(STATION, CONJUNCTION), Wording(language("de")), Source("DE999", "julian"))
    assert "2 Ereignisse" in two and "julianischen Kalender" in two


def test_a_clock_is_named_with_the_version_of_its_rules() -> None:
    local = table(STATION).with_columns(
        zone=pl.lit("Europe/Berlin"), site=pl.lit("Lantern Hill"), local_date=pl.lit("2027-01-10"),
        local_time=pl.lit("13:59:03"),
    )  # fmt: skip
    text = events_markdown(local, ENGLISH, SOURCE)
    assert re.search(r"local: Lantern Hill, Europe/Berlin \(zone data \d{4}\w\)", text)
    assert "### 10 January 2027, 14h local time" in text


def test_no_events_say_so() -> None:
    assert "Nothing found." in events_markdown(table(STATION).clear(), ENGLISH, SOURCE)
    assert "Nichts gefunden." in events_markdown(
        table(STATION).clear(), Wording(language("de"), ("short",)), SOURCE
    )


def test_seasons_stand_in_order_of_their_middles(store: TrackStore) -> None:
    rows = seasons(store, 2_461_406.5, 2_461_771.5)
    text = seasons_markdown(rows, Wording(language("de"), ("long",)), SOURCE)
    assert ids(text) == rows.sort("middle_jd_tt", "season_id")["season_id"].to_list()
    assert "Mars ist in ekliptikaler Länge rückläufig vom 10. Januar bis 1. April 2027: 81 Tage" in text
