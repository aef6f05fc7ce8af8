"""Verdicts in plain words, remarks on rising and setting, and cautions.

Expressions over the ledger of :mod:`wanderers.site.nights`: times are Julian dates there, null where absent.
"""

from __future__ import annotations

from typing import Final

import polars as pl

from wanderers.ephemeris.bodies import Body
from wanderers.site.rules import Rules
from wanderers.site.twilight import SUN_RISE_DEG
from wanderers.site.visibility import Criteria, Verdict

NEAR_SUN_DEG: Final = 20.0
"""Nearer than this to the Sun optics need a caution. Common practice, no source."""
LOW_DEG: Final = 20.0
HIGH_DEG: Final = 45.0
DARK_SUN_DEG: Final = -15.0
"""Below this the last glow hardly counts. Common practice, no source."""
BESIDE_MOON_DEG: Final = 7.0
"""A binocular field: nearer the Moon's glare is what hides faint things. Common practice, no source."""
SOON_MINUTES: Final = 180
MINUTES_PER_DAY: Final = 1_440.0

SUN_REASON: Final = "the Sun itself: only through a filter made for it"
IS_SUN: Final = pl.col("body") == Body.SUN.value
WATCHABLE: Final = pl.col("best_jd").is_not_null()
SET_AFTER_SUN: Final = ((pl.col("set_jd") - pl.col("sunset_jd")) * MINUTES_PER_DAY).round()
RISE_BEFORE_SUN: Final = ((pl.col("sunrise_jd") - pl.col("rise_jd")) * MINUTES_PER_DAY).round()


def verdict_reason(rules: Rules) -> pl.Expr:
    """Return why the verdict is what it is."""
    return (
        pl.when(IS_SUN)
        .then(pl.lit(SUN_REASON))
        .when(WATCHABLE)
        .then(watchable_reason(rules.criteria))
        .otherwise(_unwatchable_reason(rules))
    )


def moment_reason(criteria: Criteria) -> pl.Expr:
    """Return the reason for what is looked at at a given moment."""
    return pl.when(IS_SUN).then(pl.lit(SUN_REASON)).otherwise(watchable_reason(criteria))


def watchable_reason(criteria: Criteria) -> pl.Expr:
    """Return the reason where there is a best moment: how well it shows, where, in what light."""
    seen = pl.concat_str(
        ease(criteria), pl.lit(", "), height(), pl.lit(" in the "), "compass", pl.lit(", "), light()
    )
    aided = pl.concat_str(obstacle(), pl.lit(", "), height(), pl.lit(" in the "), "compass")
    return (
        pl.when(pl.col("verdict") == Verdict.NAKED_EYE.value)
        .then(seen)
        .when(pl.col("verdict") == Verdict.BINOCULARS.value)
        .then(pl.concat_str(pl.lit("needs binoculars: "), aided))
        .when(pl.col("verdict") == Verdict.TELESCOPE.value)
        .then(pl.concat_str(pl.lit("needs a telescope: "), aided))
        .otherwise(obstacle())
    )


def ease(criteria: Criteria) -> pl.Expr:
    """Return how easily the bare eye finds it."""
    return (
        pl.when(pl.col("margin") >= criteria.easy_mag)
        .then(pl.lit("easy to see"))
        .when(pl.col("margin") >= criteria.easy_mag / 2.0)
        .then(pl.lit("can be seen"))
        .otherwise(pl.lit("only just to be seen"))
    )


def height() -> pl.Expr:
    """Return how high it stands, in a word."""
    return (
        pl.when(pl.col("altitude_deg") < LOW_DEG)
        .then(pl.lit("low"))
        .when(pl.col("altitude_deg") < HIGH_DEG)
        .then(pl.lit("halfway up"))
        .otherwise(pl.lit("high"))
    )


def light() -> pl.Expr:
    """Return what lights the sky."""
    moonlit = (
        (pl.col("moon_altitude_deg") > 0.0) & (pl.col("moon_illuminated") > 0.5) & (pl.col("body") != "moon")
    )
    beside = (
        (pl.col("moon_altitude_deg") > 0.0)
        & (pl.col("moon_separation_deg") < BESIDE_MOON_DEG)
        & (pl.col("verdict") != Verdict.NAKED_EYE.value)
    )
    return (
        pl.when(pl.col("sun_altitude_deg") > SUN_RISE_DEG)
        .then(pl.lit("by day"))
        .when(beside)
        .then(pl.lit("beside the Moon"))
        .when(pl.col("sun_altitude_deg") > DARK_SUN_DEG)
        .then(pl.lit("in twilight"))
        .when(moonlit)
        .then(pl.lit("by moonlight"))
        .otherwise(pl.lit("in a dark sky"))
    )


def obstacle() -> pl.Expr:
    """Return what keeps the bare eye from it: the criterion with the least margin."""
    faint = pl.concat_str(
        pl.lit("too faint at magnitude "), pl.col("dimmed_magnitude").round(1), pl.lit(" "), light()
    )
    return (
        pl.when(pl.col("magnitude").is_null())
        .then(pl.lit("its magnitude is not known so near the Sun"))
        .when(
            (pl.col("margin_crescent") <= pl.col("margin_sky"))
            & (pl.col("margin_crescent") <= pl.col("margin_arcus"))
        )
        .then(pl.lit("the crescent is too thin"))
        .when(pl.col("margin_arcus") < pl.col("margin_sky"))
        .then(pl.lit("lost in the glow around the Sun"))
        .otherwise(faint)
    )


def _unwatchable_reason(rules: Rules) -> pl.Expr:
    """Return why there is no window."""
    depth = depth_words(rules.sun_below_deg)
    highest = pl.col("highest_deg")
    degrees = highest.floor().cast(pl.Int64)
    unit = pl.when(degrees == 1).then(pl.lit(" degree")).otherwise(pl.lit(" degrees"))
    reaches = pl.concat_str(
        [
            pl.lit("no higher than "),
            degrees,
            unit,
            pl.lit(" while the sky is dark enough"),
            _beside_the_sun(),
        ],
        ignore_nulls=True,
    )
    return (
        pl.when(highest.is_null())
        .then(pl.lit(f"the Sun is never {depth}"))
        .when(highest >= rules.min_altitude_deg)
        .then(pl.lit("hidden by the site's horizon while the sky is dark enough"))
        .when(highest >= 1.0)
        .then(reaches)
        .otherwise(_below_horizon())
    )


def _below_horizon() -> pl.Expr:
    """Return why it is not up while the sky is dark."""
    neither = pl.col("rise_jd").is_null() & pl.col("set_jd").is_null() & ~pl.col("up")
    return (
        pl.when(neither)
        .then(pl.lit("does not rise"))
        .when(SET_AFTER_SUN.is_between(0, SOON_MINUTES))
        .then(_beside("sets", SET_AFTER_SUN, "after"))
        .when(RISE_BEFORE_SUN.is_between(0, SOON_MINUTES))
        .then(_beside("rises", RISE_BEFORE_SUN, "before"))
        .when((SET_AFTER_SUN < 0) | (RISE_BEFORE_SUN < 0))
        .then(pl.lit("up only by day"))
        .otherwise(pl.lit("below the horizon while the sky is dark enough"))
    )


def _beside_the_sun() -> pl.Expr:
    """Return how long after or before the Sun it sets or rises, where that is soon; else null."""
    after = SET_AFTER_SUN.is_between(0, SOON_MINUTES)
    before = RISE_BEFORE_SUN.is_between(0, SOON_MINUTES)
    return (
        pl.when(after)
        .then(pl.concat_str(pl.lit("; "), _beside("sets", SET_AFTER_SUN, "after")))
        .when(before)
        .then(pl.concat_str(pl.lit("; "), _beside("rises", RISE_BEFORE_SUN, "before")))
    )


def _beside(verb: str, minutes: pl.Expr, side: str) -> pl.Expr:
    """Return how long before or after the Sun something sets or rises."""
    apart = pl.concat_str(pl.lit(f"{verb} "), _minutes(minutes), pl.lit(f" {side} the Sun"))
    return pl.when(minutes == 0).then(pl.lit(f"{verb} with the Sun")).otherwise(apart)


def _minutes(count: pl.Expr) -> pl.Expr:
    number = count.cast(pl.Int64)
    return pl.concat_str(number, pl.when(number == 1).then(pl.lit(" minute")).otherwise(pl.lit(" minutes")))


def depth_words(sun_below_deg: float) -> str:
    """Return an altitude of the Sun in words."""
    if sun_below_deg <= 0.0:
        return (
            f"{-sun_below_deg:g} degrees or more below the horizon" if sun_below_deg else "below the horizon"
        )
    return f"less than {sun_below_deg:g} degrees high"


def remark() -> pl.Expr:
    """Return what is out of the ordinary about rising and setting, and about the night; null if nothing."""
    rise, sets, up = pl.col("rise_jd").is_null(), pl.col("set_jd").is_null(), pl.col("up")
    rising = (
        pl.when(rise & sets & up)
        .then(pl.lit("does not set"))
        .when(rise & sets)
        .then(pl.lit("does not rise"))
        .when(rise)
        .then(pl.lit("does not rise between these noons"))
        .when(sets)
        .then(pl.lit("does not set between these noons"))
    )
    parts = [
        rising,
        _again("rise", "rises"),
        _again("set", "sets"),
        pl.when(pl.col("windows") > 1).then(pl.lit("a second window this night")),
        pl.when(~IS_SUN & pl.col("sunset_jd").is_null() & pl.col("sunrise_jd").is_null()).then(
            pl.when("sun_up").then(pl.lit("the Sun does not set")).otherwise(pl.lit("the Sun does not rise"))
        ),
    ]
    joined = pl.concat_str(parts, separator="; ", ignore_nulls=True)
    return pl.when(joined != "").then(joined)


def _again(name: str, verb: str) -> pl.Expr:
    second = pl.col(f"second_{name}_clock")
    return pl.when(second.is_not_null()).then(pl.concat_str(pl.lit(f"{verb} twice, again at "), second))


def caution(rules: Rules) -> pl.Expr:
    """Return the caution about optics where one is due: near the Sun, or with the Sun up; else null."""
    window_by_day = WATCHABLE & pl.lit(rules.sun_below_deg > SUN_RISE_DEG)
    cause = (
        pl.when(pl.col("sun_altitude_deg") > SUN_RISE_DEG)
        .then(pl.lit("The Sun is up"))
        .when(window_by_day)
        .then(pl.lit("The Sun is up in part of this window"))
        .when(pl.col("elongation_deg") < NEAR_SUN_DEG)
        .then(pl.lit("Within 20 degrees of the Sun"))
    )
    rest = pl.concat_str(cause, pl.lit(": no binoculars or telescope, "), when_safe())
    return pl.when(IS_SUN).then(pl.lit(SUN_CAUTION)).otherwise(rest)


SUN_CAUTION: Final = (
    "Never look at the Sun without a filter made for it over the front of every instrument; "
    "local rules come first"
)


def when_safe() -> pl.Expr:
    """Return between which local times the Sun is out of the way."""
    after = pl.concat_str(pl.lit("after sunset at "), "sunset_clock")
    before = pl.concat_str(pl.lit("before sunrise at "), "sunrise_clock")
    until = pl.concat_str(
        pl.lit("except "), pl.concat_str([after, before], separator=" and ", ignore_nulls=True)
    )
    return (
        pl.when(pl.col("sunset_clock").is_not_null() | pl.col("sunrise_clock").is_not_null())
        .then(until)
        .when("sun_up")
        .then(pl.lit("for the Sun does not set"))
        .otherwise(pl.lit("as long as any of the Sun shows"))
    )
