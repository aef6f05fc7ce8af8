"""The parabola through three samples, against numpy's polynomials."""

from __future__ import annotations

import numpy as np
import pytest
from hypothesis import given
from hypothesis import strategies as st
from numpy.polynomial import Polynomial

from wanderers.events.parabola import least_within, lowest


@given(st.floats(0.1, 9.0), st.floats(-0.49, 0.49), st.floats(-5.0, 5.0), st.floats(0.1, 30.0))
def test_turn_of_a_sampled_parabola_is_found(bend: float, turn: float, least: float, step: float) -> None:
    curve = Polynomial([least, 0.0, bend])
    x = (np.arange(-4.0, 5.0) + turn) * step
    found = least_within(x, curve(x), (float(x[0]), float(x[-1])))
    assert found == pytest.approx((0.0, least), abs=1e-9 * step**2 * bend + 1e-9 * step + 1e-12)


def test_a_curve_still_falling_is_least_at_the_end_of_the_stretch() -> None:
    curve, x = Polynomial([0.0, 0.0, 1.0]), np.arange(0.0, 10.0)
    assert least_within(x, curve(x), (2.5, 8.0)) == pytest.approx((2.5, curve(2.5)))
    assert least_within(x, curve(x), (0.0, 8.0)) == (0.0, 0.0)


def test_unknown_values_are_passed_over() -> None:
    x, y = np.arange(5.0), np.array([np.nan, np.nan, 3.0, 2.0, np.nan])
    assert least_within(x, y, (0.0, 4.0)) == (3.0, 2.0)
    assert least_within(x, np.full(5, np.nan), (0.0, 4.0)) is None
    assert least_within(x, y, (0.0, 1.0)) is None


def test_each_column_has_its_own_parabola() -> None:
    curves = Polynomial([1.0, -0.5, 1.0]), Polynomial([2.0, 0.0, -1.0]), Polynomial([3.0, 0.0])
    x = np.tile(np.array([[-1.0], [0.0], [1.0]]), 3)
    y = np.stack([curve(x[:, 0]) for curve in curves], axis=1)
    at, value = lowest(x, y, (x[0], x[2]))
    assert at.tolist() == [0.25, 0.0, 0.0]
    assert value.tolist() == [curves[0](0.25), 2.0, 3.0]
