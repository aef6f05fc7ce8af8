"""Tables of a site as people read them: few columns, local minutes, whole degrees, plain words.

Full precision stays in the tables themselves; see :mod:`wanderers.site.columns`.
"""

from __future__ import annotations

from typing import Final

import numpy as np
import polars as pl

from wanderers.site.clock import local_texts
from wanderers.site.compass import LETTERS, POINTS
from wanderers.site.places import Site
from wanderers.site.reasons import depth_words
from wanderers.site.rules import Rules
from wanderers.site.zones import zone_data_version, zone_named

NOTHING: Final = "–"
WORDS: Final = "What"
"""Title of the column that the printer may wrap."""
NIGHT_ITSELF: Final = {"Body": "Night", "Watch": "", "Best": "", "Alt": "", "Toward": "", "Mag": ""}


def nights_summary(table: pl.DataFrame) -> pl.DataFrame:
    """Return a table of nights to print: a line for the night itself, then one a body."""
    bodies = table.select(
        pl.col("evening_date").alias("Evening"),
        pl.col("body").str.to_titlecase().alias("Body"),
        _span("window_start_local", "window_end_local").alias("Watch"),
        _minute("best_local").fill_null(NOTHING).alias("Best"),
        *_place(),
        _words().alias(WORDS),
    )
    skies = table.unique("evening_date", keep="first", maintain_order=True).select(
        pl.col("evening_date").alias("Evening"),
        *(pl.lit(text).alias(name) for name, text in NIGHT_ITSELF.items()),
        _night_words().alias(WORDS),
    )
    return pl.concat([skies, bodies]).sort("Evening", maintain_order=True)


def moment_summary(table: pl.DataFrame) -> pl.DataFrame:
    """Return a table of everything up at a moment to print."""
    near = pl.when(pl.col("neighbours").is_not_null()).then(
        pl.concat_str(pl.lit("; near: "), pl.col("neighbours"))
    )
    star = pl.when(pl.col("neighbours").is_null() & pl.col("nearest_star").is_not_null()).then(
        pl.concat_str(
            pl.lit("; nearest bright star "),
            "nearest_star",
            pl.lit(" "),
            pl.col("nearest_star_separation_deg").round(0).cast(pl.Int64),
            pl.lit(" degrees"),
        )
    )
    name = pl.when(pl.col("kind") == "star").then("body").otherwise(pl.col("body").str.to_titlecase())
    words = pl.concat_str([_words(), near, star], ignore_nulls=True)
    return table.select(name.alias("Up"), *_place(), pl.col("constellation").alias("In"), words.alias(WORDS))


def nights_heading(table: pl.DataFrame, site: Site, rules: Rules, kernel: str, *, by_sun: bool) -> str:
    """Say what a table of nights is."""
    count = table["evening_date"].n_unique()
    noon = "; evenings counted from the mean Sun's noon, for this clock is far off the Sun" if by_sun else ""
    return (
        f"{count} evening{'' if count == 1 else 's'} at {place_words(site)}; "
        f"local times {zone_words(site)}{noon}\n"
        f"Watched above {rules.min_altitude_deg:g} degrees with the Sun {depth_words(rules.sun_below_deg)}; "
        f"{rules.criteria.extinction_at(site.elevation_m):.2f} mag lost per air mass; places from {kernel}"
    )


def moment_heading(table: pl.DataFrame, local: str, site: Site, kernel: str) -> str:
    """Say what a table of a moment is."""
    when = f"{local[:10]} {local[11:16]} (UTC{local[-6:]})"
    return f"Up at {place_words(site)} on {when}, {zone_words(site)}: {table.height}; places from {kernel}"


def local_moment(site: Site, jd_tt: float) -> str:
    """Return an instant by the site's clock, ISO 8601 with its offset."""
    return str(local_texts(zone_named(site.zone), np.array([jd_tt]))[0])


def place_words(site: Site) -> str:
    """Return a site's name and place."""
    north, east = ("N" if site.latitude_deg >= 0.0 else "S"), ("E" if site.longitude_deg >= 0.0 else "W")
    latitude, longitude = f"{abs(site.latitude_deg):.2f} {north}", f"{abs(site.longitude_deg):.2f} {east}"
    return f"{site.name} ({latitude}, {longitude}, {site.elevation_m:.0f} m)"


def zone_words(site: Site) -> str:
    """Return a site's zone and how old its rules are."""
    return f"{site.zone} (zone data {zone_data_version()})"


def _place() -> list[pl.Expr]:
    compass = pl.col("compass").replace_strict(dict(zip(POINTS, LETTERS, strict=True)), default=None)
    tenths = (pl.col("magnitude") * 10.0).round(0).cast(pl.Int64)  # whole numbers know no minus zero
    sign = pl.when(tenths < 0).then(pl.lit("−")).otherwise(pl.lit(""))
    magnitude = pl.concat_str(sign, tenths.abs() // 10, pl.lit("."), tenths.abs() % 10)
    return [
        pl.col("altitude_deg").round(0).cast(pl.Int64).cast(pl.String).fill_null(NOTHING).alias("Alt"),
        compass.fill_null(NOTHING).alias("Toward"),
        magnitude.fill_null(NOTHING).alias("Mag"),
    ]


def _words() -> pl.Expr:
    return pl.concat_str(
        [pl.col("verdict_reason"), pl.concat_str(pl.lit(". "), "caution")], ignore_nulls=True
    )


def _night_words() -> pl.Expr:
    """Return the night itself in words: sunset, darkness, sunrise."""
    times = [
        pl.concat_str(pl.lit(text), _minute(f"{name}_local"))
        for name, text in (
            ("sunset", "Sun sets "),
            ("astronomical_dusk", "dark from "),
            ("astronomical_dawn", "dawn "),
            ("sunrise", "Sun rises "),
        )
    ]
    sun = pl.col("remark").str.extract("(the Sun does not (?:set|rise))", 1)
    return pl.concat_str([*times, sun], separator="; ", ignore_nulls=True)


def _span(start: str, end: str) -> pl.Expr:
    return pl.concat_str(_minute(start), pl.lit("–"), _minute(end)).fill_null(NOTHING)


def _minute(name: str) -> pl.Expr:
    """Return the local time of day of an ISO text, to the nearest minute."""
    clock = pl.col(name).str.extract(r"T(\d\d:\d\d:\d\d)", 1).str.to_time("%H:%M:%S")
    minutes = (
        clock.dt.hour().cast(pl.Int64) * 3_600
        + clock.dt.minute().cast(pl.Int64) * 60
        + clock.dt.second()
        + 30
    ) // 60
    hour, minute = minutes // 60 % 24, minutes % 60
    return pl.concat_str(hour.cast(pl.String).str.zfill(2), pl.lit(":"), minute.cast(pl.String).str.zfill(2))


def counted(number: float, noun: str) -> str:
    """Return a whole number with its noun: ``1 day``, ``81 days``."""
    said = f"{number:.0f}"
    return f"{said} {noun}" if said == "1" else f"{said} {noun}s"
