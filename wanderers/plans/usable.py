"""Every night of a campaign as numbers: whether it can be used, why not, when, and how good it is.

The recommended time of a night is the moment of its window nearest to culmination (least hour angle) at which
the Moon keeps its distance. So the field stands the same way up from night to night wherever the window
allows: hour angle, and with it the parallactic angle, changes as little as it can.
"""

from __future__ import annotations

from dataclasses import dataclass
from typing import Final

import numpy as np
import polars as pl

from wanderers.arrays import Bools, Floats
from wanderers.ephemeris import kernels
from wanderers.ephemeris.appearance import appearance, lit_part
from wanderers.ephemeris.bodies import Body
from wanderers.ephemeris.constellations import ABBREVIATIONS
from wanderers.ephemeris.sky import Sky
from wanderers.ephemeris.store import TrackStore
from wanderers.ephemeris.vectors import latitude_deg, longitude_deg
from wanderers.plans.path import Path
from wanderers.plans.rules import CampaignRules
from wanderers.site import clock, reasons
from wanderers.site.airmass import airmass, dimmed_magnitude
from wanderers.site.compass import POINTS, compass_point
from wanderers.site.evenings import Evenings, evenings
from wanderers.site.hours import WEEKDAY_NAMES, weekdays_of
from wanderers.site.ledger import ledger
from wanderers.site.look import Heaven, View, heaven, margins_of, view_body
from wanderers.site.places import Site
from wanderers.site.topocentric import parallactic_angle_deg
from wanderers.site.visibility import VERDICTS, Verdict, verdicts

SAMPLES: Final = 73
"""Moments tried in a window, apart from culmination: ten minutes apart in a night of twelve hours."""
INSET_DAYS: Final = 5.0 / reasons.MINUTES_PER_DAY
"""How far inside the window the recommended time stays: the first frame must not touch its limits."""
WEEKDAY_NAME: Final = pl.col("weekday").replace_strict(dict(enumerate(WEEKDAY_NAMES)), return_dtype=pl.String)
"""In a table of nights, whose weekdays are numbers."""
DARK_SUN_DEG: Final = -18.0
TWILIGHT_WORTH: Final = 0.6
MOONLIGHT_WORTH: Final = 0.6
"""What the score keeps at Sun -6 degrees, and under a full Moon beside the planet. No source: a choice."""


def all_nights(
    store: TrackStore, site: Site, path: Path, days: tuple[np.datetime64, np.datetime64], rules: CampaignRules
) -> pl.DataFrame:
    """Describe every night of a range of evening dates; one row an evening, usable or not.

    Args:
        store: the tracks.
        site: from where.
        path: the body's path, over all the nights.
        days: first evening date, and the date after the last.
        rules: what is asked of a night.

    Returns:
        numbers of :func:`wanderers.site.ledger.ledger` with the angles at ``recommended_jd``, and
        ``evening_date, weekday, usable, reason, recommended_jd, nominal_jd, path_deg, turned_deg, bend,
        moon_limit_deg`` (the distance to keep from the Moon) and ``score``; ``reason`` says why a night is
        not usable and is null where it is. A night without a window is described in its middle,
        ``nominal_jd``.

    Raises:
        SpanError: an evening outside the kernel.
        UnknownNameError: the site's zone does not exist.
    """
    some = evenings(site, *days)
    kernels.require_span(store.kernel, float(some.edges_jd[0]), float(some.edges_jd[-1]))
    sky = Sky(store.tracks(float(some.edges_jd[0]), float(some.edges_jd[-1])))
    numbers = ledger(sky, some, [path.body.order], rules.watch).sort("evening")
    jd = recommended_jd(sky, some, path.body, numbers, rules)
    nominal = np.where(np.isnan(jd), (some.edges_jd[:-1] + some.edges_jd[1:]) / 2.0, jd)
    look = look_at(sky, site, path.body, nominal, rules)
    table = numbers.with_columns(pl.Series(name, values, nan_to_null=True) for name, values in look.items())
    table = table.with_columns(
        recommended_jd=pl.Series(jd, nan_to_null=True),
        nominal_jd=nominal,
        path_deg=path.along_at(nominal),
        turned_deg=path.turned_at(nominal),
        bend=path.bend_at(nominal),
        evening_date=pl.Series(np.datetime_as_string(some.days)),
        weekday=pl.Series(weekdays_of(some.days)),
    )
    return _judged(_worded(some, table, rules), rules)


def recommended_jd(
    sky: Sky, some: Evenings, body: Body, numbers: pl.DataFrame, rules: CampaignRules
) -> Floats:
    """Return the recommended moment of each evening, TT, NaN without a window, shape (evenings,).

    Where the Moon is too near all through a window, the moment nearest to culmination.
    """
    start, end, culmination = (
        numbers[name].to_numpy().astype(np.float64)
        for name in ("window_start_jd", "window_end_jd", "culmination_jd")
    )
    out = np.full(some.count, np.nan)
    kept = np.flatnonzero(~np.isnan(start))
    if kept.size == 0:
        return out
    start, end, culmination = start[kept], end[kept], culmination[kept]
    inset = np.minimum(INSET_DAYS, (end - start) / 2.0)
    start, end = start + inset, end - inset
    tried = start[:, None] + (end - start)[:, None] * np.linspace(0.0, 1.0, SAMPLES)
    upright = np.clip(np.where(np.isnan(culmination), start, culmination), start, end)
    tried = np.sort(np.column_stack([tried, upright]), axis=1)
    over = heaven(sky, some.site, tried.ravel())
    seen = view_body(sky, over, body.order)
    off = np.abs(seen.place.hour_angle_deg).reshape(tried.shape)
    spoilt = moon_too_near(over, seen, rules).reshape(tried.shape)
    best = np.argmin(off + 360.0 * spoilt, axis=1)
    out[kept] = tried[np.arange(kept.size), best]
    return out


def moon_too_near(over: Heaven, seen: View, rules: CampaignRules) -> Bools:
    """Return where the Moon is up and nearer than its light allows, shape (n,)."""
    limit = rules.moon_limit_deg(lit_part(over.moon_phase_angle_deg))
    return np.asarray((over.moon_altitude_deg > 0.0) & (seen.lights.moon_separation_deg < limit))


def look_at(sky: Sky, site: Site, body: Body, jd: Floats, rules: CampaignRules) -> dict[str, Floats]:
    """Describe a body at instants, shape (n,): where it stands, how it looks, what lights the sky."""
    over = heaven(sky, site, jd)
    seen = view_body(sky, over, body.order)
    target = np.full(jd.size, body.order)
    looks = appearance(sky, target, jd)
    fixed = sky.apparent(target, jd)
    margins = margins_of(seen, looks.magnitude, rules.criteria, site)
    extinction = rules.criteria.extinction_at(site.elevation_m)
    lit = lit_part(over.moon_phase_angle_deg)
    return {
        "altitude_deg": seen.altitude_deg,
        "airless_altitude_deg": seen.place.airless_altitude_deg,
        "azimuth_deg": seen.place.azimuth_deg,
        "hour_angle_deg": seen.place.hour_angle_deg,
        "parallactic_angle_deg": parallactic_angle_deg(seen.place, site.latitude_deg),
        "airmass": airmass(seen.altitude_deg),
        "sun_altitude_deg": over.sun_altitude_deg,
        "magnitude": looks.magnitude,
        "dimmed_magnitude": dimmed_magnitude(looks.magnitude, seen.altitude_deg, extinction),
        "diameter_arcsec": looks.diameter_arcsec,
        "illuminated_fraction": looks.illuminated_fraction,
        "elongation_deg": looks.elongation_deg,
        "constellation_number": looks.constellation.astype(np.float64),
        "ra_j2000_deg": longitude_deg(fixed)[0],
        "dec_j2000_deg": latitude_deg(fixed)[0],
        "moon_illuminated": lit,
        "moon_limit_deg": rules.moon_limit_deg(lit),
        "moon_separation_deg": seen.lights.moon_separation_deg,
        "moon_altitude_deg": over.moon_altitude_deg,
        "margin_sky": margins.sky,
        "margin_arcus": margins.arcus,
        "margin_crescent": margins.crescent,
        "margin": margins.least,
        "verdict_number": verdicts(margins.least, rules.criteria, over.sun_altitude_deg).astype(np.float64),
    }


def score(table: pl.DataFrame) -> Floats:
    """Return how good nights are, 0 to 100, shape (n,): height times darkness times the Moon's absence.

    Height counts as one over the airmass; twilight takes up to 40 per cent between Sun -18 and -6 degrees;
    the Moon, while up, up to 40 per cent by its light and its nearness. A choice, no source.
    """
    mass, sun, lit, apart, moon = (
        table[name].to_numpy().astype(np.float64)
        for name in (
            "airmass",
            "sun_altitude_deg",
            "moon_illuminated",
            "moon_separation_deg",
            "moon_altitude_deg",
        )
    )
    glow = np.clip((sun - DARK_SUN_DEG) / 12.0, 0.0, 1.0)
    moonlight = np.where(moon > 0.0, lit * (1.0 - np.clip(apart, 0.0, 180.0) / 180.0), 0.0)
    worth = (1.0 - (1.0 - TWILIGHT_WORTH) * glow) * (1.0 - (1.0 - MOONLIGHT_WORTH) * np.nan_to_num(moonlight))
    return np.asarray(np.nan_to_num(100.0 * worth / np.maximum(mass, 1.0)))


def _worded(some: Evenings, table: pl.DataFrame, rules: CampaignRules) -> pl.DataFrame:
    """Add names in the place of numbers, the eye's verdict, and the caution due near the Sun."""
    azimuth = table["azimuth_deg"].to_numpy()
    verdict_names = pl.Series([verdict.value for verdict in VERDICTS])
    words: dict[str, pl.Series] = {
        "compass": pl.Series(POINTS).gather(pl.Series(compass_point(azimuth))),
        "constellation": pl.Series(ABBREVIATIONS).gather(table["constellation_number"].cast(pl.Int64)),
        "verdict": verdict_names.gather(table["verdict_number"].cast(pl.Int64)),
    }
    for name in ("sunset", "sunrise", "second_rise", "second_set"):
        words[f"{name}_clock"] = clock.local_minutes(
            some.zone, table[f"{name}_jd"].to_numpy().astype(np.float64)
        )
    table = table.with_columns(**words)
    return table.with_columns(
        verdict_reason=reasons.verdict_reason(rules.watch), caution=reasons.caution(rules.watch)
    )


def _judged(table: pl.DataFrame, rules: CampaignRules) -> pl.DataFrame:
    """Add why nights are not usable, and how good they are."""
    table = table.with_columns(
        reason=pl.concat_str([test.expression() for test in _tests(rules)], separator="; ", ignore_nulls=True)
    )
    table = table.with_columns(pl.when(pl.col("reason") != "").then(pl.col("reason")).alias("reason"))
    return table.with_columns(
        usable=pl.col("reason").is_null(),
        score=pl.when(pl.col("recommended_jd").is_not_null()).then(pl.Series(score(table))),
    )


@dataclass(frozen=True, slots=True)
class _Test:
    """Something that makes a night unusable, and the words for it."""

    fails: pl.Expr
    words: pl.Expr

    def expression(self) -> pl.Expr:
        return pl.when(self.fails).then(self.words)


def _tests(rules: CampaignRules) -> list[_Test]:
    """Return what is asked of a night, in the order in which reasons are given."""
    watchable = pl.col("recommended_jd").is_not_null()
    minutes = (pl.col("window_end_jd") - pl.col("window_start_jd")) * reasons.MINUTES_PER_DAY
    limit = pl.col("moon_limit_deg")
    moon = (pl.col("moon_altitude_deg") > 0.0) & (pl.col("moon_separation_deg") < limit)
    moon_words = pl.concat_str(
        pl.lit("the Moon, "),
        (pl.col("moon_illuminated") * 100.0).round().cast(pl.Int64),
        pl.lit(" % lit, stands "),
        pl.col("moon_separation_deg").round().cast(pl.Int64),
        pl.lit(" degrees away, nearer than "),
        limit.round().cast(pl.Int64),
    )
    short_words = pl.concat_str(
        pl.lit("the window lasts only "), minutes.floor().cast(pl.Int64), pl.lit(" minutes")
    )
    tests = [
        _Test(~watchable, pl.col("verdict_reason")),
        _Test(watchable & (minutes < rules.min_window_minutes), short_words),
        _Test(watchable & moon.fill_null(value=False), moon_words),
    ]
    if rules.in_twilight:
        lost = watchable & (pl.col("verdict") == Verdict.NOT_VISIBLE.value)
        tests.append(_Test(lost, reasons.obstacle()))
    if rules.weekdays_asked:
        wanted = ", ".join(WEEKDAY_NAMES[day] for day in rules.weekdays_asked)
        other = ~pl.col("weekday").is_in(rules.weekdays_asked)
        tests.append(_Test(other, pl.concat_str(pl.lit("a "), WEEKDAY_NAME, pl.lit(f", not {wanted}"))))
    return tests
