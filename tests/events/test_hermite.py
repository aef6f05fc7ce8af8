"""The first guess of a search: the root of the polynomial through two samples."""

from __future__ import annotations

import numpy as np
from hypothesis import given
from hypothesis import strategies as st
from numpy.polynomial import Polynomial

from wanderers.events.hermite import hermite_root


def ends(curve: Polynomial, step: float, order: int) -> tuple[np.ndarray, np.ndarray]:
    derivatives = [curve.deriv(n) if n else curve for n in range(order + 1)]
    return tuple(np.array([[one(at)] for one in derivatives]) for at in (0.0, step))  # type: ignore[return-value]


@given(st.floats(0.05, 0.95), st.floats(0.1, 8.0), st.floats(1.0, 5.0), st.booleans())
def test_guess_is_the_root_where_the_curve_is_a_cubic(part: float, step: float, far: float, up: bool) -> None:
    # One root inside, the other two complex: the slope is never zero.
    root = part * step
    curve = Polynomial([-root, 1.0]) * Polynomial([far**2 * step**2, 0.0, 1.0]) * (1.0 if up else -1.0)
    guess = hermite_root(*ends(curve, step, 1), np.array([step]))
    np.testing.assert_allclose(guess, root, rtol=0.0, atol=1e-6 * step)


@given(st.floats(0.1, 0.9), st.floats(0.5, 4.0))
def test_second_derivatives_sharpen_the_guess(part: float, step: float) -> None:
    # A quintic is met exactly with second derivatives, and only nearly without.
    root = part * step
    curve = Polynomial([-root, 1.0]) * Polynomial([step**4, 0.0, 0.0, 0.0, 3.0])
    guess = hermite_root(*ends(curve, step, 2), np.array([step]))
    np.testing.assert_allclose(guess, root, rtol=0.0, atol=1e-5 * step)


@given(st.lists(st.tuples(st.floats(-1.0, 1.0), st.floats(-9.0, 9.0)), min_size=2, max_size=2))
def test_guess_never_leaves_the_step(samples: list[tuple[float, float]]) -> None:
    left, right = (np.array(sample)[:, None] for sample in samples)
    guess = hermite_root(left, right, np.array([2.0]))
    assert 0.0 <= guess[0] <= 2.0


def test_many_brackets_are_guessed_at_once() -> None:
    left, right = np.array([[-1.0, -3.0], [1.0, 1.0]]), np.array([[1.0, 1.0], [1.0, 1.0]])
    np.testing.assert_allclose(hermite_root(left, right, np.array([2.0, 4.0])), [1.0, 3.0])
