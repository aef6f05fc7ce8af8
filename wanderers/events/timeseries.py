"""The time series of one body at regular steps."""

from __future__ import annotations

import numpy as np
import polars as pl

from wanderers import schema
from wanderers.arrays import Floats
from wanderers.ephemeris import constellations, timescales
from wanderers.ephemeris.appearance import appearance
from wanderers.ephemeris.bodies import Body
from wanderers.ephemeris.frames import Frame
from wanderers.ephemeris.sky import Sky
from wanderers.ephemeris.store import TrackStore
from wanderers.events.almanac import time_texts

ROWS_AT_ONCE = 200_000


def time_series(
    store: TrackStore,
    body: Body,
    jd_from: float,
    jd_to: float,
    step_days: float,
    frame: Frame = Frame.ECLIPTIC,
) -> pl.DataFrame:
    """Return a body's circumstances from ``jd_from`` on, every ``step_days``, up to but not at ``jd_to``.

    Longitude, latitude and the longitude's rate are counted in ``frame`` (right ascension and declination
    on the equator); ``ra_deg`` and ``dec_deg`` are always of date. Columns: ``schema.TRACK_COLUMNS``.
    """
    count = int(np.ceil((jd_to - jd_from) / step_days - 1e-9))
    every = np.asarray(jd_from + step_days * np.arange(count), dtype=np.float64)
    parts = [
        circumstances(store, body, every[start : start + ROWS_AT_ONCE], frame)
        for start in range(0, count, ROWS_AT_ONCE)
    ]
    return pl.concat(parts)


def circumstances(store: TrackStore, body: Body, jd: Floats, frame: Frame = Frame.ECLIPTIC) -> pl.DataFrame:
    """Return a body's circumstances at rising TT instants, shape (n,): ``schema.TRACK_COLUMNS``."""
    sky = Sky(store.tracks(float(jd[0]), float(jd[-1])))
    target = np.full(jd.size, body.order)
    seen = appearance(sky, target, jd)
    longitude = sky.longitude_deg(target, jd, frame, order=1)
    latitude = seen.latitude_deg if frame is Frame.ECLIPTIC else sky.latitude_deg(target, jd, frame)
    table = pl.DataFrame(
        {
            "jd_tt": jd,
            "tt": time_texts(jd, ""),
            "utc": time_texts(timescales.jd_utc_from_tt(jd), "Z"),
            "longitude_deg": longitude[0],
            "latitude_deg": latitude,
            "ra_deg": seen.ra_deg,
            "dec_deg": seen.dec_deg,
            "longitude_rate_deg_per_day": longitude[1],
            "distance_au": seen.distance_au,
            "elongation_deg": pl.Series(seen.elongation_deg, nan_to_null=True),
            "magnitude": pl.Series(seen.magnitude, nan_to_null=True),
            "diameter_arcsec": seen.diameter_arcsec,
            "illuminated_fraction": seen.illuminated_fraction,
            "constellation": pl.Series(constellations.ABBREVIATIONS).gather(seen.constellation),
        }
    )
    return table.select(pl.col(name).cast(kind) for name, kind in schema.TRACK_COLUMNS.items())
