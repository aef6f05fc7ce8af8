"""On which side things stand: one of a pair north or south of the other, a body east or west of the Sun.

"North" means what the event's frame measures across: ecliptic latitude for conjunctions in longitude,
declination for the others. At least separation two bodies may stand side by side; then neither is north.
"""

from __future__ import annotations

from typing import Final

import numpy as np
import polars as pl

from wanderers.arrays import Floats, Ints
from wanderers.ephemeris.frames import Frame
from wanderers.ephemeris.sky import SUN, Sky
from wanderers.ephemeris.store import TrackStore
from wanderers.ephemeris.vectors import separation_deg
from wanderers.events.catalogue import sky_of
from wanderers.events.kinds import NOBODY, Kind
from wanderers.events.ledger import Arrays, by_block, target_names

SIDE_COLUMNS: Final[dict[str, type[pl.DataType]]] = {"pair_side": pl.String, "solar_side": pl.String}
"""``pair_side``: ``north`` or ``south``, where ``body`` stands seen from ``other``; null where there is no
other, or it is rather beside it. ``solar_side``: ``east`` (evening) or ``west`` (morning) of the Sun."""

PAIRED: Final = (Kind.CONJUNCTION, Kind.APPULSE)
LEAST_SHARE: Final = 0.5
"""Share of the separation that must lie along the meridian: within 60 degrees of due north or south."""


def with_sides(store: TrackStore, table: pl.DataFrame) -> pl.DataFrame:
    """Return an event table with SIDE_COLUMNS added; its rows and their order stay as they are."""
    jd = table["jd_tt"].to_numpy()
    order = np.argsort(jd, kind="stable")
    body = _numbers(table["body"])[order]
    other = _numbers(table["other"])[order]
    paired = table["kind"].is_in([kind.value for kind in PAIRED]).to_numpy()[order]
    in_longitude = (table["frame"].fill_null("") != Frame.EQUATOR.value).to_numpy()[order]
    in_longitude &= (table["kind"] == Kind.CONJUNCTION.value).to_numpy()[order]
    pair = paired & (other != NOBODY)
    rising = jd[order]

    def look_up(some: slice) -> Arrays:
        return _sides(
            store, body[some], np.where(pair, other, NOBODY)[some], rising[some], in_longitude[some]
        )

    found = by_block(store, rising, look_up)
    back = np.argsort(order, kind="stable")
    return table.with_columns(
        pair_side=_words(found["north"][back], "north", "south"),
        solar_side=_words(found["east"][back], "east", "west"),
    )


def _numbers(names: pl.Series) -> Ints:
    """Return the target numbers of names, NOBODY for none and for names no catalogue has."""
    numbers = {name: number for number, name in enumerate(target_names())}
    known = names.replace_strict(numbers, default=NOBODY, return_dtype=pl.Int64).fill_null(NOBODY)
    return np.asarray(known.to_numpy(), dtype=np.int64)


def _sides(
    store: TrackStore, body: Ints, other: Ints, jd: Floats, in_longitude: np.ndarray
) -> dict[str, np.ndarray]:
    """Return +1 for north and east, -1 for south and west, 0 where neither, arrays of shape (n,)."""
    north, east = np.zeros(jd.size), np.zeros(jd.size)
    if jd.size:
        sky = sky_of(store, float(jd[0]), float(jd[-1]))
        lead, _ = sky.lead_deg(body, np.full(jd.size, SUN), jd, Frame.ECLIPTIC)
        east = np.where(body == SUN, 0.0, np.sign(lead))
        for frame, some in ((Frame.ECLIPTIC, in_longitude), (Frame.EQUATOR, ~in_longitude)):
            chosen = some & (other != NOBODY)
            if chosen.any():
                north[chosen] = _north(sky, body[chosen], other[chosen], jd[chosen], frame)
    return {"north": north, "east": east}


def _north(sky: Sky, body: Ints, other: Ints, jd: Floats, frame: Frame) -> Floats:
    """Return on which side the first stands across a frame, 0 where it is rather beside the second."""
    apart = separation_deg(sky.apparent(body, jd)[0], sky.apparent(other, jd)[0])
    across = sky.latitude_deg(body, jd, frame) - sky.latitude_deg(other, jd, frame)
    return np.where(np.abs(across) >= LEAST_SHARE * apart, np.sign(across), 0.0)


def _words(sign: Floats, positive: str, negative: str) -> pl.Series:
    return pl.Series(sign).replace_strict(
        {1.0: positive, -1.0: negative}, default=None, return_dtype=pl.String
    )
