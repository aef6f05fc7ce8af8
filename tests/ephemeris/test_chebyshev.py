"""Piecewise Chebyshev series: what is fitted comes back, with its derivatives, at instants and on grids."""

from __future__ import annotations

from itertools import pairwise

import numpy as np
import pytest
from hypothesis import given
from hypothesis import strategies as st
from numpy.polynomial import Chebyshev, Polynomial
from numpy.polynomial.chebyshev import chebval, chebvander

from wanderers.arrays import Floats
from wanderers.ephemeris import chebyshev
from wanderers.ephemeris.chebyshev import Series

ORIGIN_JD = 2_451_544.5
SEGMENT_DAYS = 8.0
TERMS = 10

coefficients = st.lists(st.floats(-10.0, 10.0), min_size=1, max_size=TERMS)


def series_of(functions: list[list[Polynomial]], first_segment: int = 0, segments: int = 5) -> Series:
    """Fit polynomials of the days since ORIGIN_JD: a list of components for each function."""
    middle = ORIGIN_JD + SEGMENT_DAYS * (first_segment + np.arange(segments) + 0.5)
    half = np.full(segments, SEGMENT_DAYS / 2.0)
    days = (middle[:, None] - ORIGIN_JD) + half[:, None] * chebyshev.nodes(TERMS)
    values = np.array([[component(days) for component in function] for function in functions])
    fitted = chebyshev.fit(values)  # function, component, segment, term
    return Series(ORIGIN_JD, SEGMENT_DAYS, first_segment, middle, half, fitted.transpose(1, 3, 0, 2))


def days_since_origin(jd: Floats) -> Floats:
    return jd - ORIGIN_JD


@given(coefficients)
def test_fit_gives_numpys_chebyshev_coefficients(given_coefficients: list[float]) -> None:
    polynomial = Polynomial(given_coefficients)
    expected = polynomial.convert(kind=Chebyshev).coef
    found = chebyshev.fit(polynomial(chebyshev.nodes(TERMS)))
    np.testing.assert_allclose(found[: expected.size], expected, atol=1e-12)
    np.testing.assert_allclose(found[expected.size :], 0.0, atol=1e-12)


@given(st.integers(2, 20), st.lists(st.floats(-1.0, 1.0), min_size=1, max_size=30))
def test_basis_is_that_of_numpy_with_its_derivatives(count: int, positions: list[float]) -> None:
    x = np.array(positions)
    found = chebyshev.basis(x, count, order=2)
    np.testing.assert_allclose(found[0], chebvander(x, count - 1).T, atol=1e-12)
    for order in (1, 2):
        derivatives = [chebval(x, Chebyshev.basis(k).deriv(order).coef) for k in range(count)]
        np.testing.assert_allclose(found[order], derivatives, rtol=1e-9, atol=1e-9)


@given(coefficients, st.lists(st.floats(0.0, 40.0), min_size=1, max_size=40))
def test_values_and_rates_are_those_of_the_function(
    given_coefficients: list[float], days: list[float]
) -> None:
    polynomial = Polynomial(given_coefficients, domain=(0.0, 40.0), window=(-1.0, 1.0))
    jd = ORIGIN_JD + np.array(days)
    found = series_of([[polynomial]]).evaluate(0, jd, slice(0, 1), order=2)[:, 0]
    expected = [polynomial.deriv(order)(days_since_origin(jd)) for order in (0, 1, 2)]
    np.testing.assert_allclose(found, expected, rtol=1e-9, atol=1e-9)


def test_each_instant_may_have_its_own_function() -> None:
    line, parabola = Polynomial([1.0, 2.0]), Polynomial([3.0, 0.0, 0.5])
    series = series_of([[line, -line], [parabola, -parabola]])
    jd = ORIGIN_JD + np.array([1.0, 9.0, 17.0, 39.0])
    found = series.evaluate(np.array([0, 1, 1, 0]), jd, slice(0, 2))[0]
    expected = np.where([True, False, False, True], line(jd - ORIGIN_JD), parabola(jd - ORIGIN_JD))
    np.testing.assert_allclose(found, [expected, -expected], atol=1e-10)


@given(
    st.floats(0.05, 30.0),
    st.floats(0.0, 1.0),
    st.integers(1, 200),
)
def test_a_grid_is_evaluated_like_scattered_instants(step: float, start: float, count: int) -> None:
    wave = [[Polynomial([0.3, -0.2, 0.01]), Polynomial([1.0])], [Polynomial([-5.0, 0.7]), Polynomial([2.0])]]
    series = series_of(wave)
    jd = ORIGIN_JD + np.minimum(start + step * np.arange(count), 40.0)
    jd = np.unique(jd)
    on_grid = series.evaluate_grid(np.array([1, 0]), jd, slice(0, 2), order=2)
    for row, function in enumerate((1, 0)):
        scattered = series.evaluate(function, jd, slice(0, 2), order=2)
        np.testing.assert_allclose(on_grid[row], scattered, rtol=1e-12, atol=1e-12)


def test_prepared_instants_serve_every_series_cut_alike() -> None:
    one, two = series_of([[Polynomial([1.0, 1.0])]]), series_of([[Polynomial([2.0, 0.0, -1.0])]])
    jd = ORIGIN_JD + np.linspace(0.0, 40.0, 33)
    located = one.locate(jd, order=2)
    shared = two.evaluate(0, jd, slice(0, 1), 1, located)
    np.testing.assert_array_equal(shared, two.evaluate(0, jd, slice(0, 1), 1))
    some = np.arange(jd.size) % 3 == 0
    np.testing.assert_array_equal(
        two.evaluate(0, jd[some], slice(0, 1), 1, located.chosen(some)), shared[..., some]
    )


def test_the_seam_of_two_segments_is_seamless() -> None:
    polynomial = Polynomial([1.0, -0.4, 0.02, 0.001])
    series = series_of([[polynomial]])
    seams = ORIGIN_JD + SEGMENT_DAYS * np.arange(1, 5)
    before, after = (series.evaluate(0, at, slice(0, 1))[0, 0] for at in (np.nextafter(seams, 0.0), seams))
    np.testing.assert_allclose(before, after, atol=1e-7)  # a nanosecond's step of a rate of 2 a day


def test_both_ends_belong_to_the_series() -> None:
    series = series_of([[Polynomial([0.0, 1.0])]])
    ends = np.array([series.start_jd, series.end_jd])
    assert ends.tolist() == [ORIGIN_JD, ORIGIN_JD + 40.0]
    np.testing.assert_allclose(series.evaluate(0, ends, slice(0, 1))[0, 0], [0.0, 40.0], atol=1e-9)


def test_consecutive_parts_join_into_the_whole() -> None:
    polynomial = Polynomial([0.3, -0.2, 0.01, 1e-4])
    whole = series_of([[polynomial]], segments=6)
    parts = [series_of([[polynomial]], first_segment=first, segments=2) for first in (0, 2, 4)]
    joined = chebyshev.joined(parts)
    jd = ORIGIN_JD + np.linspace(0.0, 48.0, 97)
    np.testing.assert_allclose(
        joined.evaluate(0, jd, slice(0, 1), 2), whole.evaluate(0, jd, slice(0, 1), 2), atol=1e-9
    )


@pytest.mark.parametrize("starts", [(0, 3), (0, 1), (2, 0)])
def test_a_gap_or_an_overlap_is_refused(starts: tuple[int, int]) -> None:
    parts = [series_of([[Polynomial([1.0])]], first_segment=first, segments=2) for first in starts]
    with pytest.raises(ValueError, match="do not join"):
        chebyshev.joined(parts)


def test_nodes_are_the_roots_of_the_next_polynomial() -> None:
    for count in range(2, 20):
        nodes = np.sort(chebyshev.nodes(count))
        np.testing.assert_allclose(np.sort(Chebyshev.basis(count).roots().real), nodes, atol=1e-12)
        assert all(low < high for low, high in pairwise(nodes))
