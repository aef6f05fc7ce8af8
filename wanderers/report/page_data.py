"""The data that the page's own program works on: the whole event table, compact, and the calendar.

A hundred years hold some 190 000 events. So words that repeat are written once, instants as steps of
milliseconds, and figures to what they can bear; the files beside the page keep the full precision.
"""

from __future__ import annotations

import base64
import gzip
import re
from collections.abc import Iterable, Sequence
from typing import Any, Final

import numpy as np
import polars as pl

from wanderers import schema
from wanderers.constants import AU_KM
from wanderers.ephemeris import timescales
from wanderers.ephemeris.bodies import BODIES
from wanderers.ephemeris.dates import datetime64_from_jd
from wanderers.report import facts, words
from wanderers.report.names import CATALOGUE_NUMBER, label
from wanderers.site import columns
from wanderers.site.visibility import Verdict

DECIMALS: Final = {
    "longitude_deg": 6,
    "latitude_deg": 6,
    "ra_deg": 6,
    "dec_deg": 6,
    "separation_deg": 6,
    "elongation_deg": 5,
    "distance_au": 8,
    "magnitude": 3,
    "diameter_arcsec": 3,
    "delta_t_s": 1,
    "utc_uncertainty_s": 1,
}
"""Angles to 4 milliarcseconds, distances to 1.5 km."""

SEEN_DECIMALS: Final = 2
GAP: Final = "{}"
NUMBER_OF_ID: Final = re.compile(r"(?<=-[cm])[\d-]+$")
LAST_NUMBER: Final = re.compile(r"(?<![\w.])\d[\d.,]*(?=[^\d]*$)")

Column = list[Any] | dict[str, Any]
"""``[value, ...]``; ``{"words": [...], "at": [...]}``: each row's place among the distinct words;
``{"words": ..., "at": ..., "fill": [...]}``: the words have a gap, filled by the row's own text;
``{"start": ms, "steps": [...]}``: instants as milliseconds since 1970, each after the one before;
``{"all": value}``."""


def table_data(events: pl.DataFrame) -> dict[str, Any]:
    """Return the event table as the page's program reads it.

    Returns:
        ``columns``: those of the contract but the three instants; ``utc`` and ``lag``: UTC, and TT - UTC, in
        milliseconds; ``what`` and ``note``: what each event is called and what must be said beside it;
        ``constellations``: full names of those that occur.
    """
    rows = list(events.iter_rows(named=True))
    tt = _milliseconds(events["jd_tt"].to_numpy())
    utc = _milliseconds(timescales.jd_utc_from_tt(events["jd_tt"].to_numpy()))
    names = [*schema.EVENT_COLUMNS, *(name for name in SEEN if name in events.columns)]
    present = sorted(filter(None, events["constellation"].unique()))
    return {
        "names": names,
        "columns": {name: _column(events[name]) for name in names if name not in INSTANTS},
        "verdicts": [verdict.value for verdict in Verdict] if "verdict" in events.columns else [],
        "utc": steps(utc),
        "lag": worded((tt - utc).tolist()),
        "what": worded([words.summary(row) for row in rows], LAST_NUMBER),
        "note": worded([facts.note(row) for row in rows], LAST_NUMBER),
        "constellations": {name: facts.constellation(name) for name in present},
        "designations": {name: label(name) for name in _catalogue_numbers(events)},
        "count": events.height,
        "au_km": AU_KM,
        "bodies": [body.value for body in BODIES],
    }


SEEN: Final = (
    *(name for name in columns.SITE_COLUMNS if not name.endswith("_utc")),
    "seen_separation_deg",
    "seen_placement",
    "circumstances",
)
"""What the page holds of the site's columns; the rest stands in the files beside it."""

INSTANTS: Final = ("jd_tt", "tt", "utc")
NUMBERED: Final = ("event_id", "meeting_id")


def _catalogue_numbers(events: pl.DataFrame) -> list[str]:
    """Return the stars that have no proper name."""
    met = events["other"].drop_nulls().unique().sort()
    return met.filter(met.str.starts_with(CATALOGUE_NUMBER)).to_list()


def _column(values: pl.Series) -> Column:
    if values.dtype.is_float() and values.name in columns.EVENT_VIEW_COLUMNS:
        values = values.round(SEEN_DECIMALS)
    if values.name in DECIMALS and values.null_count() < values.len():
        return values.round(DECIMALS[values.name]).to_list()
    return worded(values.to_list(), NUMBER_OF_ID if values.name in NUMBERED else None)


def worded(values: Sequence[Any], gap: re.Pattern[str] | None = None) -> dict[str, Any]:
    """Return values as places among the distinct ones.

    Args:
        values: any.
        gap: what makes texts differ that are otherwise alike, such as a number.
    """
    if gap is None:
        forms, fill = list(values), None
    else:
        found = [None if value is None else gap.search(value) for value in values]
        forms = [(hit and _opened(hit)) or value for value, hit in zip(values, found, strict=True)]
        fill = ["" if hit is None else hit[0] for hit in found]
    places = {value: place for place, value in enumerate(dict.fromkeys(forms))}
    if len(places) == 1 and fill is None:
        return {"all": forms[0]}
    column = {"words": list(places), "at": [places[form] for form in forms]}
    return column if fill is None else column | {"fill": fill}


def _opened(hit: re.Match[str]) -> str:
    """Return a text with a gap where the match was."""
    return f"{hit.string[: hit.start()]}{GAP}{hit.string[hit.end() :]}"


def steps(milliseconds: Iterable[int]) -> dict[str, Any]:
    """Return rising instants as the first and the steps that follow."""
    instants = np.asarray(list(milliseconds), dtype=np.int64)
    return {"start": int(instants[0]) if instants.size else 0, "steps": np.diff(instants).tolist()}


def _milliseconds(jd: Any) -> Any:
    return datetime64_from_jd(jd).astype(np.int64)


def packed(content: bytes) -> str:
    """Return bytes as compressed text; the same bytes give the same text."""
    return base64.b64encode(gzip.compress(content, mtime=0)).decode("ascii")
