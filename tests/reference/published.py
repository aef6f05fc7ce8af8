"""Reads the published check values beside this file.

Each file of ``data`` opens with comment lines (source, settings, date taken), then holds plain CSV.
"""

from __future__ import annotations

import csv
from dataclasses import dataclass
from datetime import UTC, datetime
from functools import cache
from pathlib import Path
from typing import Any

from skyfield.api import load

DATA = Path(__file__).parent / "data"
J2000 = datetime(2000, 1, 1, 12, tzinfo=UTC)
J2000_JD = 2_451_545.0
AU_KM = 149_597_870.7  # IAU 2012 Resolution B2

TABLE_UNITS_PER_UNIT = {
    ("deg", "deg"): 1.0,
    ("deg", "arcmin"): 1.0 / 60.0,
    ("deg", "arcsec"): 1.0 / 3600.0,
    ("au", "au"): 1.0,
    ("au", "km"): 1.0 / AU_KM,
    ("au", "million km"): 1e6 / AU_KM,
    ("arcsec", "arcsec"): 1.0,
}


def rows(name: str) -> list[dict[str, str]]:
    """Return the rows of ``data/<name>.csv``, column name to text; an empty cell is an empty text."""
    lines = (DATA / f"{name}.csv").read_text(encoding="utf-8").splitlines()
    return list(csv.DictReader(line for line in lines if line and not line.startswith("#")))


@cache
def _time_scale() -> Any:
    return load.timescale(builtin=True)


def jd_of_date(text: str) -> float:
    """Return the Julian date of an ISO 8601 date and time in the Gregorian calendar, in its own scale."""
    since = datetime.fromisoformat(text).replace(tzinfo=UTC) - J2000
    return J2000_JD + since.total_seconds() / 86_400.0


def jd_tt_of_date(text: str, scale: str) -> float:
    """Return the TT Julian date of a date in TT or UT (UT1; UTC is never 0.9 s from it)."""
    jd = jd_of_date(text)
    return float(_time_scale().ut1_jd(jd).tt) if scale == "UT" else jd


@dataclass(frozen=True, slots=True)
class EventFigure:
    """One published figure of one event, in the units of the event table.

    Attributes:
        id: stable name of the row.
        group: figures of one event, or the three parts of a triple conjunction.
        kind: kind of event; ``detail``, ``other`` and ``frame`` are not compared where empty.
        jd_tt: an instant at or near the event.
        column: column of the event table.
        value: TT Julian date for ``jd_tt``, UT Julian date for a contact, else in the column's unit.
        tolerance: days for a date, else in the column's unit.
        reason: why the tolerance is what it is.
    """

    id: str
    group: str
    kind: str
    detail: str
    body: str
    other: str
    frame: str
    jd_tt: float
    column: str
    value: float
    tolerance: float
    reason: str

    def __str__(self) -> str:
        """Return what a report of tests calls it."""
        return f"{self.id} {self.kind} {self.body}"


def event_figures(name: str) -> list[EventFigure]:
    """Return the figures of events in ``data/<name>.csv``."""
    return [_event_figure(row) for row in rows(name)]


def _event_figure(row: dict[str, str]) -> EventFigure:
    named = {
        name: row[name] for name in ("id", "group", "kind", "detail", "body", "other", "frame", "column")
    }
    jd_tt = jd_tt_of_date(row["near"] or row["published"], row["scale"])
    if row["unit"] == "date":
        value = jd_tt if row["column"] == "jd_tt" else jd_of_date(row["published"])
        tolerance = float(row["tolerance"]) / 1440.0
    else:
        factor = TABLE_UNITS_PER_UNIT[row["column"].rsplit("_", 1)[1], row["unit"]]
        value, tolerance = float(row["published"]) * factor, float(row["tolerance"]) * factor
    return EventFigure(**named, jd_tt=jd_tt, value=value, tolerance=tolerance, reason=row["tolerance_reason"])
