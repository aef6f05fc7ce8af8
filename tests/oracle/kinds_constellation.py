"""Entries into constellations, by the IAU boundaries in the mean equator and equinox of B1875.

Source: Roman, Identification of a constellation from a position, PASP 99, 695 (1987), catalogue VI/42
of the CDS, in the data file that astropy ships. Its hours and degrees are printed to four decimals;
the boundaries run along whole seconds of right ascension and whole minutes of declination, which are
restored here. B1875 is reached by IAU 2006 precession.
"""

from __future__ import annotations

from importlib.resources import files

import numpy as np
import polars as pl
from numpy.typing import NDArray
from scipy.interpolate import CubicSpline

from tests.oracle.places import Floats, Sky, frame_matrix, latitude_deg, longitude_deg
from tests.oracle.rows import events
from tests.oracle.sampling import Grid
from tests.oracle.search import bisect

FINE = 20  # looks between two samples, on a spline through them: 18 minutes apart on a quarter day


def boundaries() -> tuple[Floats, list[str]]:
    """Read the table: rows of lower and upper right ascension (hours) and lower declination; names."""
    text = (files("astropy.coordinates") / "data" / "constellation_data_roman87.dat").read_text("utf-8")
    rows = [line.split() for line in text.splitlines() if line.strip() and not line.startswith("#")]
    printed = np.array([row[:3] for row in rows], dtype=np.float64)
    whole = np.array([3600.0, 3600.0, 60.0])
    return np.round(printed * whole) / whole, [row[3] for row in rows]


def constellation_index(direction: Floats, bounds: Floats) -> NDArray[np.int64]:
    """Give the first row of the table, which runs from north to south, that holds each GCRS direction."""
    matrix = frame_matrix("b1875", np.zeros(len(direction)))
    hours, declination = longitude_deg(matrix, direction) / 15.0, latitude_deg(matrix, direction)
    row = np.zeros(hours.shape, dtype=np.int64)
    open_rows = np.ones(hours.shape, dtype=bool)
    for index, (low, high, floor) in enumerate(bounds):
        holds = open_rows & (hours >= low) & (hours < high) & (declination >= floor)
        row[holds] = index
        open_rows &= ~holds
    return row


def constellation_entry(sky: Sky, grid: Grid, subject: tuple[str, ...]) -> pl.DataFrame:
    """Find crossings of constellation boundaries by the apparent place.

    A visit shorter than the fine step at the corner of a constellation can stay unseen.
    """
    (body,) = subject
    bounds, row_names = boundaries()
    names = np.array(row_names)
    ordered = np.unique(names)
    number = np.searchsorted(ordered, names)
    count = (len(grid.jd_tt) - 1) * FINE + 1
    fine = grid.step_days / FINE * np.arange(count)
    spline = CubicSpline(grid.step_days * np.arange(len(grid.jd_tt)), grid.direction[body])
    at = number[constellation_index(spline(fine), bounds)]
    change = np.flatnonzero(at[1:] != at[:-1])
    jd = grid.jd_tt[0] + fine[change]

    def has_left(at_jd: Floats, offset: Floats) -> NDArray[np.bool_]:
        now = number[constellation_index(sky.apparent(body, at_jd, offset), bounds)]
        return np.asarray(now != at[change])

    entered = bisect(has_left, jd, np.zeros(jd.shape), np.full(jd.shape, grid.step_days / FINE))
    left_name, entered_name = ordered[at[change]], ordered[at[change + 1]]
    return events("constellation_entry", entered, body=body, detail=left_name, constellation=entered_name)
