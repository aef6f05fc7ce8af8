"""Everything up at one moment, against skyfield; who stands next to whom, and on which side."""

from __future__ import annotations

from typing import Any

import numpy as np
import polars as pl
import pytest
from skyfield.api import load

from tests.site.places import CAPE, HILL, PLATEAU, RIDGE, skyfield_place
from wanderers.ephemeris.bodies import BODIES, Body
from wanderers.ephemeris.dates import parse_date
from wanderers.ephemeris.store import TrackStore
from wanderers.ephemeris.timescales import jd_tt_from_utc
from wanderers.errors import SpanError
from wanderers.site import columns
from wanderers.site.moment import bright_stars, everything_up
from wanderers.site.pairs import PLACEMENTS
from wanderers.site.places import HorizonProfile, Site
from wanderers.site.rules import Rules

SYSTEMS = ("mars", "jupiter", "saturn", "uranus", "neptune")
MOMENTS = ("2027-03-05T19:00", "2027-03-06T04:30", "2027-08-15T11:00", "2027-12-21T22:15")


def jd_of(utc: str) -> float:
    return float(jd_tt_from_utc(parse_date(utc)))


def apparent(jpl: Any, site: Site, jd: float, name: str) -> Any:
    observer = jpl["earth"] + skyfield_place(site)
    target = jpl[f"{name} barycenter" if name in SYSTEMS else name]
    return observer.at(load.timescale(builtin=True).tt_jd(jd)).observe(target).apparent()


@pytest.mark.parametrize("site", [HILL, RIDGE, CAPE, PLATEAU], ids=lambda site: site.name)
@pytest.mark.parametrize("utc", MOMENTS)
def test_all_bodies_up_are_listed_where_skyfield_sees_them(
    store: TrackStore, jpl: Any, site: Site, utc: str
) -> None:
    jd = jd_of(utc)
    table = everything_up(store, site, jd)
    assert table.columns == list(columns.MOMENT_COLUMNS)
    listed = {row["body"]: row for row in table.iter_rows(named=True) if row["kind"] != "star"}
    for body in BODIES[:9]:
        altitude, azimuth, _ = apparent(jpl, site, jd, body.value).altaz()
        if body.value in listed:
            row = listed[body.value]
            assert row["airless_altitude_deg"] == pytest.approx(altitude.degrees, abs=1e-5)
            assert row["azimuth_deg"] == pytest.approx(azimuth.degrees, abs=1e-4)
        # Half a degree of refraction lifts what is just below the horizon.
        assert (body.value in listed) == (altitude.degrees > -0.5) or abs(altitude.degrees + 0.5) < 0.2


def test_stars_of_first_magnitude_are_listed_besides(store: TrackStore) -> None:
    table = everything_up(store, HILL, jd_of(MOMENTS[0]))
    stars = table.filter(pl.col("kind") == "star")
    assert {"Sirius", "Capella", "Rigel", "Procyon", "Betelgeuse", "Aldebaran"} <= set(stars["body"])
    assert (stars["magnitude"] <= 1.5).all()


def test_the_brightest_come_first(store: TrackStore) -> None:
    dimmed = everything_up(store, HILL, jd_of(MOMENTS[0]))["dimmed_magnitude"].to_list()
    assert dimmed == sorted(dimmed) and len(dimmed) > 10


def test_neighbours_within_ten_degrees_are_named_with_distance_and_side(store: TrackStore, jpl: Any) -> None:
    # Both early in March 2027: Mars and Jupiter in Leo.
    jd = jd_of(MOMENTS[0])
    table = everything_up(store, HILL, jd)
    said = table.filter(pl.col("body") == "mars")["neighbours"][0]
    mars, jupiter = (apparent(jpl, HILL, jd, name) for name in ("mars", "jupiter"))
    degrees = float(mars.separation_from(jupiter).degrees)
    (mine,) = [part for part in said.split("; ") if part.startswith("Jupiter")]
    assert mine.startswith(f"Jupiter {degrees:.1f} degrees ")
    higher = jupiter.altaz()[0].degrees > mars.altaz()[0].degrees
    righter = jupiter.altaz()[1].degrees > mars.altaz()[1].degrees
    words = f"to the {'upper' if higher else 'lower'} {'right' if righter else 'left'}"
    assert mine.endswith(words)


def test_neighbours_mirror_each_other(store: TrackStore) -> None:
    for site, utc in ((HILL, MOMENTS[0]), (RIDGE, "2027-03-05T13:00")):
        table = everything_up(store, site, jd_of(utc))
        words = {row["body"]: row["neighbours"] or "" for row in table.iter_rows(named=True)}
        one = next(part for part in words["mars"].split("; ") if part.startswith("Jupiter"))
        other = next(part for part in words["jupiter"].split("; ") if part.startswith("Mars"))
        here = next(i for i, placement in enumerate(PLACEMENTS) if one.endswith(f"degrees {placement}"))
        there = next(i for i, placement in enumerate(PLACEMENTS) if other.endswith(f"degrees {placement}"))
        assert min((here - there) % 8, (there - here) % 8) >= 3
        assert one.split()[1] == other.split()[1]


def test_the_southern_sky_stands_on_its_head(store: TrackStore) -> None:
    # One moment, seen from both halves of the Earth: what is above there is below here.
    jd = jd_of("2027-03-05T13:00")
    far_north = Site("north", 40.0, 140.0, 0.0, "UTC")
    far_south = Site("south", -40.0, 140.0, 0.0, "UTC")
    sides = []
    for site in (far_north, far_south):
        table = everything_up(store, site, jd)
        said = table.filter(pl.col("body") == "mars")["neighbours"][0]
        sides.append(
            next(part for part in said.split("; ") if part.startswith("Jupiter")).split("degrees ")[1]
        )
    assert [("right" in side, "left" in side) for side in sides] == [(True, False), (False, True)]


def test_the_nearest_bright_star_is_the_nearest(store: TrackStore, jpl: Any) -> None:
    jd = jd_of(MOMENTS[0])
    table = everything_up(store, HILL, jd)
    row = table.filter(pl.col("body") == "mars").row(0, named=True)
    assert row["nearest_star"] == "Regulus"
    assert row["nearest_star_separation_deg"] == pytest.approx(6.04, abs=0.05)  # by the chart of March 2027


def test_close_pairs_of_stars_count_once() -> None:
    labels = bright_stars().labels
    assert "Rigil Kentaurus" in labels and "Toliman" not in labels
    assert (bright_stars().v_mag <= 2.5).all()


def test_by_day_everything_carries_the_caution(store: TrackStore) -> None:
    noon = everything_up(store, HILL, jd_of("2027-06-21T11:00"))
    assert noon["body"][0] == "sun"
    assert noon["caution"].null_count() == 0
    assert "filter" in noon["caution"][0]
    others = noon.filter(pl.col("body") != "sun")
    assert (
        others["caution"]
        .str.contains("The Sun is up: no binoculars or telescope, except after sunset at ")
        .all()
    )
    assert (noon.filter(pl.col("kind") == "star")["verdict"] == "not_visible").all()


def test_at_night_only_what_is_near_the_sun_carries_it(store: TrackStore) -> None:
    night = everything_up(store, HILL, jd_of("2027-03-05T19:00"))
    near = night["elongation_deg"] < 20.0
    assert (night["caution"].is_not_null() == near).all()


def test_local_time_carries_the_offset(store: TrackStore) -> None:
    table = everything_up(store, RIDGE, jd_of("2027-01-15T10:00"))
    assert table["local"].unique().to_list() == ["2027-01-15T21:00:00.000+11:00"]


def test_hills_and_a_least_altitude_hide(store: TrackStore) -> None:
    jd = jd_of(MOMENTS[0])
    wall = HorizonProfile(((0.0, 40.0), (180.0, 0.0), (181.0, 0.0), (359.0, 40.0)))
    walled = Site("walled", HILL.latitude_deg, HILL.longitude_deg, HILL.elevation_m, HILL.zone, wall)
    seen = everything_up(store, walled, jd)
    assert (seen["altitude_deg"] > wall.altitude_deg(seen["azimuth_deg"].to_numpy())).all()
    assert seen.height < everything_up(store, HILL, jd).height
    assert (everything_up(store, HILL, jd, rules=Rules(min_altitude_deg=30.0))["altitude_deg"] > 30.0).all()


def test_bodies_may_be_chosen(store: TrackStore) -> None:
    table = everything_up(store, HILL, jd_of(MOMENTS[0]), [Body.JUPITER, Body.PLUTO])
    assert set(table.filter(pl.col("kind") != "star")["body"]) <= {"jupiter", "pluto"}


def test_kinds_are_named(store: TrackStore) -> None:
    table = everything_up(store, HILL, jd_of("2027-06-15T10:00"))
    kinds = dict(zip(table["body"], table["kind"], strict=True))
    assert kinds["sun"] == "sun" and kinds["venus"] == "planet" and kinds["Capella"] == "star"


def test_outside_the_kernel_nothing_is_guessed(store: TrackStore) -> None:
    with pytest.raises(SpanError, match="DE440"):
        everything_up(store, HILL, jd_of("2700-01-01"))


def test_the_great_conjunction_is_one_neighbour_a_tenth_of_a_degree_away(store: TrackStore) -> None:
    # 2020-12-21: Jupiter and Saturn 6 arcminutes apart (published everywhere; 6.1 arcminutes, from memory).
    table = everything_up(store, HILL, jd_of("2020-12-21T16:30"))
    said = table.filter(pl.col("body") == "jupiter")["neighbours"][0]
    assert said.startswith("Saturn 0.1 degrees")
    assert np.isfinite(table["altitude_deg"].to_numpy()).all()
