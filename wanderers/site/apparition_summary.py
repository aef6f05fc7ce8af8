"""Apparitions as people read them: dates with their spread in days, and the rest in words."""

from __future__ import annotations

import polars as pl

from wanderers.site.apparitions import Habits
from wanderers.site.cycles_of_sight import BOTH, MORNING
from wanderers.site.places import Site
from wanderers.site.summary import NOTHING, WORDS, place_words, zone_words


def apparitions_summary(table: pl.DataFrame) -> pl.DataFrame:
    """Return a table of apparitions to print: one row each."""
    name = pl.col("body").str.to_titlecase()
    part = pl.when(pl.col("kind") != BOTH).then(pl.concat_str(pl.lit(" "), "kind")).otherwise(pl.lit(""))
    return table.select(
        pl.concat_str(name, part).alias("Apparition"),
        _range("first_sight").alias("First sight"),
        _range("last_sight").alias("Last sight"),
        _inside().alias("Inside"),
        _words().alias(WORDS),
    )


def apparitions_heading(table: pl.DataFrame, site: Site, habits: Habits, kernel: str) -> str:
    """Say what a table of apparitions is, and which of each body's is the easiest."""
    count = f"{table.height} apparition{'' if table.height == 1 else 's'}"
    hours = habits.hours
    air = "" if table.is_empty() else f" {table['extinction_mag'][0]:.2f} mag lost per air mass;"
    return (
        f"{count} from {place_words(site)}; local dates and times {zone_words(site)}; sights are likely "
        f"dates, with days to the earliest and the latest (? = perhaps never), for the air of the site:{air} "
        f"best until {_clock(hours.evening_until)}, in the morning from {_clock(hours.morning_from)}, above "
        f"{habits.rules.min_altitude_deg:g} degrees if it can; places from {kernel}.{_easiest(table)}"
    )


def _easiest(table: pl.DataFrame) -> str:
    ranked = table.filter((pl.col("ease_rank") == 1) & (pl.col("kind") != BOTH))
    said = [
        f"{row['body'].capitalize()} is easiest in the {row['kind']}, best {_moment(row['best_local'])}"
        for row in ranked.iter_rows(named=True)
    ]
    return f" {'; '.join(said)}." if said else ""


def _moment(local: str) -> str:
    return f"{local[:10]} {local[11:16]}"


def _clock(hour: float) -> str:
    minutes = round(hour * 60.0)
    return f"{minutes // 60:02d}:{minutes % 60:02d}"


def _range(name: str) -> pl.Expr:
    """Return a likely date and how many days the earliest and the latest lie away."""
    early, likely, late = (
        pl.col(f"{name}_{which}").str.to_date(strict=False) for which in ("earliest", "likely", "latest")
    )
    before = (likely - early).dt.total_days().cast(pl.String).fill_null("?")
    after = (late - likely).dt.total_days().cast(pl.String).fill_null("?")
    spread = pl.concat_str(
        pl.col(f"{name}_likely"), pl.lit(" −"), before, pl.lit("/+"), after, ignore_nulls=False
    )
    return pl.coalesce(spread, pl.lit(NOTHING))


def _inside() -> pl.Expr:
    """Return the day of greatest elongation with its angle, or of opposition."""
    angle = pl.col("event_elongation_deg").round(0).cast(pl.Int64)
    side = pl.when(pl.col("kind") == MORNING).then(pl.lit("° W")).otherwise(pl.lit("° E"))
    what = (
        pl.when(pl.col("event_kind") == "opposition")
        .then(pl.lit("opp."))
        .otherwise(pl.concat_str(angle, side))
    )
    return pl.concat_str(pl.col("event_utc").str.extract(r"^(.*)T"), pl.lit(" "), what).fill_null(NOTHING)


def _days(name: str) -> pl.Expr:
    return pl.concat_str(name, pl.when(pl.col(name) == 1).then(pl.lit(" day")).otherwise(pl.lit(" days")))


def _words() -> pl.Expr:
    best = pl.concat_str(
        pl.lit("best "),
        pl.col("best_local").str.extract(r"^(.*)T"),
        pl.lit(" "),
        pl.col("best_local").str.extract(r"T(\d\d:\d\d)"),
        pl.lit(", "),
        pl.col("best_altitude_deg").round(0).cast(pl.Int64),
        pl.lit(" degrees up in the "),
        "best_compass",
    )
    weeks = pl.when(pl.col("weeks_nights") > 0).then(
        pl.concat_str(pl.lit("good from "), "weeks_from", pl.lit(" to "), "weeks_to")
    )
    haze = pl.concat_str(
        pl.lit("in haze "),
        _days("first_sight_haze_days"),
        pl.lit(" later, gone "),
        _days("last_sight_haze_days"),
        pl.lit(" sooner"),
    )
    caution = pl.concat_str(pl.lit(". "), "caution")
    words = pl.concat_str([best, weeks, haze, pl.col("remark")], separator="; ", ignore_nulls=True)
    return pl.concat_str([words, caution], ignore_nulls=True)
