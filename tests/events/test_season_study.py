"""What a dossier is made of, against Skyfield's places on the same kernel and against other finders."""

from __future__ import annotations

import numpy as np
import polars as pl
import pytest
from skyfield.api import Star

from tests.direct import Direct, angle_rad, ecliptic_of_j2000
from wanderers import schema
from wanderers.ephemeris.bodies import Body
from wanderers.ephemeris.dates import parse_date
from wanderers.ephemeris.frames import Frame
from wanderers.ephemeris.stars import field_stars
from wanderers.ephemeris.store import TrackStore
from wanderers.ephemeris.timescales import jd_tt_from_utc
from wanderers.events.season_marks import BRIGHTEST, CLOSEST, MARK_COLUMNS
from wanderers.events.season_standing import STANDING_COLUMNS
from wanderers.events.season_stars import REACH_DEG, STAR_COLUMNS, STAR_LIMIT_MAG
from wanderers.events.season_study import MEETING_COLUMNS, Study, study_seasons
from wanderers.events.season_view import VIEW_COLUMNS, heliocentric_au
from wanderers.events.seasons import seasons

SPAN = tuple(float(jd_tt_from_utc(parse_date(year))) for year in ("2027", "2029"))
BODIES = (Body.VENUS, Body.MARS, Body.NEPTUNE)
AU_KM = 149_597_870.7


@pytest.fixture(scope="module")
def wanted(store: TrackStore) -> pl.DataFrame:
    return seasons(store, *SPAN, bodies=BODIES)


@pytest.fixture(scope="module")
def study(store: TrackStore, wanted: pl.DataFrame) -> Study:
    instants = {}
    for row in wanted.iter_rows(named=True):
        start, end = row["first_pass_start_jd_tt"], row["third_pass_end_jd_tt"]
        instants[row["season_id"]] = np.linspace(start - 5.0, end + 5.0, 500)
    return study_seasons(store, wanted, instants, SPAN)


def only(study: Study, body: Body) -> str:
    return next(season_id for season_id in study.tracks if season_id.startswith(body.value))


def heliocentric(direct: Direct, body: Body, jd_tt: np.ndarray) -> np.ndarray:
    """Skyfield's places from the Sun (of the Earth for the Sun), ecliptic of J2000 by ERFA, au, (3, n)."""
    target = direct.planets["earth"] if body is Body.SUN else direct._target(body)
    line = (target - direct.planets["sun"]).at(direct.time(jd_tt))  # type: ignore[operator]
    return ecliptic_of_j2000() @ line.position.au


def test_places_from_above_are_those_skyfield_computes_from_de440(study: Study, direct: Direct) -> None:
    for body in BODIES:
        view = study.views[only(study, body)]
        jd = view["jd_tt"].to_numpy()
        for who, of in (("earth", Body.SUN), ("planet", body)):
            ours = view.select(f"{who}_{axis}_au" for axis in "xyz").to_numpy().T
            # 1 km: rounding of times to a double and of TDB to 10 microseconds at 50 km/s.
            np.testing.assert_allclose(ours * AU_KM, heliocentric(direct, of, jd) * AU_KM, atol=1.0, rtol=0.0)


def test_lines_of_sight_point_where_skyfield_sees_the_planet(study: Study, direct: Direct) -> None:
    for body in BODIES:
        view = study.views[only(study, body)].drop_nulls("direction_deg")
        seen = direct.longitude_deg(body, view["jd_tt"].to_numpy(), Frame.J2000)
        off = (view["direction_deg"].to_numpy() - seen + 180.0) % 360.0 - 180.0
        assert np.abs(off).max() * 3600.0 < 0.01


def test_geometric_lines_and_apparent_directions_agree_to_aberration_and_light_time(study: Study) -> None:
    # Annual aberration is at most 20.5 arcseconds (Explanatory Supplement, 3rd ed., section 7.2.3); the
    # planet's own motion during the light-time adds about as much.
    for body in BODIES:
        view = study.views[only(study, body)].drop_nulls("direction_deg")
        earth, planet = (
            view.select(f"{who}_{a}_au" for a in "xyz").to_numpy() for who in ("earth", "planet")
        )
        x, y, _ = (planet - earth).T
        off = (view["direction_deg"].to_numpy() - np.degrees(np.arctan2(y, x)) + 180.0) % 360.0 - 180.0
        assert 0.0 < np.abs(off).max() * 3600.0 < 60.0


def test_first_and_fourth_lines_are_parallel_and_so_are_second_and_fifth(study: Study) -> None:
    # By the definition of the threefold span, in longitude of date; precession is under an arcminute a year.
    view = study.views[only(study, Body.MARS)].drop_nulls("mark")
    seen = dict(view.select("mark", "direction_deg").iter_rows())
    assert seen["first_pass_start"] == pytest.approx(seen["station_direct"], abs=0.02)
    assert seen["station_retrograde"] == pytest.approx(seen["third_pass_end"], abs=0.02)
    assert seen["station_retrograde"] - seen["station_direct"] == pytest.approx(19.5, abs=0.05)


def test_the_earth_goes_once_round_and_stays_between_perihelion_and_aphelion(store: TrackStore) -> None:
    # Earth's perihelion and aphelion: 0.983 and 1.017 au (Astronomical Almanac, from memory).
    jd = SPAN[0] + np.arange(365.25)
    earth = heliocentric_au(store, Body.MARS, jd)[0]
    distance = np.hypot(earth[0], earth[1])
    assert distance.min() == pytest.approx(0.983, abs=0.001)
    assert distance.max() == pytest.approx(1.017, abs=0.001)
    turned = np.unwrap(np.arctan2(earth[1], earth[0]))
    assert (np.diff(turned) > 0.0).all()
    assert np.degrees(turned[-1] - turned[0]) == pytest.approx(360.0, abs=1.2)


def test_least_distances_are_those_of_a_dense_search(
    study: Study, direct: Direct, wanted: pl.DataFrame
) -> None:
    for row in wanted.iter_rows(named=True):
        mark = study.marks.filter((pl.col("season_id") == row["season_id"]) & (pl.col("mark") == CLOSEST))
        at = float(mark["jd_tt"][0])
        jd = at + np.arange(-2.0, 2.0, 1.0 / 288.0)
        distance = direct.distance_km(Body(row["body"]), jd)
        assert abs(jd[int(np.argmin(distance))] - at) < 0.03
        assert mark["distance_au"][0] == pytest.approx(row["closest_au"], abs=1e-6)


def test_brightest_and_season_table_agree(study: Study, wanted: pl.DataFrame) -> None:
    best = study.marks.filter(pl.col("mark") == BRIGHTEST).select("season_id", "magnitude")
    both = wanted.join(best, on="season_id")
    assert both.height == wanted.height
    np.testing.assert_allclose(both["magnitude"], both["peak_magnitude"], atol=0.002)


def test_stars_passed_are_those_of_a_search_with_skyfield(study: Study, direct: Direct) -> None:
    season_id = only(study, Body.MARS)
    ours = study.of(study.stars, season_id).filter(pl.col("kind") == "star")
    marks = dict(study.of(study.marks, season_id).select("mark", "jd_tt").iter_rows())
    jd = np.arange(marks["first_pass_start"], marks["third_pass_end"], 0.05)
    mars = direct.direction(Body.MARS, jd)
    catalogue = field_stars()
    found = {}
    for number in np.flatnonzero(catalogue.v_mag <= STAR_LIMIT_MAG).tolist():
        ra, dec = np.radians(catalogue.ra_deg[number]), np.radians(catalogue.dec_deg[number])
        rough = np.array([np.cos(dec) * np.cos(ra), np.cos(dec) * np.sin(ra), np.sin(dec)])
        if np.degrees(np.arccos(np.clip(rough @ mars, -1.0, 1.0))).min() > REACH_DEG + 0.1:
            continue
        star = Star(
            ra_hours=catalogue.ra_deg[number] / 15.0,
            dec_degrees=catalogue.dec_deg[number],
            ra_mas_per_year=catalogue.pm_ra_cosdec_mas_per_year[number],
            dec_mas_per_year=catalogue.pm_dec_mas_per_year[number],
            parallax_mas=max(catalogue.parallax_mas[number], 0.0),
        )
        seen = direct.planets["earth"].at(direct.time(jd)).observe(star).apparent().xyz.au
        apart = np.degrees(angle_rad(mars, seen / np.linalg.norm(seen, axis=0)))
        if apart.min() <= REACH_DEG:
            found[catalogue.labels[number]] = (jd[int(apart.argmin())], float(apart.min()))
    assert set(found) == set(ours["star"])
    for row in ours.iter_rows(named=True):
        when, apart = found[row["star"]]
        assert row["closest_jd_tt"] == pytest.approx(when, abs=0.03)
        assert row["separation_deg"] == pytest.approx(apart, abs=1e-4)


def test_stars_and_appulses_of_the_event_table_agree(study: Study) -> None:
    met = study.meetings.filter((pl.col("kind") == "appulse") & (pl.col("body") == "mars"))
    regulus = study.stars.filter((pl.col("star") == "Regulus") & pl.col("season_id").str.starts_with("mars"))
    best = met.filter(pl.col("other") == "Regulus").sort("separation_deg")
    assert regulus["separation_deg"][0] == pytest.approx(best["separation_deg"][0], abs=1e-6)
    assert abs(regulus["closest_jd_tt"][0] - best["jd_tt"][0]) * 86_400.0 < 5.0


def test_regulus_lies_south_of_mars_in_may_2027(study: Study, direct: Direct) -> None:
    row = study.stars.filter((pl.col("star") == "Regulus") & pl.col("season_id").str.starts_with("mars")).row(
        0, named=True
    )
    # Regulus: declination of J2000 +11.967 degrees (Bright Star Catalogue, from memory).
    mars = direct.direction(Body.MARS, np.array([row["closest_jd_tt"]]))
    assert row["planet_is"] == "north"
    assert np.degrees(np.arcsin(mars[2, 0])) > 11.967


def test_standing_counts_the_better_seasons(store: TrackStore, study: Study, wanted: pl.DataFrame) -> None:
    season_id = only(study, Body.MARS)
    rows = {row["figure"]: row for row in study.of(study.standing, season_id).iter_rows(named=True)}
    ends = [rows["arc_deg"][f"searched_{end}_utc"] for end in ("from", "to")]
    low, high = (float(jd_tt_from_utc(parse_date(end))) for end in ends)
    every = seasons(store, low, high, bodies=(Body.MARS,))
    own = wanted.filter(pl.col("season_id") == season_id).row(0, named=True)
    assert rows["arc_deg"]["rank"] == 1 + every.filter(pl.col("arc_deg") > own["arc_deg"]).height
    assert rows["closest_au"]["rank"] == 1 + every.filter(pl.col("closest_au") < own["closest_au"]).height
    assert rows["arc_deg"]["of"] == every.height
    # Oppositions of Mars recur every 780 days (Explanatory Supplement, 3rd ed., table 15.8, from memory).
    assert every.height == pytest.approx((high - low) / 779.94, abs=1.5)


def test_mars_of_1995_came_as_little_close_as_that_of_2027(study: Study) -> None:
    # 2027 February is an aphelic opposition: 0.678 au, the farthest for decades (handbook list, from memory).
    row = study.standing.filter(
        pl.col("season_id").str.starts_with("mars") & (pl.col("figure") == "closest_au")
    ).row(0, named=True)
    assert row["value"] == pytest.approx(0.678, abs=0.0005)
    assert row["rank"] > 40
    assert row["better_after_utc"].startswith("2029-03")


def test_tables_have_their_columns_and_every_row_its_season(study: Study, wanted: pl.DataFrame) -> None:
    tables = (
        (study.marks, MARK_COLUMNS),
        (study.stars, STAR_COLUMNS),
        (study.meetings, MEETING_COLUMNS),
        (study.standing, STANDING_COLUMNS),
    )
    for table, columns in tables:
        assert schema.conforms(table, columns)
        assert set(table["season_id"]) <= set(wanted["season_id"])
    assert all(schema.conforms(view, VIEW_COLUMNS) for view in study.views.values())


def test_meetings_lie_within_the_run_and_concern_the_planet(study: Study) -> None:
    for season_id, track in study.tracks.items():
        own = study.of(study.meetings, season_id)
        body = season_id.partition("-")[0]
        assert own.filter((pl.col("body") != body) & (pl.col("other") != body)).is_empty()
        assert own["jd_tt"].is_between(track["jd_tt"][0], track["jd_tt"][-1]).all()


def test_no_season_makes_an_empty_study(store: TrackStore, wanted: pl.DataFrame) -> None:
    empty = study_seasons(store, wanted.head(0), {}, SPAN)
    assert empty.marks.is_empty() and empty.tracks == {}
