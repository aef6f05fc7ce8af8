"""Stacks of derivatives against numerical differentiation, angles against plain trigonometry."""

from __future__ import annotations

from collections.abc import Callable

import numpy as np
import pytest
from hypothesis import given
from hypothesis import strategies as st

from wanderers.arrays import Floats
from wanderers.ephemeris import vectors

T = np.linspace(0.0, 5.0, 23)
H = 1e-4
"""Step of the differences: their cut-off terms, and rounding over the step squared, stay below 1e-6."""


def moving(t: Floats) -> Floats:
    """A vector that moves smoothly, shape (3, n), never near the pole nor the origin."""
    return np.stack([2.0 + np.cos(1.3 * t), np.sin(t) - 0.7, 0.4 + 0.3 * np.sin(2.1 * t)])


def other(t: Floats) -> Floats:
    return np.stack([np.cos(t), 1.5 + np.sin(0.7 * t), -0.2 * t])


def turning(t: Floats) -> Floats:
    """A rotation about z at an uneven pace, shape (3, 3, n)."""
    angle = 0.8 * t + 0.2 * np.sin(t)
    c, s, zero, one = np.cos(angle), np.sin(angle), np.zeros_like(t), np.ones_like(t)
    return np.stack([np.stack([c, s, zero]), np.stack([-s, c, zero]), np.stack([zero, zero, one])])


def stack_of(function: Callable[[Floats], Floats], t: Floats = T) -> Floats:
    """Value, rate and second derivative by central differences."""
    before, now, after = (np.asarray(function(at)) for at in (t - H, t, t + H))
    return np.stack([now, (after - before) / (2.0 * H), (after - 2.0 * now + before) / H**2])


def assert_stack(found: Floats, function: Callable[[Floats], Floats]) -> None:
    np.testing.assert_allclose(found, stack_of(function), atol=2e-6)


def test_dot_product_differentiates() -> None:
    found = vectors.dot(stack_of(moving), stack_of(other))
    assert_stack(found, lambda t: (moving(t) * other(t)).sum(axis=0))


def test_square_root_differentiates() -> None:
    square = stack_of(lambda t: 2.0 + np.sin(t))
    assert_stack(vectors.square_root(square), lambda t: np.sqrt(2.0 + np.sin(t)))


def test_unit_vector_differentiates() -> None:
    found = vectors.unit(stack_of(moving))
    assert_stack(found, lambda t: moving(t) / np.linalg.norm(moving(t), axis=0))


def test_rotating_frame_differentiates() -> None:
    found = vectors.rotate(stack_of(turning), stack_of(moving))
    assert_stack(found, lambda t: np.einsum("ijn,jn->in", turning(t), moving(t)))


def test_a_frame_that_stands_still_turns_every_derivative_alike() -> None:
    fixed = turning(np.array([0.4]))[..., 0]
    found = vectors.rotate(fixed, stack_of(moving))
    np.testing.assert_allclose(found, np.einsum("ij,djn->din", fixed, stack_of(moving)), atol=1e-14)


def test_longitude_differentiates() -> None:
    found = vectors.longitude_deg(stack_of(moving))
    expected = stack_of(lambda t: np.degrees(np.arctan2(moving(t)[1], moving(t)[0])))
    np.testing.assert_allclose(vectors.wrapped_deg(found[0] - expected[0]), 0.0, atol=1e-12)
    np.testing.assert_allclose(found[1:], expected[1:], atol=1e-4)


def test_latitude_differentiates() -> None:
    unit = vectors.unit(stack_of(moving))
    found = vectors.latitude_deg(unit[:2])
    expected = stack_of(lambda t: np.degrees(np.arcsin(moving(t)[2] / np.linalg.norm(moving(t), axis=0))))
    np.testing.assert_allclose(found, expected[:2], atol=1e-5)


@pytest.mark.parametrize(
    ("function", "order"),
    [(vectors.square_root, 0), (vectors.square_root, 1), (vectors.unit, 0), (vectors.unit, 1)],
)
def test_lower_orders_are_the_beginning_of_higher_ones(
    function: Callable[[Floats], Floats], order: int
) -> None:
    whole = stack_of(lambda t: 2.0 + np.sin(t)) if function is vectors.square_root else stack_of(moving)
    np.testing.assert_array_equal(function(whole[: order + 1]), function(whole)[: order + 1])


angles = st.floats(-1e4, 1e4)


@given(angles)
def test_wrapped_angles_lie_in_half_a_turn_each_way_and_differ_by_whole_turns(angle: float) -> None:
    wrapped = float(vectors.wrapped_deg(np.array([angle]))[0])
    assert -180.0 < wrapped <= 180.0 or wrapped == pytest.approx(-180.0, abs=1e-9)
    turns = (angle - wrapped) / 360.0
    assert turns == pytest.approx(round(turns), abs=1e-9)


@pytest.mark.parametrize(
    ("angle", "wrapped"),
    [(180.0, 180.0), (-180.0, 180.0), (540.0, 180.0), (0.0, 0.0), (-0.5, -0.5), (359.5, -0.5), (-359.0, 1.0)],
)
def test_half_a_turn_is_written_with_a_plus(angle: float, wrapped: float) -> None:
    assert vectors.wrapped_deg(np.array([angle]))[0] == wrapped


@given(st.floats(0.0, 359.999_999))
def test_longitudes_run_from_0_to_360(longitude: float) -> None:
    at = np.radians(longitude)
    found = float(vectors.longitude_deg(np.array([[[np.cos(at)], [np.sin(at)], [0.1]]]))[0, 0])
    assert 0.0 <= found < 360.0
    assert vectors.wrapped_deg(np.array([found - longitude]))[0] == pytest.approx(0.0, abs=1e-12)


@pytest.mark.parametrize("apart_deg", [0.0, 1e-9, 1e-6, 0.1, 45.0, 90.0, 179.9, 179.999_999, 180.0])
def test_separation_is_exact_for_small_and_large_angles(apart_deg: float) -> None:
    one = np.array([[1.0], [0.0], [0.0]])
    angle = np.radians(apart_deg)
    two = np.array([[np.cos(angle)], [0.6 * np.sin(angle)], [0.8 * np.sin(angle)]])
    # One in 10^16 of a coordinate near 1 is 6e-15 degrees; beside 90 degrees nothing is lost.
    assert vectors.separation_deg(one, two)[0] == pytest.approx(apart_deg, abs=2e-14)
