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
def test_guess_stays_between_the_ends(part: float, step: float, far: float, up: bool) -> None:
    # One root inside, the other two complex: the slope is never zero.
    root = part * step
    curve = Polynomial([-root, 1.0]) * Polynomial([far**2 * step**2, 0.0, 1.0]) * (1.0 if up else -1.0)
    guess = hermite_root(*ends(curve, step, 1), np.array([step]))
    assert 0.0 <= guess[0] <= step


def test_guess_is_the_root_where_the_curve_is_a_cubic() -> None:
    parts = np.linspace(0.05, 0.95, 61)
    guesses = [
        hermite_root(*ends(Polynomial([-part, 1.0]) * Polynomial([2.0, 0.0, 1.0]), 1.0, 1), np.ones(1))[0]
        for part in parts
    ]
    np.testing.assert_allclose(guesses, parts, rtol=0.0, atol=1e-9)


def test_guess_is_the_root_where_the_curve_is_a_line() -> None:
    left, right = np.array([[-1.0, -3.0], [1.0, 1.0]]), np.array([[1.0, 1.0], [1.0, 1.0]])
    np.testing.assert_allclose(hermite_root(left, right, np.array([2.0, 4.0])), [1.0, 3.0])


def test_guess_is_the_root_where_the_curve_is_a_quintic_and_bends_are_known() -> None:
    parts = np.linspace(0.05, 0.95, 61)
    shape = Polynomial([1.0, 0.0, 0.0, 0.0, 0.5])
    guesses = [hermite_root(*ends(Polynomial([-part, 1.0]) * shape, 1.0, 2), np.ones(1))[0] for part in parts]
    np.testing.assert_allclose(guesses, parts, rtol=0.0, atol=1e-9)


SLOPES = st.floats(-9.0, 9.0).map(lambda slope: round(slope, 6))
VALUES = st.floats(0.001, 1.0)


@given(VALUES, VALUES, SLOPES, SLOPES)
def test_guess_never_leaves_the_bracket(below: float, above: float, start: float, end: float) -> None:
    guess = hermite_root(np.array([[-below], [start]]), np.array([[above], [end]]), np.array([2.0]))
    assert 0.0 <= guess[0] <= 2.0
