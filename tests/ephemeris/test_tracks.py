"""Tracks against direct evaluation with Skyfield, at random instants of some blocks or of the whole kernel.

The promise is 1 milliarcsecond in apparent direction, 2 within a degree of the Sun (outside its disc), and
1 km in distance. The limits here are much closer to what was measured over the whole of DE440 (0.004 and 0.2
milliarcseconds, 20 m), so that a fault that eats up the margin shows before the promise is broken.
"""

from __future__ import annotations

import numpy as np
import pytest

from tests.direct import MAS_PER_RAD, SEMIDIAMETER_OF_SUN_DEG, Direct, angle_rad, wrapped_deg
from wanderers import constants
from wanderers.arrays import Floats
from wanderers.ephemeris.blocks import BLOCK_DAYS, block_start_jd
from wanderers.ephemeris.bodies import BODIES, OUTER, Body
from wanderers.ephemeris.frames import Frame
from wanderers.ephemeris.sky import Sky
from wanderers.ephemeris.store import SLACK_DAYS, TrackStore
from wanderers.ephemeris.tracks import EARTH_DISTANCE, POSITION

DIRECTION_MAS = 0.02
NEAR_SUN_MAS = 0.5
DISTANCE_KM = 0.1
BLOCKS_OF_DE440 = (0, 17, 18, 43)
"""Both ends, where the kernel cuts blocks short, and the years from 1975 to 2026."""
INSTANTS = 1000


def instants(store: TrackStore, index: int, count: int = INSTANTS) -> Floats:
    """Random instants of a block, its usable ends among them."""
    low, high = store.span_jd
    start = max(block_start_jd(index), low)
    end = min(block_start_jd(index + 1), high)
    inside = np.random.default_rng(index).uniform(start, end, count)
    return np.sort(np.concatenate([[start, np.nextafter(end, start)], inside]))


def sky_over(store: TrackStore, jd: Floats) -> Sky:
    return Sky(store.tracks(float(jd[0]), float(jd[-1])))


def rows(body: Body, jd: Floats) -> np.ndarray:
    return np.full(jd.size, body.order)


def assert_like_skyfield(store: TrackStore, direct: Direct, index: int, body: Body) -> None:
    jd = instants(store, index)
    expected = direct.direction(body, jd)
    sky = sky_over(store, jd)
    away_mas = angle_rad(sky.apparent(rows(body, jd), jd)[0], expected) * MAS_PER_RAD
    elongation_deg = np.degrees(angle_rad(expected, direct.direction(Body.SUN, jd)))
    if body is Body.SUN:
        elongation_deg = np.full(jd.size, 180.0)
    assert away_mas[elongation_deg > 1.0].max() < DIRECTION_MAS
    near = (elongation_deg > SEMIDIAMETER_OF_SUN_DEG) & (elongation_deg <= 1.0)
    assert away_mas[near].max(initial=0.0) < NEAR_SUN_MAS
    distance_km = sky.earth_distance_au(rows(body, jd), jd)[0] * constants.AU_KM
    assert np.abs(distance_km - direct.distance_km(body, jd)).max() < DISTANCE_KM


@pytest.mark.parametrize("body", BODIES)
@pytest.mark.parametrize("index", BLOCKS_OF_DE440)
def test_directions_and_distances_are_skyfields(
    store: TrackStore, direct: Direct, index: int, body: Body
) -> None:
    assert_like_skyfield(store, direct, index, body)


@pytest.mark.long
@pytest.mark.parametrize("body", BODIES)
def test_directions_and_distances_are_skyfields_over_the_whole_kernel(
    store: TrackStore, direct: Direct, body: Body
) -> None:
    for index in store.block_indices(*store.span_jd):
        assert_like_skyfield(store, direct, index, body)


@pytest.mark.parametrize("body", [Body.MERCURY, Body.VENUS, Body.JUPITER, Body.NEPTUNE])
def test_next_to_the_sun_directions_are_skyfields(store: TrackStore, direct: Direct, body: Body) -> None:
    # Every instant of some years at which the planet stands within a degree of the Sun, outside its disc.
    jd = 2_444_239.5 + np.arange(0.0, 16_000.0, 0.1 if body is Body.MERCURY else 0.02)
    sky = sky_over(store, jd)
    sun = sky.apparent(rows(Body.SUN, jd), jd)[0]
    elongation_deg = np.degrees(angle_rad(sky.apparent(rows(body, jd), jd)[0], sun))
    near = jd[(elongation_deg < 1.0) & (elongation_deg > SEMIDIAMETER_OF_SUN_DEG)]
    assert near.size > 50
    away = angle_rad(sky.apparent(rows(body, near), near)[0], direct.direction(body, near)) * MAS_PER_RAD
    assert away.max() < NEAR_SUN_MAS


@pytest.mark.parametrize("frame", list(Frame))
@pytest.mark.parametrize("body", [Body.SUN, Body.MOON, Body.MERCURY, Body.NEPTUNE])
def test_places_in_every_frame_are_skyfields(
    store: TrackStore, direct: Direct, body: Body, frame: Frame
) -> None:
    jd = instants(store, 18)
    sky = sky_over(store, jd)
    longitude, latitude = direct.place_deg(body, jd, frame)
    found = sky.longitude_deg(rows(body, jd), jd, frame)[0]
    outside = np.degrees(angle_rad(direct.direction(body, jd), direct.direction(Body.SUN, jd))) > 1.0
    outside |= body is Body.SUN
    # The Moon and the planets stay within 30 degrees of both equators: longitudes are as good as directions.
    np.testing.assert_allclose(wrapped_deg(found - longitude)[outside] * 3.6e6, 0.0, atol=0.05)
    found = sky.latitude_deg(rows(body, jd), jd, frame)
    np.testing.assert_allclose((found - latitude)[outside] * 3.6e6, 0.0, atol=0.05)


@pytest.mark.parametrize("body", BODIES)
def test_grids_are_evaluated_like_scattered_instants(store: TrackStore, body: Body) -> None:
    jd = block_start_jd(18) + np.arange(-40.0, 400.0, 1.7)  # across the seam of two blocks
    tracks = store.tracks(float(jd[0]), float(jd[-1]))
    for components in (POSITION, EARTH_DISTANCE):
        grid = tracks.evaluate_grid(body, jd, components, order=2)
        scattered = tracks.evaluate(body, jd, components, order=2)
        np.testing.assert_allclose(grid, scattered, rtol=1e-11, atol=1e-11)


def test_one_body_an_instant_is_evaluated_like_each_alone(store: TrackStore) -> None:
    jd = instants(store, 18, 60)
    tracks = store.tracks(float(jd[0]), float(jd[-1]))
    numbers = np.arange(jd.size) % len(BODIES)
    each = tracks.evaluate_each(numbers, jd, POSITION, order=2)
    for body in BODIES:
        own = numbers == body.order
        np.testing.assert_allclose(
            each[..., own], tracks.evaluate(body, jd[own], POSITION, 2), rtol=1e-12, atol=1e-15
        )


@pytest.mark.parametrize("body", BODIES)
def test_seams_of_blocks_are_seamless(store: TrackStore, body: Body) -> None:
    seam = np.array([block_start_jd(18)])
    tracks = store.tracks(float(seam[0]) - 1.0, float(seam[0]) + 1.0)
    before, after = (tracks.evaluate(body, at, POSITION, 1) for at in (np.nextafter(seam, 0.0), seam))
    # A Julian date's last digit, 40 microseconds, is 1.2 km of the 30 km/s between Earth and planets.
    assert np.abs(before[0] - after[0]).max() * constants.AU_KM < 3.0
    assert np.abs(before[1] - after[1]).max() < 1e-8


def test_a_span_across_blocks_joins_them(store: TrackStore) -> None:
    seam = block_start_jd(18)
    tracks = store.tracks(seam - 10.0, seam + 10.0)
    # What is asked for and a little beyond, not all of two blocks.
    assert seam - 10.0 - 90.0 < tracks.start_jd <= seam - 10.0 - SLACK_DAYS
    assert seam + 10.0 + SLACK_DAYS <= tracks.end_jd < seam + 10.0 + 90.0
    whole = store.tracks(block_start_jd(17), block_start_jd(19) - 1.0)
    at = np.linspace(seam - 10.0, seam + 10.0, 101)
    for body in BODIES:
        ours, expected = (some.evaluate(body, at, POSITION, 1) for some in (tracks, whole))
        np.testing.assert_array_equal(ours, expected)


def test_tracks_end_where_the_kernel_ends(store: TrackStore) -> None:
    low, high = store.span_jd
    assert store.tracks(low, low + 1.0).start_jd == pytest.approx(low, abs=1e-9)
    assert store.tracks(high - 1.0, high).end_jd == pytest.approx(high, abs=1e-9)
    assert store.tracks(low - 5000.0, low - 4000.0).start_jd == pytest.approx(low, abs=1e-9)


def test_every_block_begins_where_the_one_before_ends() -> None:
    assert block_start_jd(1) - block_start_jd(0) == BLOCK_DAYS
    assert BLOCK_DAYS % 32.0 == 0.0  # whole granules of the kernel, inside which JPL's series are smooth


# ---- would the limits notice?


@pytest.mark.parametrize("body", [Body.SUN, Body.MERCURY, *OUTER])
def test_limits_are_far_below_what_any_correction_is_worth(
    store: TrackStore, direct: Direct, body: Body
) -> None:
    """Leaving out or spoiling a correction moves directions by far more than is allowed."""
    jd = instants(store, 18)
    earth = direct.planets["earth"].at(direct.time(jd))
    target = direct.planets[f"{body} barycenter" if body in OUTER else body.value]
    right = direct.direction(body, jd)

    def worst_mas(wrong: Floats) -> float:
        return float(angle_rad(wrong / np.linalg.norm(wrong, axis=0), right).max() * MAS_PER_RAD)

    astrometric = earth.observe(target)
    assert worst_mas(astrometric.xyz.au) > 15_000.0  # neither aberration nor deflection
    geometric = (target - direct.planets["earth"]).at(direct.time(jd)).xyz.au
    assert worst_mas(geometric) > 900.0  # neither light-time nor aberration
    if body is not Body.SUN:
        assert worst_mas(astrometric.apparent(deflectors=()).xyz.au) > 4.0  # no deflection
    second_s = direct.direction(body, jd + 1.0 / 86_400.0)
    assert worst_mas(second_s) > 20 * DIRECTION_MAS  # a time scale off by a second
