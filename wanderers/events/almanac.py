"""The event table: what was found, described and printed in the contract's columns."""

from __future__ import annotations

from collections.abc import Sequence
from typing import Final

import numpy as np
import polars as pl

from wanderers import schema
from wanderers.arrays import Floats
from wanderers.ephemeris import timescales
from wanderers.ephemeris.dates import datetime64_from_jd, iso_strings
from wanderers.ephemeris.store import TrackStore
from wanderers.events.catalogue import Found, Query, find_events
from wanderers.events.ledger import CONTACTS, ledgers

SIGNIFICANT_DELTA_T_UNCERTAINTY_S: Final = 1.0
"""Uncertainty of UTC from which it is printed beside it."""


def almanac(store: TrackStore, query: Query) -> pl.DataFrame:
    """Return the event table of a span, in order of time; columns: ``schema.EVENT_COLUMNS``."""
    return event_table(store, find_events(store, query))


def event_table(store: TrackStore, found: Sequence[Found]) -> pl.DataFrame:
    """Describe found events as a table."""
    if not found:
        return pl.DataFrame(schema=schema.EVENT_COLUMNS)
    return pl.concat([printed(entries) for entries in ledgers(store, found)], rechunk=False)


def printed(entries: pl.DataFrame) -> pl.DataFrame:
    """Return the rows of a ledger in the contract's columns."""
    timed = entries.with_columns(**_time_columns(entries))
    return timed.select(pl.col(name).cast(kind) for name, kind in schema.EVENT_COLUMNS.items())


def _time_columns(entries: pl.DataFrame) -> dict[str, pl.Series]:
    """Print instants in TT and UTC, and how sure UTC is where it is not."""
    jd = entries["jd_tt"].to_numpy()
    uncertainty = timescales.utc_uncertainty_s(jd)
    unsure = uncertainty > SIGNIFICANT_DELTA_T_UNCERTAINTY_S
    columns = {
        "tt": time_texts(jd, ""),
        "utc": time_texts(timescales.jd_utc_from_tt(jd), "Z"),
        "delta_t_s": pl.Series(np.where(unsure, timescales.delta_t_s(jd), np.nan), nan_to_null=True),
        "utc_uncertainty_s": pl.Series(np.where(unsure, uncertainty, np.nan), nan_to_null=True),
    }
    for number in CONTACTS:
        contact = entries[f"contact{number}_jd_tt"].to_numpy()
        columns[f"contact{number}_utc"] = time_texts(timescales.jd_utc_from_tt(contact), "Z")
    return columns


def time_texts(jd: Floats, suffix: str) -> pl.Series:
    """Print Julian dates as ISO 8601 to the millisecond, null where NaN."""
    instants = datetime64_from_jd(jd)
    if np.isnan(jd).all():
        return pl.repeat(None, jd.size, eager=True, dtype=pl.String)
    years = instants.astype("datetime64[Y]").astype(np.int64) + 1970
    if years.min() < 0 or years.max() > 9999:
        texts = pl.Series(iso_strings(jd, suffix=suffix).tolist(), dtype=pl.String)
        return texts.zip_with(~pl.Series(np.isnan(jd)), pl.Series([None], dtype=pl.String))
    return pl.Series(instants).dt.to_string("%Y-%m-%dT%H:%M:%S%.3f" + suffix)


def utc_texts(jd_tt: pl.Series) -> pl.Series:
    """Print TT Julian dates as UTC, null where null."""
    jd = jd_tt.cast(pl.Float64).fill_null(np.nan).to_numpy()
    return time_texts(timescales.jd_utc_from_tt(jd), "Z")
