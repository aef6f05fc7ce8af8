"""The table of found events: the columns of the event table that a search of times needs."""

from __future__ import annotations

from typing import Any

import numpy as np
import polars as pl
from numpy.typing import NDArray

Floats = NDArray[np.float64]

SCHEMA = pl.Schema(
    {
        "kind": pl.String,
        "detail": pl.String,
        "body": pl.String,
        "other": pl.String,
        "frame": pl.String,
        "jd_tt": pl.Float64,
        "separation_deg": pl.Float64,  # between body and other; from the Sun for greatest_elongation
        "distance_au": pl.Float64,  # geometric, from the Earth
        "heliocentric_au": pl.Float64,  # geometric, from the Sun
        "tolerance_s": pl.Float64,  # where the definition gives one of its own
        "constellation": pl.String,  # entered
        "contact_1_jd_tt": pl.Float64,
        "contact_2_jd_tt": pl.Float64,
        "contact_3_jd_tt": pl.Float64,
        "contact_4_jd_tt": pl.Float64,
    }
)


def events(kind: str, jd_tt: Floats, **columns: Any) -> pl.DataFrame:
    """Make a table of events of one kind.

    Args:
        kind: of all rows.
        jd_tt: shape (k,), one row each.
        **columns: any other column of ``SCHEMA``: a value for all rows or shape (k,); else null.
    """
    given = {"kind": kind, "jd_tt": jd_tt} | columns
    columns = {name: _column(given.get(name), len(jd_tt)) for name in SCHEMA}
    return pl.DataFrame(columns, schema=SCHEMA)


def _column(value: Any, count: int) -> list[Any]:
    """Repeat a single value, or take a row of them as it is."""
    if value is None or isinstance(value, str | float):
        return [value] * count
    return list(np.asarray(value).tolist())
