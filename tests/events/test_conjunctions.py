"""Conjunctions: equal longitude or right ascension at the instants found, by Skyfield."""

from __future__ import annotations

import numpy as np
import polars as pl
import pytest
from skyfield.api import Star
from skyfield.framelib import ecliptic_frame, true_equator_and_equinox_of_date

from tests.direct import SUN_ALONE, Direct, wrapped_deg
from wanderers.arrays import Floats
from wanderers.ephemeris.bodies import BODIES, Body
from wanderers.ephemeris.frames import Frame
from wanderers.ephemeris.stars import ecliptic_stars
from wanderers.ephemeris.store import TrackStore
from wanderers.events.almanac import almanac
from wanderers.events.catalogue import Query
from wanderers.events.kinds import Kind
from wanderers.events.scene import Choice

SPAN = (2_458_849.5, 2_461_041.5)  # 2020 to 2026
FRAMES = (Frame.ECLIPTIC, Frame.EQUATOR)
SLOW = [body.value for body in BODIES[5:]]


@pytest.fixture(scope="module")
def table(store: TrackStore) -> pl.DataFrame:
    choice = Choice(stars_for=(Body.MOON, Body.VENUS, Body.JUPITER))
    return almanac(store, Query(*SPAN, frozenset({Kind.CONJUNCTION}), frozenset(FRAMES), choice))


def lead_deg(direct: Direct, one: Body, two: Body, jd: Floats, frame: Frame) -> Floats:
    return wrapped_deg(direct.longitude_deg(one, jd, frame) - direct.longitude_deg(two, jd, frame))


@pytest.mark.parametrize("frame", FRAMES)
def test_one_passes_the_other_within_the_promised_seconds(
    direct: Direct, table: pl.DataFrame, frame: Frame
) -> None:
    planets = table.filter(pl.col("frame") == frame.value, pl.col("other").is_in([*Body]))
    assert planets.height > 500
    for (one, two), rows in planets.group_by("body", "other"):
        jd = rows["jd_tt"].to_numpy()
        promised_days = (5.0 if one in SLOW and two in SLOW else 2.0) / 86_400.0
        before, after = (
            lead_deg(direct, Body(one), Body(two), jd + side * promised_days, frame) for side in (-1.0, 1.0)
        )
        assert (np.sign(before) == -np.sign(after)).all(), (one, two)
        assert np.abs(before).max() < 1e-3, (one, two)


@pytest.mark.parametrize("name", ["Regulus", "Spica", "Aldebaran"])
@pytest.mark.parametrize("frame", FRAMES)
def test_bodies_pass_stars_within_the_promised_seconds(
    direct: Direct, table: pl.DataFrame, frame: Frame, name: str
) -> None:
    catalogue = ecliptic_stars()
    place = catalogue.name.index(name)
    star = Star(
        ra_hours=catalogue.ra_deg[place] / 15.0,
        dec_degrees=catalogue.dec_deg[place],
        ra_mas_per_year=catalogue.pm_ra_cosdec_mas_per_year[place],
        dec_mas_per_year=catalogue.pm_dec_mas_per_year[place],
        parallax_mas=catalogue.parallax_mas[place],
    )
    theirs = ecliptic_frame if frame is Frame.ECLIPTIC else true_equator_and_equinox_of_date
    own = table.filter(pl.col("frame") == frame.value, pl.col("other") == name)
    assert own.height > 75  # the Moon, every 27.3 days

    def ahead_deg(body: str, jd: Floats) -> Floats:
        seen = direct.planets["earth"].at(direct.time(jd)).observe(star).apparent(deflectors=SUN_ALONE)
        return wrapped_deg(direct.longitude_deg(Body(body), jd, frame) - seen.frame_latlon(theirs)[1].degrees)

    for (body,), rows in own.group_by("body"):
        # A star's place is good to a milliarcsecond, which Jupiter near a station takes minutes to cover.
        margin_days = (2.0 if body == "moon" else 60.0) / 86_400.0
        before, after = (ahead_deg(body, rows["jd_tt"].to_numpy() + s * margin_days) for s in (-1.0, 1.0))
        assert (np.sign(before) == -np.sign(after)).all()


def test_the_sun_is_in_no_conjunction(table: pl.DataFrame) -> None:
    assert "sun" not in set(table["body"]) | set(table["other"])


def test_pairs_are_written_in_the_bodies_order(table: pl.DataFrame) -> None:
    order = {body.value: body.order for body in BODIES}
    pairs = table.filter(pl.col("other").is_in(list(order)))
    assert all(order[one] < order[two] for one, two in zip(pairs["body"], pairs["other"], strict=True))


def test_all_pairs_of_the_moon_and_planets_but_the_slowest_met(table: pl.DataFrame) -> None:
    # In six years Jupiter met Saturn, Neptune and Pluto, and Saturn met Pluto (2020; e.g. the Almanac).
    met = {(one, two) for one, two in zip(table["body"], table["other"], strict=True) if two in [*Body]}
    quick = [body.value for body in BODIES[1:5]]
    for number, one in enumerate(quick):
        assert {(one, body.value) for body in BODIES[2 + number :]} <= met
    assert {("jupiter", "saturn"), ("jupiter", "neptune"), ("jupiter", "pluto"), ("saturn", "pluto")} <= met


def test_separation_is_the_angle_at_that_instant(direct: Direct, table: pl.DataFrame) -> None:
    own = table.filter(body="venus", other="mars")
    expected = direct.separation_deg(Body.VENUS, Body.MARS, own["jd_tt"].to_numpy())
    np.testing.assert_allclose(own["separation_deg"], expected, atol=2e-8)


def test_only_frames_that_were_asked_for_are_listed(store: TrackStore, table: pl.DataFrame) -> None:
    choice = Choice(stars_for=())
    for frames in ({Frame.ECLIPTIC}, {Frame.EQUATOR}, {Frame.J2000}):
        found = almanac(store, Query(*SPAN, frozenset({Kind.CONJUNCTION}), frozenset(frames), choice))
        wanted = {frame.value for frame in frames & set(FRAMES)}
        same = table.filter(pl.col("frame").is_in(list(wanted)), pl.col("other").is_in([*Body]))
        assert found["event_id"].to_list() == same["event_id"].to_list()
