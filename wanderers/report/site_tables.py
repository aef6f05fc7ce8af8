"""Tables of events from a site for the terminal: the local instant, when to watch, the verdict."""

from __future__ import annotations

import datetime as dt
from typing import Any, Final

import polars as pl

from wanderers.events.kinds import Kind
from wanderers.report.names import label
from wanderers.site.compass import LETTERS, POINTS
from wanderers.site.hours import WEEKDAYS
from wanderers.site.places import Site
from wanderers.site.reasons import depth_words
from wanderers.site.rules import Rules
from wanderers.site.summary import place_words, zone_words
from wanderers.site.visibility import Verdict

NOTHING: Final = "–"
LETTERS_OF: Final = dict(zip(POINTS, LETTERS, strict=True))
OF_DISCS: Final = (Kind.OCCULTATION.value, Kind.TRANSIT.value)
ROUNDING: Final = dt.timedelta(seconds=30)


def site_heading(table: pl.DataFrame, site: Site, rules: Rules, what: str, left_out: str) -> str:
    """Say what a table of events from a site is.

    Args:
        table: the events.
        site: from where.
        rules: what counts as watchable.
        what: how many events, from which kernel.
        left_out: what limits took away; empty if nothing.
    """
    visible = table.filter(pl.col("verdict") != Verdict.NOT_VISIBLE.value).height
    sun = depth_words(rules.sun_below_deg)
    return (
        f"{what}; {visible} to be seen from {place_words(site)}; local times {zone_words(site)}; watched "
        f"above {rules.min_altitude_deg:g} degrees with the Sun {sun}. {left_out}"
    ).strip()


def local_instants(table: pl.DataFrame) -> list[str]:
    """Return the instants by the local clock, to the minute."""
    rows = table.select("local_date", "local_time").iter_rows()
    return [_minute(f"{date}T{time}") for date, time in rows]


def _minute(text: str) -> str:
    """Return a local date and time to the nearest minute; years that the calendar lacks are cut instead."""
    try:
        return f"{dt.datetime.fromisoformat(text) + ROUNDING:%Y-%m-%d %H:%M}"
    except ValueError:
        return text.replace("T", " ")[:-3]


def evenings(table: pl.DataFrame) -> list[str]:
    """Return the evenings on which to watch, with their weekdays, nothing where none is."""
    rows = table.select("evening_date", "best_local").iter_rows()
    return [NOTHING if best is None else _evening(date) for date, best in rows]


def _evening(date: str) -> str:
    try:
        day = dt.date.fromisoformat(date)
    except ValueError:
        return date
    return f"{WEEKDAYS[day.weekday()].capitalize()} {day:%m-%d}"


def windows(table: pl.DataFrame) -> list[str]:
    """Return from when to when to watch by the local clock."""
    rows = table.select("window_start_local", "window_end_local").iter_rows()
    return [NOTHING if start is None else f"{_clock(start)}–{_clock(end)}" for start, end in rows]


def best_times(table: pl.DataFrame) -> list[str]:
    """Return the best moments by the local clock."""
    return [NOTHING if text is None else _clock(text) for text in table["best_local"]]


def _clock(text: str) -> str:
    """Return the time of day of a local instant to the nearest minute."""
    clock = text.rpartition("T")[2][:8]
    seconds = int(clock[:2]) * 3_600 + int(clock[3:5]) * 60 + int(clock[6:8]) + 30
    return f"{seconds // 3_600 % 24:02d}:{seconds // 60 % 60:02d}"


def places(table: pl.DataFrame) -> list[str]:
    """Return altitude and direction at the best moment, as 27 SW."""
    rows = table.select("altitude_deg", "compass").iter_rows()
    return [
        NOTHING if altitude is None else f"{altitude:.0f} {LETTERS_OF[point]}" for altitude, point in rows
    ]


def verdict_words(row: dict[str, Any]) -> str:
    """Return what is seen of an event, or why nothing is, how two stand to each other, and the caution."""
    reason, circumstances = row["verdict_reason"], row["circumstances"] or ""
    parts = [reason]
    told = circumstances.startswith(reason)
    if not told and (row["kind"] in OF_DISCS or circumstances.startswith(("hidden", "partly"))):
        parts.insert(0, circumstances)
    if row["seen_placement"] is not None:
        apart = f"{row['seen_separation_deg']:.1f} degrees"
        parts.append(f"{label(row['other'])} {apart} {row['seen_placement']}")
    return "; ".join(filter(None, parts)) + _caution(row)


def verdicts_and_cautions(table: pl.DataFrame) -> list[str]:
    """Return the reasons of verdicts, and cautions."""
    return [f"{row['verdict_reason']}{_caution(row)}" for row in table.iter_rows(named=True)]


def _caution(row: dict[str, Any]) -> str:
    return f". {row['caution']}" if row["caution"] else ""
