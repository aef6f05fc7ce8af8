"""Matches an event table against the search of this package: what is missing, extra or late.

Pure functions of two tables with the event columns (``kind, detail, body, other, frame, jd_tt``);
an empty string and a null mean the same.
"""

from __future__ import annotations

from dataclasses import dataclass

import polars as pl

SECONDS_PER_DAY = 86400.0

# Worst time differences that the contract of the event table allows, seconds.
TOLERANCE_S = 1.0
PAIR_TOLERANCE_S = 2.0  # conjunctions and appulses
SLOW_PAIR_TOLERANCE_S = 5.0  # both bodies Jupiter or beyond
GIANT_STATION_TOLERANCE_S = 2.0  # Jupiter, Saturn
SLOW_STATION_TOLERANCE_S = 5.0  # Uranus, Neptune, Pluto

SLOW = ("jupiter", "saturn", "uranus", "neptune", "pluto")
SUN_KINDS = ("opposition", "solar_conjunction", "quadrature", "greatest_elongation", "transit", "moon_phase")
# Whether a conjunction belongs to an appulse is not searched here.
FREE_DETAIL = ("appulse",)

MATCH_WINDOW_DAYS = 1.0  # events of one key farther apart are different events
EDGE_SECONDS = 10.0  # an event this near the end of a span may fall on either side of it
KEY = ("kind", "detail", "body", "other", "frame", "constellation")


@dataclass(frozen=True, slots=True)
class Comparison:
    """The outcome of a match.

    Attributes:
        missing: rows of the search that the table lacks.
        extra: rows of the table that the search does not know.
        matched: pairs, with ``difference_s`` (table minus search) and ``tolerance_s``.
        worst: per kind, frame and group: ``count``, ``worst_s``, ``worst_of_tolerance`` (1 = limit).
    """

    missing: pl.DataFrame
    extra: pl.DataFrame
    matched: pl.DataFrame
    worst: pl.DataFrame

    @property
    def late(self) -> pl.DataFrame:
        """Give the matched rows whose times differ by more than is allowed."""
        return self.matched.filter(pl.col("difference_s").abs() > pl.col("tolerance_s"))

    @property
    def complete(self) -> bool:
        """Tell whether nothing is missing, extra or late."""
        return self.missing.is_empty() and self.extra.is_empty() and self.late.is_empty()


def match(
    ours: pl.DataFrame,
    oracle: pl.DataFrame,
    *,
    span: tuple[float, float] | None = None,
    window_days: float = MATCH_WINDOW_DAYS,
) -> Comparison:
    """Match two event tables one to one: equal keys, each the other's nearest in time.

    Args:
        ours: the table under test.
        oracle: the table of the search.
        span: compare only this half-open span of ``jd_tt``, forgiving events at its very ends.
        window_days: longest difference in time of two rows that may still be one event.
    """
    left, right = (_keyed(table, span) for table in (oracle, ours))
    forward = _nearest(left, right, window_days)
    backward = _nearest(right, left, window_days)
    mutual = forward.join(backward, left_on=("row", "row_near"), right_on=("row_near", "row"), how="semi")
    matched = mutual.with_columns(
        ((pl.col("jd_tt_near") - pl.col("jd_tt")) * SECONDS_PER_DAY).alias("difference_s"), tolerance_s()
    ).rename({"jd_tt_near": "jd_tt_ours"})
    return Comparison(
        missing=_without_edges(left.join(matched, on="row", how="anti"), span),
        extra=_without_edges(right.join(matched, left_on="row", right_on="row_near", how="anti"), span),
        matched=matched.drop("row", "row_near"),
        worst=_worst(matched),
    )


def tolerance_s() -> pl.Expr:
    """Give the allowed time difference of each row, seconds; the row's own where it has one."""
    is_slow = pl.col("body").is_in(SLOW)
    both_slow = is_slow & pl.col("other").is_in(SLOW)
    by_kind = (
        pl.when(pl.col("kind").is_in(("conjunction", "appulse")))
        .then(pl.when(both_slow).then(SLOW_PAIR_TOLERANCE_S).otherwise(PAIR_TOLERANCE_S))
        .when((pl.col("kind") == "station") & pl.col("body").is_in(SLOW[:2]))
        .then(GIANT_STATION_TOLERANCE_S)
        .when((pl.col("kind") == "station") & pl.col("body").is_in(SLOW[2:]))
        .then(SLOW_STATION_TOLERANCE_S)
        .otherwise(TOLERANCE_S)
    )
    return pl.coalesce("tolerance_s", by_kind).alias("tolerance_s")


def _keyed(table: pl.DataFrame, span: tuple[float, float] | None) -> pl.DataFrame:
    """Bring a table to the key columns, times and own tolerances, with row numbers.

    Next to the Sun the key is the other body alone, whichever column it stands in, and a gathering is
    told by its bodies in ``detail``. The constellation counts where one is entered.
    """
    present = [name for name in (*KEY, "tolerance_s") if name in table.columns]
    text = {name: pl.lit(None, pl.String).alias(name) for name in KEY if name not in present}
    number = {name: pl.lit(None, pl.Float64).alias(name) for name in ("tolerance_s",) if name not in present}
    rows = table.with_columns(*text.values(), *number.values()).select(*KEY, "tolerance_s", "jd_tt")
    rows = rows.with_columns(pl.col(name).cast(pl.String).fill_null("") for name in KEY)
    if span is not None:
        rows = rows.filter((pl.col("jd_tt") >= span[0]) & (pl.col("jd_tt") < span[1]))
    of_sun, gathered = pl.col("kind").is_in(SUN_KINDS), pl.col("kind") == "gathering"
    planet = pl.when(pl.col("body").is_in(("sun", ""))).then("other").otherwise("body")
    entering = pl.col("kind") == "constellation_entry"
    rows = rows.with_columns(
        pl.when(gathered).then(pl.lit("")).when(of_sun).then(planet).otherwise("body").alias("body"),
        pl.when(gathered | of_sun).then(pl.lit("")).otherwise("other").alias("other"),
        pl.when(pl.col("kind").is_in(FREE_DETAIL)).then(pl.lit("")).otherwise("detail").alias("detail"),
        pl.when(entering).then("constellation").otherwise(pl.lit("")).alias("constellation"),
    )
    return rows.sort("jd_tt").with_row_index("row")


def _nearest(left: pl.DataFrame, right: pl.DataFrame, window_days: float) -> pl.DataFrame:
    """Join to each left row the right row of the same key that is nearest in time."""
    near = right.select(*KEY, "jd_tt", pl.col("jd_tt").alias("jd_tt_near"), pl.col("row").alias("row_near"))
    return left.join_asof(
        near, on="jd_tt", by=list(KEY), strategy="nearest", tolerance=window_days, check_sortedness=False
    ).drop_nulls("row_near")


def _without_edges(rows: pl.DataFrame, span: tuple[float, float] | None) -> pl.DataFrame:
    """Drop unmatched rows that lie at the very ends of the span, and the row numbers."""
    if span is not None:
        edge = EDGE_SECONDS / SECONDS_PER_DAY
        rows = rows.filter(pl.col("jd_tt").is_between(span[0] + edge, span[1] - edge))
    return rows.drop("row")


def _worst(matched: pl.DataFrame) -> pl.DataFrame:
    """Give the worst time differences per kind, frame and group of bodies with one tolerance."""
    slow_pair = pl.col("body").is_in(SLOW) & pl.col("other").is_in(SLOW)
    pair = pl.when(slow_pair).then(pl.lit("both Jupiter or beyond")).otherwise(pl.lit("other pairs"))
    group = pl.when(pl.col("other") != "").then(pair).otherwise("body").alias("group")
    size = pl.col("difference_s").abs()
    return (
        matched.group_by("kind", "frame", group)
        .agg(
            pl.len().alias("count"),
            size.max().alias("worst_s"),
            (size / pl.col("tolerance_s")).max().alias("worst_of_tolerance"),
        )
        .sort("kind", "frame", "group")
    )
