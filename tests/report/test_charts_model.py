"""A solar system simple enough to check by hand, for the tests of the charts: circular orbits, no light-time.

The charts only draw tables; they need motion that looks like the real one, not that is.
"""

from __future__ import annotations

from itertools import pairwise

import numpy as np
import polars as pl
import pytest

from wanderers import schema
from wanderers.ephemeris.bodies import INNER, PLANETS, Body
from wanderers.ephemeris.dates import iso_strings
from wanderers.ephemeris.timescales import jd_utc_from_tt

START_JD = 2_461_406.5  # 2027-01-01
RADIUS_AU = {
    Body.MERCURY: 0.387,
    Body.VENUS: 0.723,
    Body.MARS: 1.524,
    Body.JUPITER: 5.203,
    Body.SATURN: 9.55,
    Body.URANUS: 19.2,
    Body.NEPTUNE: 30.1,
    Body.PLUTO: 39.5,
}  # handbook semi-major axes, rounded
TILT_DEG = {Body.MERCURY: 7.0, Body.VENUS: 3.4, Body.MARS: 1.9, Body.PLUTO: 17.0}
OBLIQUITY_DEG = 23.44
RISING_NODE_DEG = 40.0
MARKS_WINDOW_DAYS = 1500.0


def place(body: Body, jd: np.ndarray) -> tuple[np.ndarray, np.ndarray, np.ndarray]:
    """Return longitude (unwrapped), latitude and distance of a body as the Earth sees it."""
    earth = _orbit(1.0, 0.0, 100.0, jd)
    if body is Body.SUN:
        seen = -earth
    else:
        phase = 37.0 * body.order
        seen = _orbit(RADIUS_AU[body], np.radians(TILT_DEG.get(body, 1.3)), phase, jd) - earth
    x, y, z = seen
    longitude = np.unwrap(np.degrees(np.arctan2(y, x)), period=360.0)
    return longitude, np.degrees(np.arctan2(z, np.hypot(x, y))), np.sqrt(x * x + y * y + z * z)


def track(body: Body, jd_from: float = START_JD, days: float = 731.0, step: float = 1.0) -> pl.DataFrame:
    """Return a track of the model in the contract's columns."""
    jd = jd_from + np.arange(0.0, days, step)
    longitude, latitude, distance = place(body, jd)
    rate = (place(body, jd + 0.01)[0] - place(body, jd - 0.01)[0]) / 0.02
    count = {
        "jd_tt": jd,
        "tt": iso_strings(jd),
        "utc": iso_strings(jd_utc_from_tt(jd), suffix="Z"),
        "longitude_deg": longitude % 360.0,
        "latitude_deg": latitude,
        "ra_deg": longitude % 360.0,
        "dec_deg": latitude,
        "longitude_rate_deg_per_day": rate,
        "distance_au": distance,
        "elongation_deg": np.full(jd.size, 90.0),
        "magnitude": -1.0 + 5.0 * np.log10(distance),
        "diameter_arcsec": 10.0 / distance,
        "illuminated_fraction": np.ones(jd.size),
        "constellation": np.full(jd.size, "Leo"),
    }
    return pl.DataFrame(count).select(pl.col(name).cast(kind) for name, kind in schema.TRACK_COLUMNS.items())


def seasons(body: Body, jd_from: float = START_JD, days: float = 731.0) -> pl.DataFrame:
    """Return the retrograde seasons of the model that touch a span."""
    jd = np.arange(jd_from - MARKS_WINDOW_DAYS, jd_from + days + MARKS_WINDOW_DAYS, 0.05)
    longitude = place(body, jd)[0]
    turns = np.flatnonzero(np.diff(np.sign(np.diff(longitude)))) + 1
    rows = []
    for back, on in pairwise(turns.tolist()):
        if longitude[on] < longitude[back] and jd[on] > jd_from and jd[back] < jd_from + days:
            rows.append(_season_row(body, jd, longitude, back, on))
    table = pl.DataFrame(rows, schema=None if rows else schema.SEASON_COLUMNS)
    return table.select(pl.col(name).cast(kind) for name, kind in schema.SEASON_COLUMNS.items())


def conjunctions(bodies: tuple[Body, ...], jd_from: float = START_JD, days: float = 731.0) -> pl.DataFrame:
    """Return the conjunctions of the model's planets, in the event table's columns."""
    jd = np.arange(jd_from, jd_from + days, 0.05)
    places = {body: place(body, jd) for body in bodies}
    rows = []
    for number, first in enumerate(bodies):
        for second in bodies[number + 1 :]:
            apart = 180.0 - (180.0 - (places[second][0] - places[first][0])) % 360.0
            for at in np.flatnonzero((apart[:-1] * apart[1:] < 0.0) & (np.abs(apart[:-1]) < 90.0)):
                rows.append(
                    {
                        "kind": "conjunction",
                        "body": first.value,
                        "other": second.value,
                        "frame": "ecliptic",
                        "jd_tt": jd[at],
                        "longitude_deg": places[first][0][at] % 360.0,
                        "separation_deg": abs(places[first][1][at] - places[second][1][at]),
                    }
                )
    known = pl.DataFrame(rows)
    blank = [pl.lit(None).alias(name) for name in schema.EVENT_COLUMNS if name not in known.columns]
    return known.with_columns(blank).select(
        pl.col(name).cast(kind) for name, kind in schema.EVENT_COLUMNS.items()
    )


def _orbit(radius: float, tilt_rad: float, phase_deg: float, jd: np.ndarray) -> np.ndarray:
    """Return a place on a circular orbit round the Sun, ecliptic axes, shape (3, n)."""
    node = np.radians(RISING_NODE_DEG)
    along = np.radians(phase_deg) + 2.0 * np.pi * (jd - START_JD) / (365.25 * radius**1.5) - node
    flat, up = np.cos(along), np.sin(along) * np.sin(tilt_rad)
    across = np.sin(along) * np.cos(tilt_rad)
    turned = (flat * np.cos(node) - across * np.sin(node), flat * np.sin(node) + across * np.cos(node))
    return radius * np.stack([*turned, up])


def _season_row(body: Body, jd: np.ndarray, longitude: np.ndarray, back: int, on: int) -> dict[str, object]:
    middle = (back + on) // 2
    start = int(np.flatnonzero(longitude[:back] >= longitude[on])[0])
    end = int(np.flatnonzero(longitude[on:] > longitude[back])[0]) + on
    instants = dict(zip(schema.SEASON_MARKS, (start, back, middle, on, end), strict=True))
    distance = place(body, jd[back:on])[2]
    return {
        "season_id": f"{body.value}-ecliptic-s{back}",
        "body": body.value,
        "frame": "ecliptic",
        "middle_kind": "inferior_conjunction" if body in INNER else "opposition",
        "arc_deg": longitude[back] - longitude[on],
        "retrograde_days": jd[on] - jd[back],
        "threefold_days": jd[end] - jd[start],
        "station_retrograde_longitude_deg": longitude[back] % 360.0,
        "station_direct_longitude_deg": longitude[on] % 360.0,
        "path_shape": "loop",
        "closest_au": distance.min(),
        "peak_magnitude": -1.0,
        "peak_diameter_arcsec": 10.0 / distance.min(),
        "constellations": "Cnc+Leo",
        **{f"{mark}_jd_tt": jd[at] for mark, at in instants.items()},
        **{f"{mark}_utc": str(iso_strings(jd[at], suffix="Z")) for mark, at in instants.items()},
    }


@pytest.mark.parametrize("body", [Body.VENUS, Body.MARS, Body.JUPITER])
def test_the_model_turns_back_where_apollonius_says(body: Body) -> None:
    # Stations on coplanar circles: tan^2 E = a^2 / (1 + a) for the elongation E seen from the Earth, a in au
    # (any textbook of spherical astronomy; from memory). The model is tilted by a few degrees: 0.4 degrees of
    # tolerance.
    season = seasons(body, days=1500.0).row(0, named=True)
    at = np.array([season["station_retrograde_jd_tt"]])
    apart = abs(180.0 - (180.0 - (place(body, at)[0] - place(Body.SUN, at)[0])) % 360.0)[0]
    radius = RADIUS_AU[body]
    expected = np.degrees(np.arctan(radius / np.sqrt(1.0 + radius)))
    assert apart == pytest.approx(expected if radius < 1.0 else 180.0 - expected, abs=0.4)


def test_every_planet_of_the_model_has_a_season() -> None:
    assert all(not seasons(body, days=900.0).is_empty() for body in PLANETS)
