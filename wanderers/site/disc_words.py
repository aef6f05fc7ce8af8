"""Local circumstances of occultations and transits in words."""

from __future__ import annotations

from typing import Final

import numpy as np
import polars as pl

from wanderers.ephemeris.sky import SUN
from wanderers.events.discs import Pairs
from wanderers.site import clock
from wanderers.site.airmass import airmass, dimmed_magnitude
from wanderers.site.compass import POINTS, compass_point
from wanderers.site.disc_verdicts import Contacts
from wanderers.site.local_discs import LocalDiscs
from wanderers.site.reasons import SUN_CAUTION
from wanderers.site.sightings import Watch, look_exactly
from wanderers.site.twilight import SUN_RISE_DEG
from wanderers.site.visibility import VERDICTS

ARCMIN_PER_DEG: Final = 60.0
PLACED: Final = ("seen_placement", "upper", "left")
"""Columns that mean nothing while one hides the other."""
BELOW: Final = "below the horizon"


def circumstances(watched: Watch, pairs: Pairs, discs: LocalDiscs, contacts: Contacts) -> pl.Series:
    """Return what each pair comes to here, one text a pair."""
    times = [
        clock.local_minutes(watched.evenings.zone, jd) for jd in (*discs.contacts_jd.T, discs.closest_jd)
    ]
    texts = []
    for row in range(pairs.jd.size):
        shown = [str(column[row]) for column in times]
        if not contacts.happens[row]:
            texts.append(_missed(float(discs.gap_deg[row])))
        elif np.all(contacts.altitude_deg[row, [0, 3]] < 0.0):
            texts.append("happens below the horizon here")
        elif contacts.is_transit[row]:
            texts.append(f"on the Sun's disc {_from_to(shown, row, discs, contacts)}")
        else:
            verb = "hidden" if np.isfinite(discs.contacts_jd[row, 1]) else "partly hidden"
            texts.append(f"{verb} {_from_to(shown, row, discs, contacts)}")
    return pl.Series(texts, dtype=pl.String)


def _missed(gap_deg: float) -> str:
    """Return by how much discs miss each other here."""
    arcmin = gap_deg * ARCMIN_PER_DEG
    if arcmin < 1.0:
        arcsec = max(round(arcmin * 60.0), 1)
        return f"misses here by {arcsec} arcsecond{'s' if arcsec != 1 else ''}"
    whole = round(arcmin)
    return f"misses here by {whole} arcminute{'s' if whole != 1 else ''}"


def _from_to(shown: list[str], row: int, discs: LocalDiscs, contacts: Contacts) -> str:
    """Return when something begins and ends, at which limb, how high."""
    parts = [
        f"{word} {shown[at]} ({_where(row, at, discs, contacts)})" for word, at in (("from", 0), ("to", 3))
    ]
    return " ".join(parts)


def _where(row: int, at: int, discs: LocalDiscs, contacts: Contacts) -> str:
    """Return at which limb a contact happens and how high it then stands."""
    altitude = float(contacts.altitude_deg[row, at])
    limb = ""
    if contacts.by_moon[row]:
        limb = "dark limb, " if discs.by_dark_limb[row, at] else "bright limb, "
    height = BELOW if altitude < 0.0 else f"{altitude:.0f} degree{'s' if round(altitude) != 1 else ''} up"
    by_day = not contacts.is_transit[row] and altitude >= 0.0
    day = ", by day" if by_day and contacts.sun_altitude_deg[row, at] > SUN_RISE_DEG else ""
    return f"{limb}{height}{day}"


def verdict_columns(watched: Watch, pairs: Pairs, contacts: Contacts) -> dict[str, pl.Series]:
    """Return window, place and verdict of what happens here, for the columns of the same names."""
    can = np.isfinite(contacts.best_jd)
    evening = watched.evenings
    moment = np.where(can, contacts.best_jd, pairs.jd)
    target = np.where(contacts.is_transit, SUN, pairs.second)
    over, seen, _, magnitude = look_exactly(watched, target, moment)
    times = {"window_start": contacts.start_jd, "best": contacts.best_jd, "window_end": contacts.end_jd}
    extinction = watched.rules.criteria.extinction_at(evening.site.elevation_m)
    numbers = {
        "altitude_deg": seen.altitude_deg,
        "airless_altitude_deg": seen.place.airless_altitude_deg,
        "azimuth_deg": seen.place.azimuth_deg,
        "airmass": airmass(seen.altitude_deg),
        "sun_altitude_deg": over.sun_altitude_deg,
        "dimmed_magnitude": dimmed_magnitude(magnitude, seen.altitude_deg, extinction),
    }
    nothing = pl.Series([None], dtype=pl.String)
    compass = pl.Series(POINTS).gather(pl.Series(compass_point(seen.place.azimuth_deg)))
    index = evening.index_of(moment)
    caution = pl.repeat(SUN_CAUTION, can.size, eager=True).zip_with(pl.Series(contacts.is_transit), nothing)
    return {
        "evening_date": pl.Series(np.datetime_as_string(evening.days)).gather(index),
        **{f"{name}_utc": clock.utc_texts(jd) for name, jd in times.items()},
        **{f"{name}_local": clock.local_texts(evening.zone, jd) for name, jd in times.items()},
        **{
            name: pl.Series(np.where(can, values, np.nan), nan_to_null=True)
            for name, values in numbers.items()
        },
        "compass": compass.zip_with(pl.Series(can), nothing),
        "verdict": pl.Series([verdict.value for verdict in VERDICTS]).gather(pl.Series(contacts.verdict)),
        "verdict_reason": _reasons(contacts),
        "caution": caution,
        **{
            name: pl.repeat(None, can.size, eager=True, dtype=pl.String)
            for name in ("seen_placement", "upper", "left")
        },
        "seen_separation_deg": pl.repeat(None, can.size, eager=True, dtype=pl.Float64),
    }


def _reasons(contacts: Contacts) -> pl.Series:
    """Return the verdict on what happens here in words."""
    texts = []
    for row in range(contacts.happens.size):
        if contacts.is_transit[row]:
            seen = "only through a filter made for the Sun"
            texts.append(seen if np.isfinite(contacts.best_jd[row]) else "the Sun is not up")
        elif np.isfinite(contacts.best_jd[row]):
            aid = VERDICTS[int(contacts.verdict[row])].value.replace("_", " ")
            texts.append("to be seen with the naked eye" if aid == "naked eye" else f"needs {_article(aid)}")
        else:
            texts.append(_unseen(contacts, row))
    return pl.Series(texts, dtype=pl.String)


def _article(aid: str) -> str:
    return "a telescope" if aid == "telescope" else aid


def _unseen(contacts: Contacts, row: int) -> str:
    """Return why neither beginning nor end can be seen."""
    altitude = contacts.altitude_deg[row, [0, 3]]
    if np.all(altitude < 0.0):
        return "happens below the horizon"
    if np.all(contacts.sun_altitude_deg[row, [0, 3]] > SUN_RISE_DEG):
        return "happens by day"
    return "too low, too faint or in too bright a sky where it begins and ends"
