"""What is asked of a finder: bodies, pairs, limits, and the grid on which it looks."""

from __future__ import annotations

from itertools import combinations

import numpy as np
import pytest
from hypothesis import given
from hypothesis import strategies as st

from wanderers.ephemeris.bodies import BODIES, PLANETS, Body
from wanderers.ephemeris.frames import Frame
from wanderers.ephemeris.sky import FIRST_STAR, Sky
from wanderers.ephemeris.stars import ecliptic_stars
from wanderers.ephemeris.store import TrackStore
from wanderers.events.sampling import GRID_ORIGIN_JD, grid, sample, sample_stars
from wanderers.events.scene import Choice, Limits, Scene

SPAN = (2_461_041.5, 2_461_141.5)
some_bodies = st.sets(st.sampled_from(BODIES), min_size=1).map(lambda s: tuple(b for b in BODIES if b in s))


def named(pairs: np.ndarray) -> set[tuple[str, str]]:
    return {(BODIES[a].value, BODIES[b].value) for a, b in pairs.T.tolist()}


@given(some_bodies)
def test_pairs_are_written_in_order_and_never_with_oneself(bodies: tuple[Body, ...]) -> None:
    pairs = Choice(bodies).pairs(BODIES[1:])
    assert (pairs[0] < pairs[1]).all()
    assert len(named(pairs)) == pairs.shape[1]


@given(some_bodies)
def test_several_bodies_meet_each_other_and_one_alone_meets_all(bodies: tuple[Body, ...]) -> None:
    found = named(Choice(bodies).pairs(BODIES[1:]))
    moving = [body for body in BODIES[1:] if body in bodies]
    expected = {(a.value, b.value) for a, b in combinations(moving, 2)}
    if len(bodies) == 1:
        expected = {(a.value, b.value) for a, b in combinations(BODIES[1:], 2) if bodies[0] in (a, b)}
    assert found == expected


def test_nobody_has_no_pairs() -> None:
    assert Choice(()).pairs(BODIES).shape == (2, 0)
    assert Choice((Body.SUN,)).pairs(BODIES[1:]).shape == (2, 0)


@given(some_bodies)
def test_chosen_bodies_are_cut_to_those_a_finder_is_for(bodies: tuple[Body, ...]) -> None:
    assert Choice(bodies).among(PLANETS).tolist() == [body.order for body in PLANETS if body in bodies]


def test_limits_depend_on_who_meets_whom() -> None:
    first = np.array([Body.MOON.order, Body.MARS.order, Body.MOON.order, Body.MARS.order])
    second = np.array([Body.MARS.order, Body.SATURN.order, FIRST_STAR + 3, FIRST_STAR])
    assert Limits().of(first, second).tolist() == [6.0, 10.0, 5.0, 5.0]
    assert Limits(1.0, 2.0, 3.0).of(first, second).tolist() == [2.0, 1.0, 3.0, 3.0]


@given(
    st.floats(2_287_200.0, 2_688_900.0),
    st.floats(0.001, 5_000.0),
    st.sampled_from([0.5, 2.0, 3.0]),
)
def test_grid_is_one_raster_whatever_the_span_and_reaches_beyond_it(
    start: float, length: float, step: float
) -> None:
    limits = (2_287_185.0, 2_688_976.4)
    end = min(start + length, limits[1])
    points = grid(start, end, step, limits)
    assert (np.diff(points) > 0.0).all() and (np.diff(points) <= step).all()
    assert points[0] >= limits[0] and points[-1] <= limits[1]
    inside = points[(points != limits[0]) & (points != limits[1])]
    steps = (inside - GRID_ORIGIN_JD) / step
    np.testing.assert_array_equal(steps, np.round(steps))
    assert points[0] <= max(start - step, limits[0])
    assert points[-1] >= min(end + step, limits[1])


@pytest.fixture(scope="module")
def scene(store: TrackStore) -> Scene:
    sky = Sky(store.tracks(SPAN[0] - 8.0, SPAN[1] + 8.0), ecliptic_stars())
    jd = grid(*SPAN, 2.0, store.span_jd)
    return Scene(sky, sample(sky, jd, [body.order for body in BODIES if body is not Body.PLUTO]), Choice())


def test_samples_are_what_the_sky_gives_at_those_instants(scene: Scene) -> None:
    jd = scene.samples.jd
    for body in (Body.SUN, Body.MOON, Body.VENUS, Body.NEPTUNE):
        target = np.full(jd.size, body.order)
        seen = scene.sky.apparent(target, jd, order=2)
        np.testing.assert_allclose(scene.samples.directions[body.order], seen, rtol=1e-10, atol=1e-12)
        for frame in Frame:
            found = scene.samples.longitude_deg(body.order, frame)
            expected = scene.sky.longitude_deg(target, jd, frame, order=2)
            np.testing.assert_allclose(found, expected, rtol=1e-9, atol=1e-9)


def test_samples_of_stars_are_what_the_sky_gives(scene: Scene) -> None:
    jd = scene.samples.jd
    sampled = sample_stars(scene.samples)
    assert sampled.shape[0] == len(ecliptic_stars().name)
    for place in (0, 7, sampled.shape[0] - 1):
        seen = scene.sky.apparent(np.full(jd.size, FIRST_STAR + place), jd)[0]
        np.testing.assert_allclose(sampled[place, 0], seen, atol=1e-13)


def test_bodies_that_were_not_sampled_are_left_out(scene: Scene) -> None:
    assert Body.PLUTO.order not in scene.planets()
    assert "pluto" not in {name for pair in named(scene.held_pairs(BODIES[1:])) for name in pair}
    assert scene.held(np.array([Body.PLUTO.order, Body.MARS.order])).tolist() == [Body.MARS.order]
