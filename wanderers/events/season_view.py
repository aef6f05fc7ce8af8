"""The view from above: where Sun, Earth and planet stand while the line of sight swings back."""

from __future__ import annotations

from typing import Any, Final

import numpy as np
import polars as pl

from wanderers import schema
from wanderers.arrays import Floats
from wanderers.ephemeris import timescales
from wanderers.ephemeris.bodies import EARTH_CHAIN, NAIF_CHAINS, Body
from wanderers.ephemeris.frames import Frame, ecliptic_of_j2000
from wanderers.ephemeris.kernels import open_kernel
from wanderers.ephemeris.places import Instants, barycentric
from wanderers.ephemeris.sky import Sky
from wanderers.ephemeris.store import TrackStore

AXES: Final = ("x", "y", "z")

VIEW_COLUMNS: Final[dict[str, type[pl.DataType]]] = {
    "season_id": pl.String,
    "mark": pl.String,
    "jd_tt": pl.Float64,
    **{f"earth_{axis}_au": pl.Float64 for axis in AXES},
    **{f"planet_{axis}_au": pl.Float64 for axis in AXES},
    "direction_deg": pl.Float64,
}
"""Geometric places from the Sun's centre on the fixed ecliptic of J2000 (x towards the equinox, z north), and
the apparent geocentric longitude in which the planet is seen, null outside the season. ``mark`` names the
row of a dated moment."""

ORBIT_STEP_DAYS: Final = 4.0
"""Mars goes on by 2.5 degrees at most: a line through such places looks smooth."""
FINE_ORBIT_STEP_DAYS: Final = 1.0
"""For Mercury, up to 6 degrees, and Venus."""
LONGEST_HALF_DAYS: Final = 2200.0
"""How much of a slow planet's orbit is given on either side of the middle: six years, Jupiter's whole."""
SHORTEST_HALF_DAYS: Final = 184.0
"""Half a year of the Earth's."""
PERIOD_DAYS: Final[dict[Body, float]] = {
    Body.MERCURY: 87.97,
    Body.VENUS: 224.70,
    Body.MARS: 686.98,
    Body.JUPITER: 4_332.6,
}
"""Sidereal periods, as handbooks give them; only how much of an orbit is drawn depends on them."""


def view_from_above(store: TrackStore, season: dict[str, Any], jd: Floats) -> pl.DataFrame:
    """Return the places of Earth and planet through a season and along their orbits, ``VIEW_COLUMNS``.

    Args:
        store: the tracks, and the kernel that the places are read from.
        season: its row, ``schema.SEASON_COLUMNS``.
        jd: TT instants through the season, rising, shape (n,), within the kernel.
    """
    body = Body(season["body"])
    marks = {season[f"{mark}_jd_tt"]: mark for mark in schema.SEASON_MARKS}
    marks.pop(None, None)
    every = np.unique(np.concatenate([jd, _orbit_instants(store, body, jd), list(marks)]))
    places = heliocentric_au(store, body, every)
    inside = (every >= jd[0]) & (every <= jd[-1])
    return pl.DataFrame(
        {
            "season_id": pl.repeat(season["season_id"], every.size, eager=True),
            "mark": pl.Series([marks.get(at) for at in every.tolist()], dtype=pl.String),
            "jd_tt": every,
            **{f"earth_{axis}_au": places[0, row] for row, axis in enumerate(AXES)},
            **{f"planet_{axis}_au": places[1, row] for row, axis in enumerate(AXES)},
            "direction_deg": pl.Series(_directions(store, body, every, inside), nan_to_null=True),
        }
    )


def heliocentric_au(store: TrackStore, body: Body, jd_tt: Floats) -> Floats:
    """Return geometric places of the Earth and of a planet from the Sun, on the ecliptic of J2000.

    Args:
        store: holds the kernel.
        body: a planet.
        jd_tt: shape (n,), within the kernel.

    Returns:
        au, shape (2, 3, n): the Earth's, the planet's.
    """
    at = Instants(jd_tt, timescales.tdb_minus_tt_days(jd_tt))
    with open_kernel(store.kernel) as spk:
        sun = barycentric(spk, NAIF_CHAINS[Body.SUN], at)[0]
        earth = barycentric(spk, EARTH_CHAIN, at)[0]
        planet = barycentric(spk, NAIF_CHAINS[body], at)[0]
    return np.stack([ecliptic_of_j2000() @ (place - sun) for place in (earth, planet)])


def _orbit_instants(store: TrackStore, body: Body, jd: Floats) -> Floats:
    """Return instants along one revolution, or as much of it as is worth drawing, within the kernel."""
    half = PERIOD_DAYS.get(body, np.inf) * 0.503
    half = float(np.clip(half, SHORTEST_HALF_DAYS, LONGEST_HALF_DAYS))
    step = FINE_ORBIT_STEP_DAYS if body in (Body.MERCURY, Body.VENUS) else ORBIT_STEP_DAYS
    middle = 0.5 * (jd[0] + jd[-1])
    every = middle + np.arange(-half, half + step, step)
    low, high = store.span_jd
    return np.asarray(every[(every >= low) & (every <= high)])


def _directions(store: TrackStore, body: Body, jd: Floats, inside: np.ndarray) -> Floats:
    """Return the apparent J2000 longitudes in which the planet is seen, NaN outside the season."""
    out = np.full(jd.size, np.nan)
    at = jd[inside]
    sky = Sky(store.tracks(float(at[0]), float(at[-1])))
    out[inside] = sky.longitude_deg(np.full(at.size, body.order), at, Frame.J2000)[0]
    return out
