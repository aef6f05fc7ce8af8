"""The data that the page's own program works on: the whole event table, compact, and the calendar."""

from __future__ import annotations

import base64
import gzip
from typing import Any

import polars as pl

from wanderers import schema
from wanderers.report import facts, words

Column = list[Any] | dict[str, list[Any]]
"""A column as it stands in the page: plain values, or the distinct words and each row's place among them."""


def table_data(events: pl.DataFrame) -> dict[str, Any]:
    """Return the event table as the page's program reads it.

    Returns:
        ``columns``: the contract's columns in full precision, so that a selection saved from the page holds
        the same figures as the files; ``words``: what each event is called and what must be said beside it;
        ``constellations``: the full names of those that occur.
    """
    rows = list(events.iter_rows(named=True))
    said = pl.DataFrame(
        {"what": [words.summary(row) for row in rows], "note": [facts.note(row) for row in rows]},
        schema={"what": pl.String, "note": pl.String},
    )
    present = sorted(filter(None, events["constellation"].unique()))
    return {
        "columns": {name: column(events[name]) for name in schema.EVENT_COLUMNS},
        "words": {name: column(said[name]) for name in said.columns},
        "constellations": {name: facts.constellation(name) for name in present},
    }


def column(values: pl.Series) -> Column:
    """Return a column in the shorter of its two forms; words that repeat are written once."""
    if values.dtype != pl.String:
        return values.fill_nan(None).to_list()
    distinct = values.unique(maintain_order=True)
    if distinct.len() * 2 > values.len():
        return values.to_list()
    places = dict(zip(distinct.to_list(), range(distinct.len()), strict=True))
    return {"words": distinct.to_list(), "at": [places[value] for value in values.to_list()]}


def packed(content: bytes) -> str:
    """Return bytes as compressed text; the same bytes give the same text."""
    return base64.b64encode(gzip.compress(content, mtime=0)).decode("ascii")
