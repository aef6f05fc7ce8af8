"""Occultations and transits from a site, against a dense topocentric search with skyfield."""

from __future__ import annotations

from typing import Any

import numpy as np
import polars as pl
import pytest
from skyfield.api import Star, load

from tests.site.places import HILL, RIDGE, SUMMIT, skyfield_place
from wanderers.ephemeris.bodies import Body
from wanderers.ephemeris.dates import parse_date
from wanderers.ephemeris.stars import ecliptic_stars
from wanderers.ephemeris.store import TrackStore
from wanderers.events.catalogue import Query
from wanderers.events.kinds import Kind
from wanderers.events.scene import Choice, Limits
from wanderers.site.almanac import almanac_from_site
from wanderers.site.places import Site

MOON_RADIUS_KM = 1737.4
"""IAU Working Group on Cartographic Coordinates, report of 2015, table 5."""
SUN_RADIUS_ARCSEC = 959.63
"""At 1 au: Auwers 1891, still the almanacs' convention (Explanatory Supplement, 3rd ed., table 10.1)."""
SECONDS = 86_400.0


def table(store: TrackStore, site: Site, first: str, end: str, kind: Kind, *bodies: Body) -> pl.DataFrame:
    choice = Choice(bodies, stars_for=bodies, limits=Limits())
    query = Query(parse_date(first), parse_date(end), frozenset({kind}), choice=choice)
    return almanac_from_site(store, query, site)


def star_of(name: str) -> Star:
    stars = ecliptic_stars()
    index = stars.name.index(name)
    return Star(
        ra_hours=stars.ra_deg[index] / 15.0,
        dec_degrees=stars.dec_deg[index],
        ra_mas_per_year=stars.pm_ra_cosdec_mas_per_year[index],
        dec_mas_per_year=stars.pm_dec_mas_per_year[index],
        epoch=stars.epoch_jd_tdb,
    )


def test_the_moon_hides_a_star_when_a_dense_search_says_so(store: TrackStore, jpl: Any) -> None:
    found = table(store, RIDGE, "2027-03-25", "2027-03-30", Kind.OCCULTATION, Body.MOON)
    row = found.filter(pl.col("other") == "Antares").row(0, named=True)
    contacts = dense_contacts(jpl, RIDGE, jpl["moon"], star_of("Antares"), row["jd_tt"])
    ours = [parse_date(row[f"local_contact{number}_utc"]) for number in (1, 4)]
    for mine, theirs in zip(ours, contacts, strict=True):
        assert abs(mine - theirs) * SECONDS < 2.0


def dense_contacts(jpl: Any, site: Site, front: Any, behind: Any, jd_tt: float) -> tuple[float, float]:
    """Return when the Moon's limb passes a point, UT1, by samples of one second around the middle."""
    scale = load.timescale(builtin=True)
    observer = jpl["earth"] + skyfield_place(site)
    time = scale.tt_jd(jd_tt + np.arange(-0.12, 0.12, 1.0 / SECONDS))
    moon = observer.at(time).observe(front).apparent()
    point = observer.at(time).observe(behind).apparent()
    radius = np.degrees(np.arcsin(MOON_RADIUS_KM / moon.distance().km))
    inside = moon.separation_from(point).degrees < radius
    (where,) = np.nonzero(inside)
    return float(time.ut1[where[0]]), float(time.ut1[where[-1]])


def test_the_moon_hides_a_planet_when_a_dense_search_says_so(store: TrackStore, jpl: Any) -> None:
    found = table(store, RIDGE, "2027-03-18", "2027-03-21", Kind.OCCULTATION, Body.MOON, Body.JUPITER)
    row = found.row(0, named=True)
    assert (row["body"], row["other"]) == ("moon", "jupiter")
    first, last = dense_contacts(jpl, RIDGE, jpl["moon"], jpl["jupiter barycenter"], row["jd_tt"])
    # The middle of the planet goes behind the limb between first and second contact, and out likewise.
    jd = [parse_date(row[f"local_contact{number}_utc"]) for number in (1, 2, 3, 4)]
    assert (jd[0] + jd[1]) / 2.0 == pytest.approx(first, abs=2.5 / SECONDS)
    assert (jd[2] + jd[3]) / 2.0 == pytest.approx(last, abs=2.5 / SECONDS)
    assert (row["disappears_limb"], row["reappears_limb"]) == ("dark", "bright")  # the Moon waxes


def test_a_waning_moon_leads_with_its_bright_limb(store: TrackStore) -> None:
    found = table(store, RIDGE, "2027-03-25", "2027-03-30", Kind.OCCULTATION, Body.MOON)
    row = found.filter(pl.col("other") == "Antares").row(0, named=True)
    assert (row["disappears_limb"], row["reappears_limb"]) == ("bright", "dark")


def test_what_only_the_site_sees_is_listed_and_what_it_misses_is_said(store: TrackStore) -> None:
    here = table(store, HILL, "2027-09-20", "2027-11-20", Kind.OCCULTATION, Body.MOON)
    own = here.filter(pl.col("contact1_utc").is_null(), pl.col("local_contact1_utc").is_not_null())
    missed = here.filter(pl.col("contact1_utc").is_not_null(), pl.col("local_contact1_utc").is_null())
    assert own.height > 0 and missed.height > 0
    assert missed["circumstances"].str.starts_with("misses here by ").all()
    assert (missed["verdict"] == "not_visible").all()
    assert here["event_id"].n_unique() == here.height


def test_an_occultation_keeps_its_name_wherever_it_is_seen(store: TrackStore) -> None:
    places = [
        table(store, site, "2027-01-01", "2027-07-01", Kind.OCCULTATION, Body.MOON) for site in (HILL, RIDGE)
    ]
    both = places[0].join(places[1], on=["body", "other", "jd_tt"], suffix="_there")
    assert both.height > 3
    assert (both["event_id"] == both["event_id_there"]).all()


def test_a_transit_begins_and_ends_when_a_dense_search_says_so(store: TrackStore, jpl: Any) -> None:
    found = table(store, SUMMIT, "2032-11-01", "2032-12-01", Kind.TRANSIT, Body.MERCURY)
    row = found.row(0, named=True)
    scale = load.timescale(builtin=True)
    observer = jpl["earth"] + skyfield_place(SUMMIT)
    time = scale.tt_jd(row["jd_tt"] + np.arange(-0.13, 0.13, 2.0 / SECONDS))
    sun = observer.at(time).observe(jpl["sun"]).apparent()
    planet = observer.at(time).observe(jpl["mercury"]).apparent()
    radius = SUN_RADIUS_ARCSEC / 3600.0 / sun.distance().au
    inside = sun.separation_from(planet).degrees < radius
    middle = [float(time.ut1[place]) for place in np.nonzero(inside)[0][[0, -1]]]
    jd = [parse_date(row[f"local_contact{number}_utc"]) for number in (1, 2, 3, 4)]
    assert (jd[0] + jd[1]) / 2.0 == pytest.approx(middle[0], abs=6.0 / SECONDS)
    assert (jd[2] + jd[3]) / 2.0 == pytest.approx(middle[1], abs=6.0 / SECONDS)
    assert row["caution"].startswith("Never look at the Sun")
