"""Checks of the brute-force search on functions whose zeros are known in closed form."""

from __future__ import annotations

import numpy as np
import pytest

from tests.oracle.search import Direct, Floats, SearchError, crossings, rate, sampled_rate


def sampled(function: Direct, step: float = 0.25, count: int = 400) -> tuple[Floats, Floats]:
    times = 2451545.0 + step * np.arange(count, dtype=np.float64)
    return times, function(times, np.zeros(count))


def test_a_pair_of_zeros_within_one_step_is_found() -> None:
    def near(jd_tt: Floats, offset: Floats) -> Floats:
        return (jd_tt - 2451555.1 + offset) ** 2 - 1e-6

    found = crossings(near, *sampled(near))
    np.testing.assert_allclose(found.jd_tt - 2451555.1, [-0.001, 0.001], atol=1e-8)
    assert found.rising.tolist() == [False, True]


def test_a_near_miss_and_a_wrap_are_no_zeros() -> None:
    def miss(jd_tt: Floats, offset: Floats) -> Floats:
        return (jd_tt - 2451555.1 + offset) ** 2 + 1e-8

    def sawtooth(jd_tt: Floats, offset: Floats) -> Floats:
        return ((jd_tt - 2451545.0) * 13.0 + offset * 13.0) % 360.0 - 180.0

    assert crossings(miss, *sampled(miss)).jd_tt.size == 0
    zeros = crossings(sawtooth, *sampled(sawtooth), period=360.0)
    np.testing.assert_allclose((zeros.jd_tt - 2451545.0) % (360.0 / 13.0), 180.0 / 13.0, atol=1e-8)


def test_rates_match_the_derivative_of_a_sine() -> None:
    def sine(jd_tt: Floats, offset: Floats) -> Floats:
        return np.asarray(np.sin((jd_tt - 2451545.0) + offset))

    times, values = sampled(sine, step=0.1)
    zero = np.zeros(times.size - 6)
    expected = np.cos(times[3:-3] - 2451545.0)
    np.testing.assert_allclose(sampled_rate(values, 0.1), expected, atol=1e-8)
    np.testing.assert_allclose(rate(sine, 0.02)(times[3:-3], zero), expected, atol=1e-11)


def test_samples_that_promise_a_zero_in_vain_are_an_error() -> None:
    times = 2451545.0 + np.arange(5.0)
    with pytest.raises(SearchError, match="no zero"):
        crossings(lambda jd_tt, offset: 0.0 * offset + 1.0, times, times - 2451546.5)
