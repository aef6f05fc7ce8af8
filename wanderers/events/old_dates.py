"""Dates before the Gregorian reform, in the calendar that sources of the time used."""

from __future__ import annotations

from typing import Final

import numpy as np
import polars as pl

from wanderers.ephemeris.dates import julian_calendar_iso, parse_date

REFORM_JD: Final = 2_299_160.5
"""1582 October 15, Gregorian, the day after 1582 October 4, Julian."""

REFORM_TEXT: Final = "1582-10-15"


def has_old_dates(table: pl.DataFrame) -> bool:
    """Return whether any date of a table lies before the reform."""
    return any(bool(_is_old(table[name]).any()) for name in date_columns(table))


def with_julian_dates(table: pl.DataFrame) -> pl.DataFrame:
    """Return a table whose dates before 1582-10-15 are printed in the Julian calendar."""
    return table.with_columns(_julian(table[name]) for name in date_columns(table))


def date_columns(table: pl.DataFrame) -> list[str]:
    """Return the columns that hold printed instants."""
    return [name for name in table.columns if name in ("tt", "utc") or name.endswith("_utc")]


def _is_old(texts: pl.Series) -> pl.Series:
    """Return where ISO dates lie before the reform; years of five digits carry a sign and are later."""
    signed = texts.str.starts_with("-")
    plain = ~texts.str.starts_with("+") & (texts < REFORM_TEXT)
    return (signed | plain).fill_null(False)


def _julian(texts: pl.Series) -> pl.Series:
    old = _is_old(texts)
    if not old.any():
        return texts
    printed = [_converted(text) for text in texts.filter(old)]
    out = texts.to_list()
    for place, text in zip(np.flatnonzero(old.to_numpy()).tolist(), printed, strict=True):
        out[place] = text
    return pl.Series(texts.name, out, dtype=pl.String)


def _converted(text: str) -> str:
    suffix = "Z" if text.endswith("Z") else ""
    return str(julian_calendar_iso(parse_date(text), suffix=suffix))
