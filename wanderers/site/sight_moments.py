"""Moments around the night at which a planet near the Sun may come out, and by which criterion it does.

The first and the last sight of a planet are dates that haze and habit move by days. So every moment is judged
several times: by the site's own criteria, in clearer and in hazier air, with the Sun as high and as low as
observers report for that planet, by the arcus visionis alone, and for an eye that
must first find it.
"""

from __future__ import annotations

from dataclasses import dataclass, replace
from typing import Final

import numpy as np
import polars as pl

from wanderers.arrays import Bools, Floats, Ints
from wanderers.ephemeris.appearance import appearance
from wanderers.ephemeris.bodies import Body
from wanderers.ephemeris.sky import SUN, Sky
from wanderers.ephemeris.timescales import jd_utc_from_tt
from wanderers.site.airmass import HAYES_LATHAM, OZONE_MAG
from wanderers.site.evenings import Evenings
from wanderers.site.ledger import passages
from wanderers.site.lineup_nights import Aid, sun_is_west
from wanderers.site.look import Heaven, View, heaven, margins_of, view_body
from wanderers.site.rules import Rules
from wanderers.site.topocentric import horizontal
from wanderers.site.twilight import STEPS_A_DAY, SUN_RISE_DEG, Level, find_crossings, rise_level
from wanderers.site.visibility import Criteria, merit, verdicts
from wanderers.site.windows import Bounds, dark_stretches

RASTER_STEPS: Final = 288
"""Moments tried in twilight: every five minutes."""
NIGHT_STRIDE: Final = 4
"""In the depth of night every fourth of them."""
DEEP_DEG: Final = -20.0
"""Altitude of the Sun below which nothing changes with it."""
HAZE_MAG: Final = 0.1
"""By how much extinction strays from night to night, per air mass. Common practice, no source."""

SUN_AT_SIGHT_DEG: Final[dict[Body, tuple[float, float, float]]] = {
    Body.MERCURY: (-5.0, -6.0, -7.0),
    Body.VENUS: (0.0, -2.0, -4.0),
    Body.MARS: (-7.0, -8.5, -10.0),
    Body.JUPITER: (-4.0, -5.0, -6.0),
    Body.SATURN: (-7.0, -8.5, -10.0),
}
"""Altitude of the Sun at which each comes out for the bare eye: early, as a rule, late. Common practice, no
source. The model of the sky alone shows Jupiter to an eye that knows its place minutes after sunset."""
SUN_AT_FAINT_SIGHT_DEG: Final = (-12.0, -15.0, -18.0)
"""Likewise of what is fainter. Common practice, no source."""
SUN_FOR_OPTICS_DEG: Final = (SUN_RISE_DEG, SUN_RISE_DEG, SUN_RISE_DEG)
"""With optics nothing is looked for before the Sun is fully down."""

SOUGHT_MAG: Final = 0.0
"""What the eye that knows where to look loses against the threshold measured with trained observers: nothing.
A first sight is sought. With this, and 0.2 magnitudes lost per air mass, the arcus visionis of first and last
sights at Babylon comes out within 4 degrees of Schoch's and Ptolemy's for every planet; with the allowance
for whoever must first find the thing it is up to 5 degrees more, and the dates a week later."""

ARCUS_FAINTEST_MAG: Final = 2.5
"""The arcus visionis alone knows no faintest star: it was found with stars and planets down to about this."""

MANNERS: Final = ("likely", "clear", "hazy", "unsought", "high_sun", "low_sun", "arcus")
"""How a moment is judged: by the site's criteria for an eye that knows the place; the same in clearer and in
hazier air; for an eye that must first find it, as a table of nights judges; with the Sun as high and as low
as reported; by the arcus visionis alone."""


@dataclass(frozen=True, slots=True)
class Hours:
    """Hours of the clock at which people are up.

    Attributes:
        evening_until: hour, up to 24.
        morning_from: hour, from 0.
    """

    evening_until: float = 22.0
    morning_from: float = 5.0


@dataclass(frozen=True, slots=True)
class Air:
    """Extinction, magnitudes per air mass: on a usual, a clear and a hazy night."""

    usual: float
    clear: float
    hazy: float


@dataclass(frozen=True, slots=True)
class Nights:
    """Moments of many evenings with the Sun down, m in all, and when it sets and rises.

    Attributes:
        sky: the tracks.
        evenings: n of them.
        evening: which evening each moment belongs to, shape (m,).
        over: Sun and Moon then.
        early: whether the Sun is west of the meridian, shape (m,).
        hour: of the local clock, shape (m,).
        sunset_jd: TT, NaN where the Sun does not set, shape (n,).
        sunrise_jd: likewise.
    """

    sky: Sky
    evenings: Evenings
    evening: Ints
    over: Heaven
    early: Bools
    hour: Floats
    sunset_jd: Floats
    sunrise_jd: Floats


def air_at(elevation_m: float, criteria: Criteria) -> Air:
    """Return the air of a site; the clearest is never clearer than air without haze."""
    usual = criteria.extinction_at(elevation_m)
    (of_air, scale_m), _ = HAYES_LATHAM
    pure = OZONE_MAG + of_air * float(np.exp(-elevation_m / scale_m))
    return Air(usual, max(usual - HAZE_MAG, min(pure, usual)), usual + HAZE_MAG)


def sun_limits_deg(body: Body, aid: Aid) -> tuple[float, float, float]:
    """Return the Sun's highest altitude at which a body counts as seen: early, as a rule, late."""
    if aid is not Aid.NAKED_EYE:
        return SUN_FOR_OPTICS_DEG
    return SUN_AT_SIGHT_DEG.get(body, SUN_AT_FAINT_SIGHT_DEG)


def nights_of(sky: Sky, some: Evenings) -> Nights:
    """Return the moments of evenings with the Sun down: close in twilight, sparse in the depth of night."""
    levels = [rise_level(SUN), Level(SUN, DEEP_DEG)]
    roots = find_crossings(sky, some.site, some.grid(STEPS_A_DAY), levels)
    dark, deep = (
        dark_stretches(
            sky,
            Bounds(some, (), roots.jd[roots.function == index], ()),
            Rules(sun_below_deg=level.airless_altitude_deg),
        )
        for index, level in enumerate(levels)
    )
    raster = some.raster(RASTER_STEPS).ravel()
    evening = np.repeat(np.arange(some.count), RASTER_STEPS)
    keep = (dark.holding(evening, raster) >= 0) & (
        (deep.holding(evening, raster) < 0) | (np.arange(raster.size) % NIGHT_STRIDE == 0)
    )
    over = heaven(sky, some.site, raster[keep])
    jd_utc = jd_utc_from_tt(raster[keep])
    # A Julian date begins at noon: half a day on, its fraction is the hour of the day.
    hour = 24.0 * ((jd_utc + 0.5 + some.zone.offset_s(jd_utc) / 86_400.0) % 1.0)
    sets = roots.function == 0
    sunset, sunrise = (passages(some, roots.jd[sets & (roots.rising == up)]).first_jd for up in (False, True))
    return Nights(sky, some, evening[keep], over, sun_is_west(over), hour, sunset, sunrise)


def sight_moments(nights: Nights, body: Body, rules: Rules, aid: Aid, hours: Hours) -> pl.DataFrame:
    """Return one row a moment at which the body shows in some manner.

    Columns: ``evening`` (place in the evenings), ``before_midnight``, ``jd``, ``altitude_deg``,
    ``azimuth_deg``, ``azimuth_difference_deg`` (from the Sun), ``sun_altitude_deg``, ``arcus_deg`` (height
    above the Sun along the vertical), ``elongation_deg``, ``magnitude``, ``merit``, ``civil`` (people are
    up), ``high`` (above the least altitude of the rules), and whether it shows in each of MANNERS.
    """
    site, over = nights.evenings.site, nights.over
    seen = view_body(nights.sky, over, body.order)
    up = seen.altitude_deg > np.maximum(0.0, site.horizon.altitude_deg(seen.place.azimuth_deg))
    over, seen = over.chosen(up), seen.chosen(up)
    early, hour = nights.early[up], nights.hour[up]
    magnitude = _magnitude(nights, body, over.at.jd)
    sun = horizontal(over.at, over.sun.direction[0])
    shows, worth = _judged(seen, over, magnitude, body, rules.criteria, aid)
    away = (seen.place.azimuth_deg - sun.azimuth_deg + 180.0) % 360.0 - 180.0
    table = pl.DataFrame(
        {
            "evening": nights.evening[up],
            "before_midnight": early,
            "jd": over.at.jd,
            "altitude_deg": seen.altitude_deg,
            "azimuth_deg": seen.place.azimuth_deg,
            "azimuth_difference_deg": np.abs(away),
            "sun_altitude_deg": over.sun_altitude_deg,
            "arcus_deg": seen.place.airless_altitude_deg - over.sun_altitude_deg,
            "elongation_deg": seen.lights.sun_separation_deg,
            "magnitude": magnitude,
            "merit": worth,
            "civil": np.where(
                early, (hour >= 12.0) & (hour < hours.evening_until), hour >= hours.morning_from
            ),
            "high": seen.altitude_deg >= rules.min_altitude_deg,
            **shows,
        }
    )
    return table.filter(pl.any_horizontal(*MANNERS))


def _judged(
    seen: View, over: Heaven, magnitude: Floats, body: Body, criteria: Criteria, aid: Aid
) -> tuple[dict[str, Bools], Floats]:
    """Return in which manners each moment shows the body, and the merit of each by the site's criteria."""
    site, sun = over.at.site, over.sun_altitude_deg
    air = air_at(site.elevation_m, criteria)
    early_deg, usual_deg, late_deg = sun_limits_deg(body, aid)
    usual, clear, hazy = (
        margins_of(seen, magnitude, replace(criteria, extinction_mag=loss, allowance_mag=SOUGHT_MAG), site)
        for loss in (air.usual, air.clear, air.hazy)
    )
    unsought = np.minimum(usual.sky - (criteria.allowance_mag - SOUGHT_MAG), usual.arcus)

    def passed(margin: Floats, sun_limit_deg: float) -> Bools:
        fits = verdicts(margin, criteria, sun) <= aid.last_verdict
        return np.asarray(fits & (sun <= sun_limit_deg))

    shows = {
        "likely": passed(usual.least, usual_deg),
        "clear": passed(clear.least, usual_deg),
        "hazy": passed(hazy.least, usual_deg),
        "unsought": passed(unsought, usual_deg),
        "high_sun": passed(usual.least, early_deg),
        "low_sun": passed(usual.least, late_deg),
        "arcus": passed(usual.arcus, SUN_RISE_DEG) & (magnitude <= ARCUS_FAINTEST_MAG),
    }
    worth = merit(unsought, seen.altitude_deg, verdicts(unsought, criteria, sun), criteria)
    return shows, worth


def _magnitude(nights: Nights, body: Body, jd: Floats) -> Floats:
    """Return magnitudes by straight lines between those at noon, shape (k,)."""
    noons = nights.evenings.edges_jd
    looks = appearance(nights.sky, np.full(noons.size, body.order), noons)
    return np.asarray(np.interp(jd, noons, looks.magnitude))
