"""Lineups as people read them, and why there are none."""

from __future__ import annotations

from dataclasses import replace
from typing import Final

import numpy as np
import polars as pl

from wanderers.ephemeris.bodies import BODIES
from wanderers.ephemeris.sky import Sky
from wanderers.ephemeris.store import TrackStore
from wanderers.site.compass import LETTERS, POINTS
from wanderers.site.earth import vantage
from wanderers.site.evenings import Evenings, evenings
from wanderers.site.lineup_nights import Aid, Part, Wanted
from wanderers.site.lineups import together
from wanderers.site.look import sun_altitude_deg
from wanderers.site.places import Site
from wanderers.site.reasons import depth_words
from wanderers.site.rules import Rules
from wanderers.site.summary import WORDS, place_words, zone_words
from wanderers.site.twilight import SUN_RISE_DEG

HALF_HOURS: Final = 48
AID_WORDS: Final = {
    Aid.NAKED_EYE: "each for the bare eye",
    Aid.BINOCULARS: "each with binoculars at most",
    Aid.ANY: "whether they show or not",
}
PART_WORDS: Final = {
    Part.ANY: "",
    Part.EVENING: ", before the middle of the night",
    Part.MORNING: ", after the middle of the night",
}


def lineups_summary(table: pl.DataFrame) -> pl.DataFrame:
    """Return a table of lineups to print: one line a run."""
    letters = dict(zip(POINTS, LETTERS, strict=True))
    return table.select(
        pl.col("first_evening").alias("From"),
        pl.col("last_evening").alias("To"),
        pl.col("evenings").alias("Nights"),
        pl.concat_str(pl.col("best_local").str.slice(0, 10), pl.lit(" "), _clock("best_local")).alias("Best"),
        pl.col("morning_or_evening").alias("Sky"),
        _whole("arc_deg").alias("Arc"),
        pl.concat_str(
            pl.col("from_compass").replace_strict(letters),
            pl.lit("–"),
            pl.col("to_compass").replace_strict(letters),
        ).alias("Across"),
        _whole("lowest_altitude_deg").alias("Low"),
        _words().alias(WORDS),
    )


def _words() -> pl.Expr:
    """Return who stands there, whether the run is cut, and the caution."""
    names = pl.col("bodies").str.replace_all("+", ", ", literal=True).str.to_titlecase()
    cut = (
        pl.when(pl.col("cut_at_start") & pl.col("cut_at_end"))
        .then(pl.lit("; fills the whole span"))
        .when("cut_at_start")
        .then(pl.lit("; may begin earlier"))
        .when("cut_at_end")
        .then(pl.lit("; may go on"))
    )
    return pl.concat_str([names, cut, pl.concat_str(pl.lit(". "), "caution")], ignore_nulls=True)


def _clock(name: str) -> pl.Expr:
    return pl.col(name).str.slice(11, 5)


def _whole(name: str) -> pl.Expr:
    return pl.col(name).round(0).cast(pl.Int64)


def lineups_heading(table: pl.DataFrame, site: Site, wanted: Wanted, kernel: str) -> str:
    """Say what a table of lineups is."""
    count = f"{table.height} run{'' if table.height == 1 else 's'} of evenings"
    who = ", ".join(BODIES[body].label for body in wanted.bodies)
    return (
        f"{count} at {place_words(site)}; local times {zone_words(site)}; "
        f"at least {wanted.at_least} of {who} at one moment above {wanted.rules.min_altitude_deg:g} degrees, "
        f"{AID_WORDS[wanted.aid]}, the Sun {depth_words(wanted.rules.sun_below_deg)}"
        f"{PART_WORDS[wanted.part]}; best is the evening with most of them, its lowest best placed "
        f"(a morning belongs to the evening before); Arc and Low in degrees; places from {kernel}"
    )


def why_none(store: TrackStore, site: Site, span: tuple[np.datetime64, np.datetime64], wanted: Wanted) -> str:
    """Say why a span holds no lineup: on how many evenings there would be one, were one limit wider.

    Args:
        store: the tracks.
        site: from where.
        span: first local date, and the date after the last.
        wanted: what was asked for, and is not there.
    """
    whole = evenings(site, *span)
    counts = {
        words: int(np.count_nonzero(together(store, whole, other).count))
        for words, other in _wider(wanted).items()
    }
    gains = ", ".join(f"{words}: {_evenings(count)}" for words, count in counts.items())
    said = f"no evening of {whole.count} has {wanted.at_least} of these bodies up at one moment"
    if max(counts.values()):
        return f"{said}; {gains}"
    depth = wanted.rules.sun_below_deg
    if _lowest_sun_deg(store, whole) >= depth:
        return f"{said}: the Sun is never {depth_words(depth)} in this span"
    return f"{said}, and no wider limit helps: they keep too far apart, or too near the Sun, all this time"


def _lowest_sun_deg(store: TrackStore, whole: Evenings) -> float:
    """Return how low the Sun sinks, tried every half hour."""
    sky = Sky(store.tracks(float(whole.start_jd[0]), float(whole.end_jd[-1])))
    jd = whole.raster(HALF_HOURS).ravel()
    return float(np.min(sun_altitude_deg(sky, vantage(sky, whole.site, jd))))


def _wider(wanted: Wanted) -> dict[str, Wanted]:
    """Return what would be asked for with one limit wider each, by what that is called."""
    rules = wanted.rules
    wider = {}
    if wanted.at_least > 2:
        wider[f"with {wanted.at_least - 1}"] = replace(wanted, at_least=wanted.at_least - 1)
    if rules.min_altitude_deg > 0.0:
        wider["down to the horizon"] = replace(wanted, rules=replace(rules, min_altitude_deg=0.0))
    if rules.sun_below_deg < SUN_RISE_DEG:
        wider["from sunset to sunrise"] = replace(wanted, rules=replace(rules, sun_below_deg=SUN_RISE_DEG))
    if wanted.aid is not Aid.ANY:
        wider["whether they show or not"] = replace(wanted, aid=Aid.ANY)
    if wanted.part is not Part.ANY:
        wider["at any time of night"] = replace(wanted, part=Part.ANY)
    everything = Wanted(
        wanted.bodies, wanted.at_least, Rules(0.0, max(rules.sun_below_deg, SUN_RISE_DEG)), Aid.ANY
    )
    return wider | {"with every limit but the number lifted": everything}


def _evenings(count: int) -> str:
    return "none" if count == 0 else f"{count} evening{'' if count == 1 else 's'}"
