"""The table of nights: for each evening and body when it is up, when it stands best, and what shows of it."""

from __future__ import annotations

from collections.abc import Sequence
from typing import Final

import numpy as np
import polars as pl

from wanderers.ephemeris import constellations, kernels
from wanderers.ephemeris.bodies import BODIES, Body
from wanderers.ephemeris.sky import Sky
from wanderers.ephemeris.store import TrackStore
from wanderers.site import clock, columns, reasons
from wanderers.site.compass import POINTS, compass_point
from wanderers.site.evenings import Evenings, evenings
from wanderers.site.ledger import ledger
from wanderers.site.places import Site
from wanderers.site.rules import Rules
from wanderers.site.visibility import VERDICTS

WATCHED: Final = BODIES[1:9]
"""Bodies listed when none is asked for: the Moon and the planets to Neptune."""
EVENINGS_AT_ONCE: Final = 400
WINDOW_TIMES: Final = ("window_start", "best", "window_end")


def nights(
    store: TrackStore,
    site: Site,
    span: tuple[np.datetime64, np.datetime64],
    bodies: Sequence[Body] = WATCHED,
    rules: Rules | None = None,
) -> pl.DataFrame:
    """Return one row an evening and body; columns: ``columns.NIGHT_COLUMNS``.

    Args:
        store: the tracks.
        site: from where.
        span: first local date, and the date after the last.
        bodies: which; rows of an evening stand in the bodies' written order.
        rules: what counts as watchable.

    Raises:
        SpanError: an evening outside the kernel.
        UnknownNameError: the site's zone does not exist.
    """
    whole = evenings(site, *span)
    kernels.require_span(store.kernel, float(whole.start_jd[0]), float(whole.end_jd[-1]))
    numbers = sorted({body.order for body in bodies if body in store.kernel.bodies})
    parts = [_night_table(store, some, numbers, rules or Rules()) for some in _cut(whole)]
    return pl.concat(parts) if parts else pl.DataFrame(schema=columns.NIGHT_COLUMNS)


def _cut(whole: Evenings) -> list[Evenings]:
    """Cut many evenings into handfuls, so that memory stays small."""
    return [
        whole.chosen(slice(first, first + EVENINGS_AT_ONCE))
        for first in range(0, whole.count, EVENINGS_AT_ONCE)
    ]


def _night_table(store: TrackStore, some: Evenings, bodies: Sequence[int], rules: Rules) -> pl.DataFrame:
    """Describe a handful of evenings."""
    sky = Sky(store.tracks(float(some.start_jd[0]), float(some.end_jd[-1])))
    numbers = ledger(sky, some, bodies, rules).sort("evening", "body_number")
    table = numbers.with_columns(**_words(some, numbers), **_times(some, numbers))
    table = table.with_columns(
        verdict_reason=reasons.verdict_reason(rules), remark=reasons.remark(), caution=reasons.caution(rules)
    )
    at_best = [name for name in AT_BEST if name in table.columns]
    table = table.with_columns(pl.when(reasons.WATCHABLE).then(pl.col(name)).alias(name) for name in at_best)
    return columns.arranged(table, columns.NIGHT_COLUMNS)


AT_BEST: Final = (
    *columns.PLACE_COLUMNS,
    "magnitude",
    "elongation_deg",
    "constellation",
    "hour_angle_deg",
    "parallactic_angle_deg",
)
"""Columns that mean nothing where there is no best moment."""


def _words(some: Evenings, numbers: pl.DataFrame) -> dict[str, pl.Series | pl.Expr]:
    """Return names in the place of numbers."""
    evening = numbers["evening"]
    azimuth = numbers["azimuth_deg"].to_numpy()
    return {
        "evening_date": pl.Series(np.datetime_as_string(some.days)).gather(evening),
        "site": pl.lit(some.site.name),
        "zone": pl.lit(some.zone.name),
        "compass": pl.Series(POINTS).gather(pl.Series(compass_point(azimuth))),
        "constellation": pl.Series(constellations.ABBREVIATIONS).gather(
            numbers["constellation_number"].cast(pl.Int64)
        ),
        "verdict": pl.Series([verdict.value for verdict in VERDICTS]).gather(
            numbers["verdict_number"].cast(pl.Int64)
        ),
    }


def _times(some: Evenings, numbers: pl.DataFrame) -> dict[str, pl.Series]:
    """Print instants in UTC and by the local clock."""
    jd = {
        name: numbers[f"{name}_jd"].to_numpy()
        for name in (*WINDOW_TIMES, *columns.SUN_TIMES, *columns.BODY_TIMES)
    }
    out = {f"{name}_utc": clock.utc_texts(values) for name, values in jd.items()}
    out |= {f"{name}_local": clock.local_texts(some.zone, values) for name, values in jd.items()}
    out["local_date"], out["local_time"] = clock.local_dates_and_times(some.zone, jd["best"])
    for name in ("sunset", "sunrise", "second_rise", "second_set"):
        out[f"{name}_clock"] = clock.local_minutes(some.zone, numbers[f"{name}_jd"].to_numpy())
    return out
