"""Counting turns by mean longitudes: published periods, and whole numbers where they are said to be."""

from __future__ import annotations

import numpy as np
import pytest

from wanderers import constants
from wanderers.arrays import Floats
from wanderers.ephemeris.bodies import INNER, OUTER, PLANETS, Body
from wanderers.ephemeris.frames import Frame
from wanderers.ephemeris.store import TrackStore
from wanderers.events import cycles
from wanderers.events.catalogue import Query, find_events
from wanderers.events.kinds import Batch, Kind
from wanderers.events.scene import Choice

SPAN = (2_433_282.5, 2_469_807.5)  # 1950 to 2050
CENTURY = constants.J2000_JD + np.array([0.0, constants.DAYS_PER_CENTURY])

# Days from one return to the equinox of date to the next: The Astronomical Almanac and Explanatory
# Supplement, tropical periods; Pluto: Standish's elements; all from memory, to the digits given.
TROPICAL_DAYS = {
    Body.SUN: 365.2422,
    Body.MOON: 27.32158,
    Body.MERCURY: 87.9684,
    Body.VENUS: 224.6954,
    Body.MARS: 686.930,
    Body.JUPITER: 4330.6,
    Body.SATURN: 10746.9,
    Body.URANUS: 30588.7,
    Body.NEPTUNE: 59799.9,
    Body.PLUTO: 89690.0,
}


def period_days(turns_a_century: float) -> float:
    return constants.DAYS_PER_CENTURY / turns_a_century


@pytest.mark.parametrize("body", TROPICAL_DAYS)
def test_mean_longitudes_return_after_the_published_periods(body: Body) -> None:
    degrees_a_century = cycles.MEAN_LONGITUDE[body][1]
    assert period_days(degrees_a_century / 360.0) == pytest.approx(TROPICAL_DAYS[body], rel=3e-4)


@pytest.mark.parametrize(
    ("phase", "days"),
    # Synodic, anomalistic and draconic month: Meeus, Astronomical Algorithms, chapters 49 to 51.
    [
        (cycles.lunation_phase, 29.530588),
        (lambda jd: cycles.anomalistic_phase(np.full(jd.size, 1), jd), 27.554549),
        (lambda jd: cycles.draconic_phase(np.full(jd.size, 1), jd), 27.212220),
        (cycles.solar_year, 365.24219),
        (lambda jd: cycles.anomalistic_phase(np.zeros(jd.size, dtype=np.int64), jd), 365.25964),
    ],
    ids=["synodic month", "anomalistic month", "draconic month", "tropical year", "anomalistic year"],
)
def test_months_and_years_are_the_published_ones(phase: object, days: float) -> None:
    turns = np.diff(phase(CENTURY))[0]  # type: ignore[operator]
    assert period_days(float(turns)) == pytest.approx(days, rel=1e-6)


def test_new_moon_of_january_2000_is_whole() -> None:
    # Meeus, Astronomical Algorithms, equation 49.1: mean new moon JDE 2451550.09766.
    phase = cycles.lunation_phase(np.array([2_451_550.09766]))
    assert phase[0] == pytest.approx(round(phase[0]), abs=1e-3)


# ---- whole numbers at the events that are counted by them


@pytest.fixture(scope="module")
def batches(store: TrackStore) -> list[Batch]:
    kinds = {
        Kind.OPPOSITION,
        Kind.SOLAR_CONJUNCTION,
        Kind.PERIHELION,
        Kind.APHELION,
        Kind.NODE,
        Kind.PERIGEE,
        Kind.MOON_PHASE,
        Kind.SEASON_POINT,
    }
    query = Query(*SPAN, frozenset(kinds), frozenset({Frame.ECLIPTIC}), Choice(stars_for=()))
    return [found.batch for found in find_events(store, query)]


def events(batches: list[Batch], kind: Kind, bodies: tuple[Body, ...], detail: str = "") -> Batch:
    (batch,) = (one for one in batches if one.kind is kind)
    own = np.isin(batch.body, [body.order for body in bodies])
    word = np.array(batch.details)[batch.detail]
    return batch.chosen(own & ((word == detail) | (detail == "")))


def fraction(phase: Floats) -> Floats:
    """Distance from the nearest whole number."""
    return np.asarray(phase - np.round(phase))


def test_oppositions_and_inferior_conjunctions_are_near_whole_synodic_turns(batches: list[Batch]) -> None:
    # Mean longitudes run up to an equation of the centre ahead: 28 degrees for Pluto, 24 for Mercury.
    opposition = events(batches, Kind.OPPOSITION, OUTER)
    inferior = events(batches, Kind.SOLAR_CONJUNCTION, INNER, "inferior")
    for batch in (opposition, inferior):
        assert batch.jd.size > 100
        assert np.abs(fraction(cycles.synodic_phase(batch.body, batch.jd))).max() < 0.15


@pytest.mark.parametrize("body", PLANETS[:7])
def test_synodic_rounds_follow_each_other_without_gaps(batches: list[Batch], body: Body) -> None:
    batch = (
        events(batches, Kind.SOLAR_CONJUNCTION, (body,), "inferior")
        if body in INNER
        else events(batches, Kind.OPPOSITION, (body,))
    )
    rounds = np.round(cycles.synodic_phase(batch.body, batch.jd))
    assert (np.diff(rounds) == 1.0).all()


def test_perihelia_are_near_whole_anomalistic_turns(batches: list[Batch]) -> None:
    batch = events(batches, Kind.PERIHELION, PLANETS)
    assert np.abs(fraction(cycles.anomalistic_phase(batch.body, batch.jd))).max() < 0.12
    batch = events(batches, Kind.APHELION, PLANETS)
    assert np.abs(fraction(cycles.anomalistic_phase(batch.body, batch.jd) - 0.5)).max() < 0.12


def test_the_moons_events_are_near_whole_turns_of_their_own(batches: list[Batch]) -> None:
    perigee = events(batches, Kind.PERIGEE, (Body.MOON,))
    assert np.abs(fraction(cycles.anomalistic_phase(perigee.body, perigee.jd))).max() < 0.15
    new = events(batches, Kind.MOON_PHASE, (Body.MOON,), "new")
    assert np.abs(fraction(cycles.lunation_phase(new.jd))).max() < 0.05
    node = events(batches, Kind.NODE, (Body.MOON,), "ascending")
    assert np.abs(fraction(cycles.draconic_phase(node.body, node.jd))).max() < 0.05


def test_march_equinoxes_are_near_whole_years(batches: list[Batch]) -> None:
    equinox = events(batches, Kind.SEASON_POINT, (Body.SUN,), "equinox_march")
    assert np.abs(fraction(cycles.solar_year(equinox.jd))).max() < 0.01


# ---- encounters


def test_an_encounter_is_counted_once_a_lap() -> None:
    # Jupiter laps Saturn every 19.86 years (published, e.g. Meeus, Morsels; from memory).
    jd = constants.J2000_JD + np.array([0.0, 100.0 * 19.86 * constants.DAYS_PER_JULIAN_YEAR])
    first, second = np.full(2, Body.JUPITER.order), np.full(2, Body.SATURN.order)
    assert np.diff(cycles.encounter_phase(first, second, jd, np.zeros(2)))[0] == pytest.approx(
        100.0, abs=0.05
    )


def test_mercury_and_venus_which_never_lap_each_other_are_counted_by_mercurys_rounds() -> None:
    jd = constants.J2000_JD + np.linspace(0.0, 3000.0, 50)
    mercury, venus = np.full(50, Body.MERCURY.order), np.full(50, Body.VENUS.order)
    np.testing.assert_array_equal(
        cycles.encounter_phase(mercury, venus, jd, np.zeros(50)), cycles.synodic_phase(mercury, jd)
    )


def test_a_star_is_lapped_after_a_sidereal_period() -> None:
    # Sidereal month 27.321662 days, of Mars 686.980 days (The Astronomical Almanac, from memory).
    for body, days in ((Body.MOON, 27.321662), (Body.MARS, 686.980)):
        jd = constants.J2000_JD + np.array([0.0, 1000.0 * days])
        bodies, stars = np.full(2, body.order), np.full(2, 30)
        turns = np.diff(cycles.encounter_phase(bodies, stars, jd, np.full(2, 123.0)))[0]
        assert turns == pytest.approx(1000.0, abs=0.02)


def test_a_round_among_the_constellations_grows_by_one_a_turn() -> None:
    # The Sun on its mean way: the number changes where the round begins and nowhere else.
    jd = constants.J2000_JD + np.arange(0.0, 3652.0)
    sun = np.zeros(jd.size, dtype=np.int64)
    longitude = (cycles.solar_year(jd) * 360.0) % 360.0
    rounds = cycles.constellation_round(sun, jd, longitude)
    steps = np.diff(rounds)
    assert set(steps.tolist()) == {0, 1}
    assert int(steps.sum()) == 10
    at = longitude[1:][steps == 1]
    np.testing.assert_allclose(at, cycles.SEAM_DEG, atol=1.5)
