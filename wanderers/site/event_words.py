"""Verdicts on events in plain words: how well all that must be seen shows, or what keeps it from that."""

from __future__ import annotations

from typing import Final

import numpy as np
import polars as pl

from wanderers.arrays import Bools, Floats, Ints
from wanderers.ephemeris.bodies import Body
from wanderers.ephemeris.stars import star_letters
from wanderers.events.kinds import Kind
from wanderers.events.ledger import target_names
from wanderers.site import clock, reasons
from wanderers.site.airmass import dimmed_magnitude
from wanderers.site.compass import POINTS, compass_point
from wanderers.site.party import Members, of_member
from wanderers.site.prospects import NO_ROW, Parties, Prospects
from wanderers.site.sightings import Watch, look, look_exactly
from wanderers.site.twilight import STEPS_A_DAY, find_crossings, rise_level
from wanderers.site.visibility import VERDICTS, Verdict, verdicts

NEVER_TOGETHER: Final = "never high together in a sky dark enough"
OF_THE_SUN: Final = (Kind.SEASON_POINT.value, Kind.CONSTELLATION_ENTRY.value)
SUN_INSTANT: Final = "an instant of the Sun's path, nothing to look at"
TOLD_OF_DECIDING: Final = (
    "magnitude",
    "moon_separation_deg",
    "margin_sky",
    "margin_arcus",
    "margin_crescent",
    "margin",
)
"""What is told of the member that decides."""

TOGETHER: Final = {2: "both ", 3: "all three ", 4: "all four ", 5: "all five "}


def verdict_table(
    watched: Watch, parties: Parties, best: Prospects, members: Members, events: pl.DataFrame
) -> pl.DataFrame:
    """Return verdict, reason and caution of every event.

    Args:
        watched: from where.
        parties: what must be seen together.
        best: the best evenings.
        members: how all stand at the best moments, or in the middle of the nearest evenings where none is.
        events: the events, for what they are.

    Returns:
        columns ``verdict``, ``verdict_reason``, ``caution``.
    """
    # Near the Sun at the instant or at the best moment: either is near.
    nearest = pl.min_horizontal("elongation_deg", events["elongation_deg"])
    table = _circumstances(watched, parties, best, members).with_columns(
        events["kind"], elongation_deg=nearest
    )
    reason = reasons.verdict_reason(watched.rules)
    alone = pl.col("count") == 1
    named = pl.concat_str(pl.col("name"), pl.lit(": "), reason)
    seen = pl.col("verdict") == Verdict.NAKED_EYE.value
    together = pl.concat_str(
        pl.col("count").replace_strict(TOGETHER, default="all ", return_dtype=pl.String), reason
    )
    words = (
        pl.when((pl.col("body") == Body.SUN.value) & pl.col("kind").is_in(OF_THE_SUN))
        .then(pl.lit(SUN_INSTANT))
        .when(pl.col("apart"))
        .then(pl.lit(NEVER_TOGETHER))
        .when(alone)
        .then(reason)
        .when(seen)
        .then(together)
        .otherwise(named)
    )
    return table.select(
        "verdict", words.alias("verdict_reason"), reasons.caution(watched.rules).alias("caution")
    )


def _circumstances(watched: Watch, parties: Parties, best: Prospects, members: Members) -> pl.DataFrame:
    """Return what the words are made of: the columns that :mod:`wanderers.site.reasons` reads.

    They are those of the member that decides: the one that shows least, or that is never up.
    """
    can = np.isfinite(best.best_jd)
    blocked = ~can & (best.blocker != NO_ROW)
    deciding = np.where(blocked, best.blocker, members.faintest)
    target = np.take_along_axis(parties.member, deciding[:, None], axis=1)[:, 0]
    told = {name: of_member(getattr(members, name), deciding) for name in TOLD_OF_DECIDING}
    shown = verdicts(told["margin"], watched.rules.criteria, members.sun_altitude_deg)
    verdict = np.where(can, shown, len(VERDICTS) - 1)
    extinction = watched.rules.criteria.extinction_at(watched.evenings.site.elevation_m)
    azimuth = of_member(members.azimuth_deg, deciding)
    with_moon = (parties.member == Body.MOON.order).any(axis=1)
    numbers = {
        **told,
        "altitude_deg": _least(members.altitude_deg),
        "dimmed_magnitude": dimmed_magnitude(
            told["magnitude"], of_member(members.altitude_deg, deciding), extinction
        ),
        "sun_altitude_deg": members.sun_altitude_deg,
        "moon_altitude_deg": members.moon_altitude_deg,
        "moon_illuminated": np.where(with_moon, 0.0, members.moon_illuminated),
        "elongation_deg": _least(
            np.where(parties.member == Body.SUN.order, np.nan, members.sun_separation_deg)
        ),
        "best_jd": best.best_jd,
        "sunset_jd": watched.sunset_jd[best.evening],
        "sunrise_jd": watched.sunrise_jd[best.evening],
        **_passages(watched, parties, best.evening, target, blocked | ~can),
    }
    names = pl.Series(target_names())
    table = pl.DataFrame({name: pl.Series(values, nan_to_null=True) for name, values in numbers.items()})
    name = names.gather(target)
    zone = watched.evenings.zone
    return table.with_columns(
        body=name,
        name=name.replace(star_letters()).zip_with(~_is_lower(name), name.str.to_titlecase()),
        count=pl.Series(members.there.sum(axis=1)),
        apart=pl.Series(~can & ~blocked),
        verdict=pl.Series([verdict.value for verdict in VERDICTS]).gather(verdict),
        compass=pl.Series(POINTS).gather(pl.Series(compass_point(azimuth))),
        up=pl.col("up") > 0.5,
        sun_up=pl.Series(members.sun_altitude_deg > 0.0),
        sunset_clock=clock.local_minutes(zone, numbers["sunset_jd"]),
        sunrise_clock=clock.local_minutes(zone, numbers["sunrise_jd"]),
    )


def _passages(
    watched: Watch, parties: Parties, evening: Ints, target: Ints, wanted: Bools
) -> dict[str, Floats]:
    """Return when targets rise and set on evenings, how high they climb in the dark, whether they are up."""
    out = {name: np.full(evening.size, np.nan) for name in ("rise_jd", "set_jd", "highest_deg", "up")}
    (row,) = np.nonzero(wanted)
    if row.size == 0:
        return out
    out["highest_deg"][row] = _highest_deg(watched, parties.chosen(row), evening[row], target[row])
    for number in np.unique(target[row]).tolist():
        own = row[target[row] == number]
        rise, sets, up = _rise_and_set(watched, evening[own], number)
        out["rise_jd"][own], out["set_jd"][own], out["up"][own] = rise, sets, up
    return out


def _highest_deg(watched: Watch, parties: Parties, evening: Ints, target: Ints) -> Floats:
    """Return how high targets climb in the dark within reach of their events, else at all, shape (k,).

    NaN where it is never dark.
    """
    seen = look(watched, evening, target)
    place = seen.place_of(evening, target)
    count = watched.count[evening]
    row = np.repeat(np.arange(evening.size), count)
    step = np.arange(row.size) - np.repeat(np.cumsum(count) - count, count)
    away = np.abs(watched.jd[watched.first[evening[row]] + step] - parties.jd[row])
    within = away <= parties.reach_days[row]
    altitude = seen.altitude_deg[seen.first[place[row]] + step]
    highest = np.full(evening.size, np.nan)
    np.fmax.at(highest, row[within], altitude[within])
    return np.where(np.isnan(highest), seen.highest_deg()[place], highest)


def _rise_and_set(watched: Watch, evening: Ints, target: int) -> tuple[Floats, Floats, Floats]:
    """Return when a target first rises and sets in evenings, and whether it is up as they begin, (k,)."""
    which, place = np.unique(evening, return_inverse=True)
    some = watched.evenings.chosen(which)
    found = find_crossings(watched.sky, some.site, some.grid(STEPS_A_DAY), [rise_level(target)])
    rise, sets = (some.first_in(found.jd[up]) for up in (found.rising, ~found.rising))
    up = np.where(np.isnan(rise), np.isfinite(sets), np.isfinite(sets) & (sets < rise))
    always = np.isnan(rise) & np.isnan(sets)
    if always.any():
        up[always] = _stands_up(watched, target, some.middle_jd[always])
    return rise[place], sets[place], up[place].astype(np.float64)


def _stands_up(watched: Watch, target: int, jd: Floats) -> Bools:
    """Return whether a target that neither rises nor sets is up, shape (k,)."""
    _, seen, _, _ = look_exactly(watched, np.full(jd.size, target), jd)
    return np.asarray(seen.place.airless_altitude_deg > rise_level(target).airless_altitude_deg)


def _is_lower(name: pl.Series) -> pl.Series:
    return name.str.to_lowercase() == name


def _least(values: Floats) -> Floats:
    """Return the least of each party's values, shape (n,), NaN where it has none."""
    least = np.where(np.isnan(values), np.inf, values).min(axis=1)
    return np.where(np.isinf(least), np.nan, least)
