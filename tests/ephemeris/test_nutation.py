"""Nutation by segments against ERFA, the open SOFA, and against skyfield's term by term."""

from __future__ import annotations

import erfa
import numpy as np
import pytest
from skyfield.nutationlib import iau2000a

from wanderers.ephemeris import chebyshev
from wanderers.ephemeris.nutation import nutation_at_nodes

MICROARCSEC = np.radians(1.0 / 3.6e9)
NODES = chebyshev.nodes(18)


def segments(first_jd: float, count: int) -> tuple[np.ndarray, np.ndarray]:
    """Segments of 16 days, the first and the last shorter as where a kernel ends."""
    half = np.full(count, 8.0)
    half[0], half[-1] = 3.21, 5.6
    return first_jd + np.concatenate([[0.0], np.cumsum(half[:-1] + half[1:])]), half


@pytest.mark.parametrize("first_jd", [2_287_190.0, 2_450_000.0, 2_680_000.0])
def test_nutation_is_erfas(first_jd: float) -> None:
    middle, half = segments(first_jd, 200)
    ours = nutation_at_nodes(middle, half, NODES)
    expected = erfa.nut00a(middle[:, None], half[:, None] * NODES)
    # ERFA's planetary arguments differ from skyfield's in their last digits.
    for own, theirs in zip(ours, expected, strict=True):
        np.testing.assert_allclose(own, theirs, atol=1.0 * MICROARCSEC)


@pytest.mark.parametrize("first_jd", [2_287_190.0, 2_450_000.0, 2_680_000.0])
def test_the_addition_theorem_costs_nothing(first_jd: float) -> None:
    middle, half = segments(first_jd, 200)
    jd = (middle[:, None] + half[:, None] * NODES).ravel()
    one_by_one = np.stack(iau2000a(jd)) * np.radians(1e-7 / 3600.0)
    ours = np.stack(nutation_at_nodes(middle, half, NODES)).reshape(2, -1)
    np.testing.assert_allclose(ours, one_by_one, atol=0.05 * MICROARCSEC)


def test_the_limits_would_notice_a_missing_rate() -> None:
    # Terms that are held still through a segment, as they would be without their angles' growth.
    middle, half = segments(2_450_000.0, 10)
    still = np.broadcast_to(nutation_at_nodes(middle, half, np.zeros(1))[0], (10, NODES.size))
    assert np.abs(still - nutation_at_nodes(middle, half, NODES)[0]).max() > 1e4 * MICROARCSEC
