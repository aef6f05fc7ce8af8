"""Brute-force search for zeros: knows no planet, only functions of time and dense samples of them.

Two ways to find a zero: the sign changes between neighbouring samples, and every local approach of
the samples to zero that does not reach it is minimised between the samples, so that a pair of zeros
hidden inside one step is found as well. All zeros are refined on the direct evaluation.
"""

from __future__ import annotations

from collections.abc import Callable
from dataclasses import dataclass

import numpy as np
from numpy.typing import NDArray
from scipy.optimize import elementwise

Floats = NDArray[np.float64]
Direct = Callable[[Floats, Floats], Floats]  # (jd_tt, offset_days) -> values, all shape (n,)

ROOT_PRECISION_DAYS = 2e-9
MARGIN = 6  # samples needed on either side of a span by the difference stencil and the brackets
STENCIL = ((1, 45.0), (2, -9.0), (3, 1.0))  # sixth-order central difference, over 60 h


class SearchError(ArithmeticError):
    """The samples promise a zero that the direct evaluation does not have: the step is too long."""


@dataclass(frozen=True, slots=True)
class Crossings:
    """Zeros of a function: ``jd_tt`` shape (k,) rising, and whether it rises through each."""

    jd_tt: Floats
    rising: NDArray[np.bool_]


@dataclass(frozen=True, slots=True)
class _Brackets:
    """Intervals ``jd_tt + [low, high]`` (days), each holding one zero."""

    jd_tt: Floats
    low: Floats
    high: Floats


def crossings(
    direct: Direct,
    jd_tt: Floats,
    values: Floats,
    *,
    period: float | None = None,
    where: NDArray[np.bool_] | None = None,
) -> Crossings:
    """Find every zero of a sampled function.

    Args:
        direct: evaluates the function at ``jd_tt + offset_days``.
        jd_tt: shape (n,), evenly rising sample times.
        values: shape (n,), the function at those times.
        period: of the values where they wrap (from +period/2 to -period/2); such a jump is no zero.
        where: shape (n,), samples worth a search; others are skipped.
    """
    wanted = np.ones(values.shape, dtype=bool) if where is None else where
    found = [
        _refine(direct, _sign_changes(jd_tt, values, period, wanted)),
        _refine(direct, _hidden_pairs(direct, jd_tt, values, wanted)),
    ]
    jd = np.concatenate([part.jd_tt for part in found])
    rising = np.concatenate([part.rising for part in found])
    order = np.argsort(jd, kind="stable")
    return Crossings(jd[order], rising[order])


def rate(direct: Direct, step_days: float, *, period: float | None = None) -> Direct:
    """Give the rate of change per day of a direct function, by sixth-order central differences."""

    def differenced(jd_tt: Floats, offset_days: Floats) -> Floats:
        shifts = [sign * k * step_days for k, _ in STENCIL for sign in (1, -1)]
        offsets = np.concatenate([offset_days + shift for shift in shifts])
        values = direct(np.tile(jd_tt, len(shifts)), offsets).reshape(len(STENCIL), 2, -1)
        steps = wrapped(values[:, 0] - values[:, 1], period)
        weights = np.array([weight for _, weight in STENCIL])
        return weights @ steps / (60.0 * step_days)

    return differenced


def sampled_rate(values: Floats, step_days: float, *, period: float | None = None) -> Floats:
    """Give the rate per day of evenly spaced samples; three are lost at either end."""
    reach = len(STENCIL)
    count = values.size - 2 * reach
    total = np.zeros(count)
    for k, weight in STENCIL:
        step = values[reach + k : reach + k + count] - values[reach - k : reach - k + count]
        total += weight * wrapped(step, period)
    return total / (60.0 * step_days)


def refine(direct: Direct, jd_tt: Floats, low: Floats, high: Floats) -> Floats:
    """Give the zero of a direct function within ``jd_tt + [low, high]`` (days), one in each."""
    return _refine(direct, _Brackets(jd_tt, low, high)).jd_tt


def bisect(
    predicate: Callable[[Floats, Floats], NDArray[np.bool_]], jd_tt: Floats, low: Floats, high: Floats
) -> Floats:
    """Give the instant within ``jd_tt + [low, high]`` (days) from which a predicate is true."""
    while np.any(high - low > ROOT_PRECISION_DAYS):
        middle = 0.5 * (low + high)
        after = predicate(jd_tt, middle)
        low, high = np.where(after, low, middle), np.where(after, middle, high)
    return jd_tt + high


def wrapped(values: Floats, period: float | None) -> Floats:
    """Bring values into [-period/2, period/2); leave them alone where there is no period."""
    if period is None:
        return values
    return (values + period / 2.0) % period - period / 2.0


def _sign_changes(
    jd_tt: Floats, values: Floats, period: float | None, wanted: NDArray[np.bool_]
) -> _Brackets:
    """Bracket the zeros that neighbouring samples straddle."""
    change = (values[:-1] >= 0.0) != (values[1:] >= 0.0)
    if period is not None:
        change &= np.abs(values[1:] - values[:-1]) < period / 2.0
    at = np.flatnonzero(change & (wanted[:-1] | wanted[1:]))
    return _Brackets(jd_tt[at], np.zeros(at.size), jd_tt[at + 1] - jd_tt[at])


def _hidden_pairs(direct: Direct, jd_tt: Floats, values: Floats, wanted: NDArray[np.bool_]) -> _Brackets:
    """Bracket pairs of zeros between samples of one sign, around each local minimum of the size."""
    size = np.abs(values)
    positive = values >= 0.0
    same = (positive[:-2] == positive[1:-1]) & (positive[1:-1] == positive[2:])
    lowest = (size[1:-1] <= size[:-2]) & (size[1:-1] <= size[2:]) & wanted[1:-1]
    # A parabola through three samples dips by an eighth of their second difference between them:
    # what lies 800 times higher cannot hide a pair of zeros on a step as short as these.
    bend = np.abs(values[:-2] - 2.0 * values[1:-1] + values[2:])
    at = np.flatnonzero(same & lowest & (size[1:-1] <= 100.0 * bend)) + 1
    if at.size == 0:
        return _Brackets(*(np.empty(0) for _ in range(3)))
    jd, sign = jd_tt[at], np.where(positive[at], 1.0, -1.0)
    left, right = jd_tt[at - 1] - jd, jd_tt[at + 1] - jd
    deepest, depth = _minimise(direct, jd, sign, left, right)
    pair = depth < 0.0
    return _Brackets(
        np.concatenate([jd[pair], jd[pair]]),
        np.concatenate([left[pair], deepest[pair]]),
        np.concatenate([deepest[pair], right[pair]]),
    )


def _minimise(
    direct: Direct, jd_tt: Floats, sign: Floats, left: Floats, right: Floats
) -> tuple[Floats, Floats]:
    """Minimise ``sign * direct`` over the offset within each bracket; give place and depth.

    A bracket whose middle is not lowest on the direct evaluation (samples of a rate are coarser) is
    probed on a finer row of points, and the lowest of them taken.
    """
    row = np.linspace(left, right, 9)
    probed = (np.tile(sign, len(row)) * direct(np.tile(jd_tt, len(row)), row.ravel())).reshape(row.shape)
    best = np.clip(np.argmin(probed, axis=0), 1, len(row) - 2)
    column = np.arange(best.size)
    place, depth = row[best, column], probed[best, column]
    low, high = row[best - 1, column], row[best + 1, column]
    proper = (depth <= probed[best - 1, column]) & (depth <= probed[best + 1, column]) & (depth > 0.0)
    if np.any(proper):
        result = elementwise.find_minimum(
            lambda offset, jd, s: s * direct(jd, offset),
            (low[proper], place[proper], high[proper]),
            args=(jd_tt[proper], sign[proper]),
            maxiter=60,
        )
        place[proper], depth[proper] = result.x, result.f_x
    return place, depth


def _refine(direct: Direct, brackets: _Brackets) -> Crossings:
    """Close each bracket on its zero."""
    if brackets.jd_tt.size == 0:
        return Crossings(np.empty(0), np.empty(0, dtype=bool))
    low, high, rising = _checked(direct, brackets)
    result = elementwise.find_root(
        lambda offset, jd: direct(jd, offset),
        (low, high),
        args=(brackets.jd_tt,),
        tolerances={"xatol": ROOT_PRECISION_DAYS, "xrtol": 0.0, "fatol": 0.0, "frtol": 0.0},
    )
    if not np.all(result.success):
        raise SearchError("a bracketed zero did not converge")
    return Crossings(brackets.jd_tt + result.x, rising)


def _checked(direct: Direct, brackets: _Brackets) -> tuple[Floats, Floats, NDArray[np.bool_]]:
    """Make sure the direct evaluation changes sign in each bracket, widening those that miss it.

    Samples of a rate differ from its direct evaluation by a truncation error, which can put a zero
    just outside the bracket.
    """
    low, high = brackets.low.copy(), brackets.high.copy()
    for widening in (0.0, 0.02, 0.2, 1.0):
        at_low, at_high = direct(brackets.jd_tt, low), direct(brackets.jd_tt, high)
        missed = (at_low >= 0.0) == (at_high >= 0.0)
        if not np.any(missed):
            return low, high, at_high > at_low
        margin = widening * (brackets.high - brackets.low)
        low = np.where(missed, brackets.low - margin, low)
        high = np.where(missed, brackets.high + margin, high)
    raise SearchError(f"no zero where the samples change sign, near jd_tt {brackets.jd_tt[missed]}")
