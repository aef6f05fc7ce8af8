"""Everything that stands above the horizon of a site at one moment, brightest first."""

from __future__ import annotations

from collections.abc import Sequence
from typing import Final

import numpy as np
import polars as pl

from wanderers.arrays import Floats, Ints
from wanderers.constants import J2000_JD, SECONDS_PER_DAY
from wanderers.ephemeris import constellations, kernels
from wanderers.ephemeris.appearance import appearance, lit_part
from wanderers.ephemeris.bodies import BODIES, Body
from wanderers.ephemeris.dates import datetime64_from_jd
from wanderers.ephemeris.sky import FIRST_STAR, SUN, Sky
from wanderers.ephemeris.stars import StarCatalogue, barycentric_directions, field_stars
from wanderers.ephemeris.store import TrackStore
from wanderers.ephemeris.timescales import jd_utc_from_tt
from wanderers.site import clock, columns, reasons
from wanderers.site.airmass import airmass, dimmed_magnitude
from wanderers.site.company import Targets, all_separations_deg, company
from wanderers.site.compass import POINTS, compass_point
from wanderers.site.evenings import evenings
from wanderers.site.ledger import passages
from wanderers.site.look import MOON, View, heaven, margins_of, view
from wanderers.site.places import Site
from wanderers.site.rules import Rules
from wanderers.site.topocentric import see_each
from wanderers.site.twilight import STEPS_A_DAY, SUN_RISE_DEG, find_crossings, rise_level
from wanderers.site.visibility import VERDICTS, verdicts
from wanderers.site.zones import zone_named

LISTED: Final = BODIES[:9]
"""Bodies looked for when none is asked for: Sun, Moon and the planets to Neptune."""
FIRST_MAGNITUDE: Final = 1.5
"""Stars down to this are listed: by usage the stars of first magnitude."""
BRIGHT_STAR_MAG: Final = 2.5
"""Stars down to this can be the nearest bright star. Common practice, no source."""
CLOSE_PAIR_DEG: Final = 0.05
"""Three arcminutes: what the bare eye splits. Common practice, no source."""


def everything_up(
    store: TrackStore, site: Site, jd: float, bodies: Sequence[Body] = LISTED, rules: Rules | None = None
) -> pl.DataFrame:
    """Return what is up at a moment; columns: ``columns.MOMENT_COLUMNS``.

    Args:
        store: the tracks.
        site: from where.
        jd: TT.
        bodies: which to look for; stars of first magnitude come besides.
        rules: what counts as visible; ``min_altitude_deg`` is how high a thing must stand to be up.

    Raises:
        SpanError: the moment, or the day around it, is outside the kernel.
        UnknownNameError: the site's zone does not exist.
    """
    rules = rules or Rules(min_altitude_deg=0.0)
    kernels.require_span(store.kernel, jd - 2.0, jd + 2.0)
    stars = bright_stars()
    sky = Sky(store.tracks(jd - 2.0, jd + 2.0), stars)
    targets = _targets([body for body in bodies if body in store.kernel.bodies], stars)
    table = _seen(sky, site, jd, targets, rules)
    times = {name: pl.lit(text[0], dtype=pl.String) for name, text in _sun_times(sky, site, jd).items()}
    table = table.with_columns(**times, sun_up=pl.col("sun_altitude_deg") > SUN_RISE_DEG)
    table = table.with_columns(
        verdict_reason=reasons.moment_reason(rules.criteria), caution=reasons.caution(Rules())
    )
    listed = (table["kind"] != "star") | (table["magnitude"] <= FIRST_MAGNITUDE)
    return columns.arranged(table.filter(listed).sort("dimmed_magnitude"), columns.MOMENT_COLUMNS)


def bright_stars() -> StarCatalogue:
    """Return the stars that can be somebody's nearest bright star, of close pairs the brighter alone."""
    stars = field_stars()
    bright = stars.take(stars.v_mag <= BRIGHT_STAR_MAG)
    place = barycentric_directions(bright, np.array([J2000_JD]))[..., 0].T
    close = np.tril(
        all_separations_deg(place) < CLOSE_PAIR_DEG, k=-1
    )  # the catalogue runs from bright to faint
    return bright.take(np.asarray(~np.any(close, axis=1)))


def _star_names(stars: StarCatalogue) -> list[str]:
    """Return proper names, else designations, else catalogue numbers."""
    names = zip(stars.labels, stars.bayer, strict=True)
    return [bayer if bayer and label.startswith("HIP ") else label for label, bayer in names]


def _targets(bodies: Sequence[Body], stars: StarCatalogue) -> Targets:
    numbers = [body.order for body in bodies] + [FIRST_STAR + index for index in range(len(stars))]
    kinds = [body.value if body.order <= MOON else "planet" for body in bodies] + ["star"] * len(stars)
    names = [body.value for body in bodies] + _star_names(stars)
    return Targets(np.array(numbers, dtype=np.int64), tuple(names), tuple(kinds))


def _seen(sky: Sky, site: Site, jd: float, targets: Targets, rules: Rules) -> pl.DataFrame:
    """Describe every target that is up."""
    instants = np.full(targets.number.size, jd)
    over = heaven(sky, site, instants)
    sight = see_each(sky, over.at, targets.number)
    is_moon = targets.number == MOON
    seen = view(over, sight, is_moon=is_moon)
    magnitude, constellation = _looks(sky, targets.number, instants)
    margins = margins_of(seen, magnitude, rules.criteria, site, is_moon=is_moon)
    floor = np.maximum(rules.min_altitude_deg, site.horizon.altitude_deg(seen.place.azimuth_deg))
    up = seen.altitude_deg > floor
    found = verdicts(margins.least, rules.criteria, over.sun_altitude_deg)
    verdict = np.where(targets.number == SUN, len(VERDICTS) - 1, found)
    utc, local = clock.utc_texts(instants), clock.local_texts(zone_named(site.zone), instants)
    table = pl.DataFrame(
        {
            "body": targets.name,
            "kind": targets.kind,
            "utc": utc,
            "local": local,
            "altitude_deg": seen.altitude_deg,
            "airless_altitude_deg": seen.place.airless_altitude_deg,
            "azimuth_deg": seen.place.azimuth_deg,
            "compass": pl.Series(POINTS).gather(pl.Series(compass_point(seen.place.azimuth_deg))),
            "airmass": pl.Series(airmass(seen.altitude_deg), nan_to_null=True),
            "magnitude": pl.Series(magnitude, nan_to_null=True),
            "dimmed_magnitude": _dimmed(seen, magnitude, rules, site),
            "elongation_deg": pl.Series(
                np.where(targets.number == SUN, np.nan, seen.lights.sun_separation_deg), nan_to_null=True
            ),
            "constellation": constellation,
            "sun_altitude_deg": over.sun_altitude_deg,
            "moon_altitude_deg": pl.Series(over.moon_altitude_deg, nan_to_null=True),
            "moon_illuminated": lit_part(over.moon_phase_angle_deg),
            "moon_separation_deg": pl.Series(seen.lights.moon_separation_deg, nan_to_null=True),
            "margin": margins.least,
            "margin_sky": margins.sky,
            "margin_arcus": margins.arcus,
            "margin_crescent": margins.crescent,
            "verdict": [VERDICTS[index].value for index in verdict.tolist()],
            "best_jd": instants,
        }
    )
    table = table.with_columns(site=pl.lit(site.name), zone=pl.lit(site.zone))
    return table.with_columns(**company(sight.direction[0], seen, targets, up)).filter(pl.Series(up))


def _dimmed(seen: View, magnitude: Floats, rules: Rules, site: Site) -> pl.Series:
    extinction = rules.criteria.extinction_at(site.elevation_m)
    return pl.Series(dimmed_magnitude(magnitude, seen.altitude_deg, extinction), nan_to_null=True)


def _looks(sky: Sky, number: Ints, jd: Floats) -> tuple[Floats, list[str]]:
    """Return magnitudes and constellations of bodies and stars."""
    stars = sky.catalogue
    is_body = number < FIRST_STAR
    looks = appearance(sky, number[is_body], jd[is_body])
    names = [constellations.ABBREVIATIONS[index] for index in looks.constellation.tolist()]
    if stars is None:
        return looks.magnitude, names
    index = number[~is_body] - FIRST_STAR
    magnitude = np.concatenate([looks.magnitude, stars.v_mag[index]])
    return magnitude, names + [stars.constellation[i] for i in index.tolist()]


def _sun_times(sky: Sky, site: Site, jd: float) -> dict[str, pl.Series]:
    """Return sunset and sunrise of the evening around the moment, by the local clock."""
    zone = zone_named(site.zone)
    jd_utc = jd_utc_from_tt(np.array([jd]))
    today = datetime64_from_jd(jd_utc + zone.offset_s(jd_utc) / SECONDS_PER_DAY).astype("datetime64[D]")[0]
    around = evenings(site, today - np.timedelta64(1, "D"), today + np.timedelta64(1, "D"))
    roots = find_crossings(sky, site, around.grid(STEPS_A_DAY), [rise_level(SUN)])
    index = int(np.clip(around.index_of(np.array([jd]))[0], 0, around.count - 1))
    found = {"sunset_clock": ~roots.rising, "sunrise_clock": roots.rising}
    return {
        name: clock.local_minutes(zone, passages(around, roots.jd[which]).first_jd[[index]])
        for name, which in found.items()
    }
