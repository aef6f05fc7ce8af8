"""Definitions side by side in words: what explains why two almanacs print different days for one event."""

from __future__ import annotations

from dataclasses import dataclass
from typing import Any, Final

import polars as pl

from wanderers.report import facts, words

ROWS_AT_MOST: Final = 200
HOURS_PER_DAY: Final = 24.0
LONG_HOURS: Final = 48.0

DEFINITIONS: Final = (
    ("longitude", "In longitude"),
    ("right_ascension", "In right ascension"),
    ("j2000", "Against the stars"),
    ("least_separation", "Least separation"),
)
"""Columns of the table they come from, and their titles."""


@dataclass(frozen=True, slots=True)
class Instant:
    """When an event happens by one definition, and how much later than in longitude; empty where not."""

    title: str
    when: str
    later: str


@dataclass(frozen=True, slots=True)
class Compared:
    """One event by all definitions."""

    what: str
    instants: tuple[Instant, ...]


def compared(table: pl.DataFrame) -> tuple[Compared, ...]:
    """Return the first ROWS_AT_MOST rows of a table of definitions side by side, in words."""
    return tuple(
        Compared(_what(row), tuple(_instant(row, *definition) for definition in DEFINITIONS))
        for row in table.head(ROWS_AT_MOST).iter_rows(named=True)
    )


def _what(row: dict[str, Any]) -> str:
    if row["other"] is None:
        return f"{words.body_name(row)} turns {row['detail']}"
    return words.pair_names(row)


def _instant(row: dict[str, Any], definition: str, title: str) -> Instant:
    hours = row.get(f"{definition}_minus_longitude_hours")
    when = row[f"{definition}_utc"]
    return Instant(title, facts.minute(when), "" if hours is None or when is None else later(hours))


def later(hours: float) -> str:
    """Return a difference of time with its sign: hours, long ones in days."""
    size = f"{abs(hours):.1f} h" if abs(hours) < LONG_HOURS else f"{abs(hours) / HOURS_PER_DAY:.1f} d"
    return f"{'+' if hours >= 0.0 else facts.MINUS}{size}"
