"""Julian dates of old events, against dates printed by sources of the time."""

from __future__ import annotations

import polars as pl

from wanderers.events.old_dates import has_old_dates, with_julian_dates


def test_the_great_conjunction_of_1563_falls_on_the_julian_date_of_old_tables() -> None:
    # Old tables print 1563 August 25; Gregorian September 4. Common practice of historical catalogues.
    table = pl.DataFrame({"utc": ["1563-09-04T12:00:00.000Z"], "kind": ["conjunction"]})
    assert with_julian_dates(table)["utc"].to_list() == ["1563-08-25T12:00:00.000Z"]


def test_the_reform_itself_is_the_border() -> None:
    # 1582 October 4 Julian was followed by October 15 Gregorian: papal bull Inter gravissimas, 1582.
    table = pl.DataFrame({"tt": ["1582-10-14T00:00:00.000", "1582-10-15T00:00:00.000", None]})
    assert with_julian_dates(table)["tt"].to_list() == [
        "1582-10-04T00:00:00.000",
        "1582-10-15T00:00:00.000",
        None,
    ]


def test_tables_of_later_years_are_left_alone() -> None:
    table = pl.DataFrame({"utc": ["2027-01-10T12:59:03.120Z", "+12027-01-01T00:00:00.000Z"]})
    assert not has_old_dates(table)
    assert with_julian_dates(table).equals(table)


def test_years_before_the_common_era_are_old() -> None:
    table = pl.DataFrame({"utc": ["-0500-01-01T00:00:00.000Z"]})
    assert has_old_dates(table)
