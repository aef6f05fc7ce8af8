"""Numbers of many nights at once: one row an evening and body, times as TT Julian dates, else null."""

from __future__ import annotations

from collections.abc import Sequence
from dataclasses import dataclass
from typing import Final

import numpy as np
import polars as pl

from wanderers.arrays import Floats
from wanderers.ephemeris.appearance import appearance, lit_part
from wanderers.ephemeris.bodies import BODIES
from wanderers.ephemeris.sky import SUN, Sky
from wanderers.events.search import Roots
from wanderers.site import windows
from wanderers.site.airmass import airmass, dimmed_magnitude
from wanderers.site.evenings import Evenings
from wanderers.site.look import MOON, Heaven, heaven, margins_of, view_body
from wanderers.site.rules import Rules
from wanderers.site.topocentric import parallactic_angle_deg
from wanderers.site.twilight import (
    ASTRONOMICAL_DEG,
    CIVIL_DEG,
    NAUTICAL_DEG,
    Level,
    find_crossings,
    find_culminations,
    rise_level,
    steps_for,
)
from wanderers.site.visibility import VERDICTS, verdicts

TWILIGHTS: Final = (
    (rise_level(SUN), "sunset", "sunrise"),
    (Level(SUN, CIVIL_DEG), "civil_dusk", "civil_dawn"),
    (Level(SUN, NAUTICAL_DEG), "nautical_dusk", "nautical_dawn"),
    (Level(SUN, ASTRONOMICAL_DEG), "astronomical_dusk", "astronomical_dawn"),
)
"""Levels of the Sun, and what it is called when it sinks and when it climbs through each."""
MEAN_MOON_RADIUS_DEG: Final = 0.259


@dataclass(frozen=True, slots=True)
class Passages:
    """First and second instant of something in each evening, TT, NaN where absent, shape (evenings,)."""

    first_jd: Floats
    second_jd: Floats


def passages(some: Evenings, jd: Floats) -> Passages:
    """Sort rising instants, shape (n,), into evenings."""
    evening = some.index_of(jd)
    inside = evening >= 0
    evening, jd = evening[inside], jd[inside]
    order = np.arange(evening.size) - np.searchsorted(evening, evening)
    out = np.full((2, some.count), np.nan)
    kept = order < 2
    out[order[kept], evening[kept]] = jd[kept]
    return Passages(out[0], out[1])


def ledger(sky: Sky, some: Evenings, bodies: Sequence[int], rules: Rules) -> pl.DataFrame:
    """Return everything that is known as numbers, one row an evening and body."""
    levels = [level for level, _, _ in TWILIGHTS] + [rise_level(body) for body in bodies]
    first_bound = len(levels)
    levels += windows.bounding_levels(some.site, bodies, rules)
    grid = some.grid(steps_for(levels))
    crossings = find_crossings(sky, some.site, grid, levels)
    culminations = find_culminations(sky, some.site, grid, bodies)
    bounds = windows.bounds_of(some, bodies, crossings, first_bound)
    tried = windows.dark_moments(sky, some, windows.dark_stretches(sky, bounds, rules))
    at_start = heaven(sky, some.site, some.start_jd)
    sun = _sun_columns(some, crossings) | {"sun_up": _is_up(sky, at_start, SUN)}
    parts = []
    for index, body in enumerate(bodies):
        watchable = windows.watchable_stretches(sky, bounds, index, rules)
        best = windows.best_windows(sky, some, body, watchable, tried, rules)
        culminates = culminations.jd[culminations.function == index]
        own = sun | _body_times(some, crossings, len(TWILIGHTS) + index, culminates)
        highest = windows.highest_deg(sky, some, body, tried, np.isnan(best.best_jd))
        own |= {"highest_deg": highest, "up": _is_up(sky, at_start, body)}
        own |= _window_columns(best) | _look(sky, some, body, best.best_jd, rules)
        parts.append(_frame(own, body))
    return pl.concat(parts)


def _frame(columns_of_body: dict[str, Floats], body: int) -> pl.DataFrame:
    table = pl.DataFrame(
        {name: pl.Series(values, nan_to_null=True) for name, values in columns_of_body.items()}
    )
    return table.with_columns(
        body_number=pl.lit(body),
        body=pl.lit(BODIES[body].value),
        evening=pl.int_range(pl.len()),
        up=pl.col("up") > 0.5,
        sun_up=pl.col("sun_up") > 0.5,
    )


def _sun_columns(some: Evenings, crossings: Roots) -> dict[str, Floats]:
    """Return when the Sun sinks and climbs through its levels."""
    out = {}
    for index, (_, sinking, climbing) in enumerate(TWILIGHTS):
        own = crossings.function == index
        out[f"{sinking}_jd"] = passages(some, crossings.jd[own & ~crossings.rising]).first_jd
        out[f"{climbing}_jd"] = passages(some, crossings.jd[own & crossings.rising]).first_jd
    return out


def _body_times(
    some: Evenings, crossings: Roots, function: int, culminations_jd: Floats
) -> dict[str, Floats]:
    """Return when a body rises, culminates and sets, the second times included."""
    own = crossings.function == function
    out = {"culmination_jd": passages(some, culminations_jd).first_jd}
    for name, which in (("rise", own & crossings.rising), ("set", own & ~crossings.rising)):
        found = passages(some, crossings.jd[which])
        out |= {f"{name}_jd": found.first_jd, f"second_{name}_jd": found.second_jd}
    return out


def _window_columns(best: windows.Windows) -> dict[str, Floats]:
    return {
        "window_start_jd": best.start_jd,
        "best_jd": best.best_jd,
        "window_end_jd": best.end_jd,
        "windows": best.count.astype(np.float64),
    }


def _look(sky: Sky, some: Evenings, body: int, best_jd: Floats, rules: Rules) -> dict[str, Floats]:
    """Describe a body at the best moments; where there is none in the middle of the evening, for cautions."""
    jd = np.where(np.isnan(best_jd), some.middle_jd, best_jd)
    over = heaven(sky, some.site, jd)
    seen = view_body(sky, over, body)
    looks = appearance(sky, np.full(jd.size, body), jd)
    margins = margins_of(seen, looks.magnitude, rules.criteria, some.site, is_moon=body == MOON)
    extinction = rules.criteria.extinction_at(some.site.elevation_m)
    verdict = np.where(
        np.isnan(best_jd), len(VERDICTS) - 1, verdicts(margins.least, rules.criteria, over.sun_altitude_deg)
    )
    return {
        "altitude_deg": seen.altitude_deg,
        "airless_altitude_deg": seen.place.airless_altitude_deg,
        "azimuth_deg": seen.place.azimuth_deg,
        "hour_angle_deg": seen.place.hour_angle_deg,
        "parallactic_angle_deg": parallactic_angle_deg(seen.place, some.site.latitude_deg),
        "airmass": airmass(seen.altitude_deg),
        "sun_altitude_deg": over.sun_altitude_deg,
        "magnitude": looks.magnitude,
        "dimmed_magnitude": dimmed_magnitude(looks.magnitude, seen.altitude_deg, extinction),
        "elongation_deg": np.full(jd.size, np.nan) if body == SUN else seen.lights.sun_separation_deg,
        "constellation_number": looks.constellation.astype(np.float64),
        "moon_illuminated": lit_part(over.moon_phase_angle_deg),
        "moon_separation_deg": seen.lights.moon_separation_deg,
        "moon_altitude_deg": over.moon_altitude_deg,
        "margin_sky": margins.sky,
        "margin_arcus": margins.arcus,
        "margin_crescent": margins.crescent,
        "margin": margins.least,
        "verdict_number": verdict.astype(np.float64),
    }


def _is_up(sky: Sky, over: Heaven, body: int) -> Floats:
    """Return 1 where a body stands above the altitude at which it rises (a Moon of mean radius), else 0."""
    level = rise_level(body)
    limb_deg = MEAN_MOON_RADIUS_DEG if level.by_limb else 0.0
    altitude = view_body(sky, over, body).place.airless_altitude_deg
    return np.asarray((altitude > level.airless_altitude_deg - limb_deg).astype(np.float64))
