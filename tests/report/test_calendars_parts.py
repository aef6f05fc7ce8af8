"""Cutting a calendar up: nothing lost, nothing twice."""

from __future__ import annotations

import polars as pl
import pytest

from tests.report.calendar_samples import CONJUNCTION, ONE_OF_EVERY_KIND, STATION, TRANSIT, table
from wanderers.report.calendar_parts import PARTS, is_part, part_title, split


@pytest.mark.parametrize("part", PARTS)
def test_every_event_lies_in_exactly_one_part(part: str) -> None:
    parts = split(ONE_OF_EVERY_KIND, part)
    assert len(parts) > 1
    assert all(is_part(name, part) for name in parts)
    ids = pl.concat(parts.values())["event_id"]
    assert ids.is_unique().all()
    assert set(ids) == set(ONE_OF_EVERY_KIND["event_id"])


def test_parts_are_named_and_ordered_as_people_expect() -> None:
    events = table(TRANSIT, CONJUNCTION, STATION)
    assert list(split(events, "year")) == ["2027", "2032"]
    assert list(split(events, "body")) == ["mercury", "venus", "mars"]
    assert list(split(events, "kind")) == ["station", "conjunction", "transit"]


def test_no_events_make_no_parts() -> None:
    assert [split(table(), part) for part in PARTS] == [{}, {}, {}]


@pytest.mark.parametrize(
    ("name", "part"),
    [("mars", "kind"), ("station", "body"), ("2027", "body"), ("27", "year"), ("mars", "year"), ("", "kind")],
)
def test_other_files_in_the_folder_are_no_parts(name: str, part: str) -> None:
    assert not is_part(name, part)


def test_titles_are_plain_words() -> None:
    assert [part_title(name) for name in ("mars", "solar_conjunction", "2027")] == [
        "Mars",
        "Solar conjunction",
        "2027",
    ]
