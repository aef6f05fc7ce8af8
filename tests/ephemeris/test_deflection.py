"""Bending of light by the Sun: ERFA's routine, the classical figures, and what happens behind the disc."""

from __future__ import annotations

import erfa
import numpy as np
import pytest

from wanderers import constants
from wanderers.arrays import Floats
from wanderers.ephemeris.deflection import LIMITER, deflection, deflection_rate

ARCSEC_PER_RAD = np.degrees(1.0) * 3600.0
RNG = np.random.default_rng(3)


def scene(count: int = 500) -> tuple[Floats, Floats]:
    """Bodies at random around the Sun, and the Sun, as the Earth sees them, au, shape (3, n) each."""
    sun = RNG.normal(size=(3, count))
    sun *= RNG.uniform(0.98, 1.02, count) / np.linalg.norm(sun, axis=0)
    heliocentric = RNG.normal(size=(3, count))
    heliocentric *= 10.0 ** RNG.uniform(-0.5, 1.7, count) / np.linalg.norm(heliocentric, axis=0)
    return sun + heliocentric, sun


def unit(vectors: Floats) -> Floats:
    return np.asarray(vectors / np.linalg.norm(vectors, axis=0))


def by_erfa(position: Floats, sun: Floats, from_sun: Floats) -> Floats:
    """The shift of a direction by ERFA ld; its limiter as ldsun sets it."""
    distance = np.linalg.norm(sun, axis=0)
    seen = unit(position)
    limiter = LIMITER / np.maximum(distance**2, 1.0)
    bent = erfa.ld(1.0, seen.T, unit(from_sun).T, unit(-sun).T, distance, limiter)
    return np.asarray(bent.T - seen)


def test_bodies_are_bent_as_erfa_says() -> None:
    position, sun = scene()
    expected = by_erfa(position, sun, position - sun)
    # ERFA's Schwarzschild radius of the Sun has ten digits.
    np.testing.assert_allclose(deflection(position, sun), expected, rtol=1e-8, atol=1e-16)


def test_stars_are_bent_as_erfa_says() -> None:
    position, sun = scene()
    seen = unit(position)
    distance = np.linalg.norm(sun, axis=0)
    expected = erfa.ldsun(seen.T, unit(-sun).T, distance).T - seen
    np.testing.assert_allclose(deflection(seen, sun, at_infinity=True), expected, rtol=1e-8, atol=1e-16)


def elongated(elongation_deg: float, distance_au: float) -> tuple[Floats, Floats]:
    angle = np.radians(elongation_deg)
    sun = np.array([[1.0], [0.0], [0.0]])
    return distance_au * np.array([[np.cos(angle)], [np.sin(angle)], [0.0]]), sun


@pytest.mark.parametrize(
    ("elongation_deg", "arcsec"),
    # A star at the limb (959.63 arcseconds) and a right angle from the Sun: 1.75 arcseconds (Einstein 1916;
    # Dyson, Eddington and Davidson 1920) and 4.07 milliarcseconds (Hipparcos catalogue, vol. 1, section
    # 1.2.8); both from memory.
    [(959.63 / 3600.0, 1.75), (90.0, 0.00407)],
)
def test_starlight_is_bent_by_the_classical_angles(elongation_deg: float, arcsec: float) -> None:
    star, sun = elongated(elongation_deg, 1.0)
    shift = deflection(star, sun, at_infinity=True) * ARCSEC_PER_RAD
    assert np.linalg.norm(shift) == pytest.approx(arcsec, rel=2e-3)


def test_images_move_away_from_the_sun() -> None:
    position, sun = scene()
    along = np.einsum("in,in->n", deflection(position, sun), unit(sun))
    assert (along < 0.0).all()


def test_a_body_much_nearer_than_the_sun_is_hardly_bent() -> None:
    moon, sun = elongated(10.0, 0.0026)
    assert np.linalg.norm(deflection(moon, sun)) * ARCSEC_PER_RAD < 1e-4


def test_shift_is_at_a_right_angle_to_the_direction() -> None:
    position, sun = scene()
    along = np.einsum("in,in->n", deflection(position, sun), unit(position))
    np.testing.assert_allclose(along, 0.0, atol=1e-17)


@pytest.mark.parametrize("arcsec_from_centre", [0.0, 0.1, 5.0, 30.0, 200.0])
def test_behind_the_middle_of_the_disc_the_shift_falls_to_nothing(arcsec_from_centre: float) -> None:
    # A point mass would throw the image about by 1.75 times 960 over the distance from the centre; nobody
    # sees that. It is limited from some 290 arcseconds inwards and vanishes with the distance.
    body, sun = elongated(arcsec_from_centre / 3600.0, 30.0)
    shift = np.linalg.norm(deflection(body, sun)) * ARCSEC_PER_RAD
    assert shift <= 1.75 * 960.0 / 290.0 * arcsec_from_centre / 200.0


def test_outside_the_disc_nothing_is_limited() -> None:
    body, sun = elongated(0.262, 30.0)  # the Sun's least semidiameter, at aphelion
    from_sun_to_body = unit(body - sun)
    closeness = 1.0 + (from_sun_to_body * unit(-sun)).sum()
    assert closeness > 5.0 * LIMITER


def test_rate_is_the_derivative_along_both_motions() -> None:
    position, sun = scene(200)
    motions = RNG.normal(scale=0.01, size=(2, 3, 200))
    step = 1e-4

    def at(days: float) -> Floats:
        return deflection(position + days * motions[0], sun + days * motions[1])

    found = deflection_rate(np.stack([position, motions[0]]), np.stack([sun, motions[1]]))
    expected = (at(step) - at(-step)) / (2.0 * step)
    np.testing.assert_allclose(found, expected, rtol=1e-2, atol=1e-13)


def test_strength_is_that_of_the_suns_mass() -> None:
    # 2 GM/c^2 in au: ERFA's ERFA_SRS, the Schwarzschild radius of the Sun, 1.97412574336e-8 au.
    from wanderers.ephemeris.deflection import STRENGTH_AU

    assert STRENGTH_AU == pytest.approx(1.974_125_743_36e-8, rel=1e-8)
    assert constants.SPEED_OF_LIGHT_KM_PER_S == 299_792.458
