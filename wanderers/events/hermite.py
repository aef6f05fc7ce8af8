"""Roots of the polynomial through two samples: a first guess for a search."""

from __future__ import annotations

from typing import Final

import numpy as np

from wanderers.arrays import Floats

HERMITE_STEPS: Final = 6


def hermite_root(left: Floats, right: Floats, step: Floats) -> Floats:
    """Return the offset at which the Hermite polynomial through both ends is zero, shape (n,).

    Newton steps from the chord's root, bisecting where one would leave the bracket. Where the ends agree in
    sign there is no bracket, and any offset within the step may come out.

    Args:
        left: value, slope and perhaps second derivative at the left end, shape (2 or 3, n).
        right: the same at the right end.
        step: from left to right, days, shape (n,).
    """
    terms = _hermite_terms(left, right, step)
    rise = right[0] - left[0]
    chord = np.divide(-left[0], rise, out=np.full_like(rise, 0.5), where=rise != 0.0)
    s = np.where((chord >= 0.0) & (chord <= 1.0), chord, 0.5)
    low, high = np.zeros_like(s), np.ones_like(s)
    positive_left = left[0] >= 0.0
    for _ in range(HERMITE_STEPS):
        value, slope = np.zeros_like(s), np.zeros_like(s)
        for term in reversed(terms):
            slope = slope * s + value
            value = value * s + term
        beyond_low = (value >= 0.0) == positive_left
        low, high = np.where(beyond_low, s, low), np.where(beyond_low, high, s)
        newton = s - np.divide(value, slope, out=np.full_like(s, np.inf), where=slope != 0.0)
        s = np.where((newton >= low) & (newton <= high), newton, (low + high) / 2.0)
    return np.asarray(s * step)


def _hermite_terms(left: Floats, right: Floats, step: Floats) -> list[Floats]:
    """Return the coefficients, constant first, of the cubic or quintic through both ends over [0, 1]."""
    start, slope = left[0], step * left[1]
    if left.shape[0] == 2:
        rise, end_slope = right[0] - start, step * right[1]
        return [start, slope, 3.0 * rise - 2.0 * slope - end_slope, slope + end_slope - 2.0 * rise]
    half_bend, end_half_bend = step**2 * left[2] / 2.0, step**2 * right[2] / 2.0
    rise = right[0] - (start + slope + half_bend)
    turn = step * right[1] - (slope + 2.0 * half_bend)
    bend = end_half_bend - half_bend
    return [
        start,
        slope,
        half_bend,
        10.0 * rise - 4.0 * turn + bend,
        -15.0 * rise + 7.0 * turn - 2.0 * bend,
        6.0 * rise - 3.0 * turn + bend,
    ]
