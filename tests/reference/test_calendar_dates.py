"""Published Julian Day numbers and pairs of dates; sources in data/calendar_dates.csv."""

from __future__ import annotations

import csv
from pathlib import Path

import pytest

from wanderers.ephemeris import dates

DATA = Path(__file__).parent / "data" / "calendar_dates.csv"
LINES = [line for line in DATA.read_text(encoding="utf-8").splitlines() if not line.startswith("#")]
ROWS = list(csv.DictReader(LINES))
PRINTERS = {"gregorian": dates.iso_strings, "julian": dates.julian_calendar_iso}


def name(row: dict[str, str]) -> str:
    return f"{row['calendar']}-{row['date']}"


@pytest.mark.parametrize("row", [row for row in ROWS if row["jd"]], ids=name)
def test_date_has_its_published_julian_day(row: dict[str, str]) -> None:
    # Printed to a tenth of a day; float64 holds it to 1e-9.
    jd = dates.parse_date(row["date"], calendar=row["calendar"])
    assert jd == pytest.approx(float(row["jd"]), abs=1e-9)


@pytest.mark.parametrize("row", [row for row in ROWS if row["jd"]], ids=name)
def test_julian_day_prints_as_its_published_date(row: dict[str, str]) -> None:
    clock = "" if "T" in row["date"] else "T00:00"
    assert str(PRINTERS[row["calendar"]](float(row["jd"]))) == f"{row['date']}{clock}:00.000"


@pytest.mark.parametrize("row", [row for row in ROWS if row["gregorian_date"]], ids=name)
def test_both_calendars_name_the_same_day(row: dict[str, str]) -> None:
    jd = dates.parse_date(row["date"], calendar=row["calendar"])
    assert jd == dates.parse_date(row["gregorian_date"])
    assert str(dates.iso_strings(jd))[:10] == row["gregorian_date"]
    assert str(dates.julian_calendar_iso(jd))[:10] == row["date"]
