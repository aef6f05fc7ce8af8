"""Piecewise Chebyshev series: fit at the nodes, evaluate values and derivatives anywhere.

Numerics only: nothing here knows what a planet is. Formulas: Press et al., Numerical Recipes, 3rd ed.
(2007), sections 5.8 and 5.9; derivatives by differentiating the recurrence T(k) = 2x T(k-1) - T(k-2).
"""

from __future__ import annotations

from dataclasses import dataclass, replace

import numpy as np

from wanderers.arrays import Bools, Floats, Ints


def nodes(count: int) -> Floats:
    """Return the ``count`` roots of T(count) in (-1, 1), where a series of ``count`` terms is fitted."""
    return np.asarray(np.cos(np.pi * (np.arange(count) + 0.5) / count))


def fit_matrix(count: int) -> Floats:
    """Return the matrix, shape (node, term), that turns values at the nodes into coefficients."""
    k = np.arange(count)
    matrix = np.cos(np.pi * np.outer(k + 0.5, k) / count) * (2.0 / count)
    matrix[:, 0] /= 2.0
    return np.asarray(matrix)


def basis(x: Floats, count: int, order: int = 0) -> Floats:
    """Return Chebyshev polynomials and their derivatives with respect to ``x``.

    Args:
        x: shape (n,), positions in [-1, 1].
        count: number of terms, at least 2.
        order: highest derivative wanted, 0 to 2.

    Returns:
        shape (order + 1, count, n).
    """
    out = np.zeros((order + 1, count, x.size))
    out[0, 0] = 1.0
    out[0, 1] = x
    if order:
        out[1, 1] = 1.0
    twice_x = 2.0 * x
    for k in range(2, count):
        for d in range(order, -1, -1):
            np.multiply(twice_x, out[d, k - 1], out=out[d, k])
            out[d, k] -= out[d, k - 2]
            if d:
                out[d, k] += (2.0 * d) * out[d - 1, k - 1]
    return out


@dataclass(frozen=True, slots=True)
class Located:
    """Instants prepared for evaluation, which several series cut alike can share.

    Attributes:
        segment: row of each instant's segment, shape (n,).
        half_days: half the length of that segment, shape (n,).
        polynomials: Chebyshev polynomials there, shape (order + 1, terms, n).
    """

    segment: Ints
    half_days: Floats
    polynomials: Floats

    def chosen(self, keep: Bools) -> Located:
        """Return the instants where ``keep`` is true."""
        return Located(self.segment[keep], self.half_days[keep], self.polynomials[..., keep])


@dataclass(frozen=True, slots=True)
class Series:
    """Several functions of time on one row of equal segments.

    Attributes:
        origin_jd: where segment number 0 would begin.
        segment_days: nominal length of a segment.
        first_segment: number of the first segment held.
        middle_jd: shape (segments,), middle of what each segment was fitted on.
        half_days: shape (segments,), half its length; shorter than nominal where a kernel ends.
        coefficients: shape (components, terms, functions, segments): what one evaluation gathers lies apart
            by whole rows, so that arithmetic runs along instants.
    """

    origin_jd: float
    segment_days: float
    first_segment: int
    middle_jd: Floats
    half_days: Floats
    coefficients: Floats

    @property
    def start_jd(self) -> float:
        """First instant that can be evaluated."""
        return float(self.middle_jd[0] - self.half_days[0])

    @property
    def end_jd(self) -> float:
        """Last instant that can be evaluated."""
        return float(self.middle_jd[-1] + self.half_days[-1])

    def segment_of(self, jd: Floats) -> Ints:
        """Return the row of the segment that holds each instant, shape (n,)."""
        number = np.floor((jd - self.origin_jd) / self.segment_days).astype(np.int64) - self.first_segment
        return np.clip(number, 0, self.middle_jd.size - 1)

    def between(self, jd_from: float, jd_to: float) -> Series:
        """Return the segments that touch a span; at least one."""
        first, last = self.segment_of(np.clip([jd_from, jd_to], self.start_jd, self.end_jd)).tolist()
        keep = slice(first, last + 1)
        return replace(
            self,
            first_segment=self.first_segment + keep.start,
            middle_jd=self.middle_jd[keep],
            half_days=self.half_days[keep],
            coefficients=self.coefficients[..., keep],
        )

    def locate(self, jd: Floats, order: int = 0) -> Located:
        """Prepare instants, shape (n,), at which this or a like-cut series of no more terms is evaluated."""
        segment = self.segment_of(jd)
        half = self.half_days[segment]
        x = (jd - self.middle_jd[segment]) / half
        return Located(segment, half, basis(x, self.coefficients.shape[1], order))

    def evaluate(
        self,
        function: Ints | int,
        jd: Floats,
        components: slice,
        order: int = 0,
        located: Located | None = None,
    ) -> Floats:
        """Evaluate at scattered instants.

        Args:
            function: which function, one for all or shape (n,).
            jd: shape (n,), within the span held.
            components: which components.
            order: highest derivative, 0 to 2, per day.
            located: the instants prepared to that order or beyond, if they already are.

        Returns:
            shape (order + 1, components, n).
        """
        at = self.locate(jd, order) if located is None else located
        _, terms, functions, segments = self.coefficients.shape
        rows = self.coefficients[components].reshape(-1, terms, functions * segments)
        chosen = np.take(rows, function * segments + at.segment, axis=2)
        out = np.einsum("ckn,dkn->dcn", chosen, at.polynomials[: order + 1, :terms])
        for d in range(1, order + 1):
            out[d] /= at.half_days**d
        return np.asarray(out)

    def evaluate_grid(self, functions: Ints, jd: Floats, components: slice, order: int = 0) -> Floats:
        """Evaluate several functions on a rising grid that may cross many segments.

        The same as :meth:`evaluate`, arranged so that each segment's coefficients are read once: on a grid
        whose step divides the segment it is one matrix product.

        Returns:
            shape (functions, order + 1, components, n).
        """
        segment = self.segment_of(jd)
        first, last = int(segment[0]), int(segment[-1])
        x = (jd - self.middle_jd[segment]) / self.half_days[segment]
        polynomials = basis(x, self.coefficients.shape[1], order)
        scale = self.half_days[segment]
        chosen = self.coefficients[components][:, :, functions, first : last + 1]
        starts = np.searchsorted(segment, np.arange(first, last + 2))
        width = int(np.max(np.diff(starts)))
        padded = np.minimum(starts[:-1, None] + np.arange(width), jd.size - 1)
        per_segment = polynomials[:, :, padded]  # (order + 1, terms, segments, width)
        products = np.einsum("ckfs,dksw->fdcsw", chosen, per_segment, optimize=True)
        keep = starts[:-1, None] + np.arange(width) < starts[1:, None]
        out = products[..., keep]
        for d in range(1, order + 1):
            out[:, d] /= scale**d
        return np.asarray(out)


def fit(values: Floats) -> Floats:
    """Turn values at the nodes, last axis, into Chebyshev coefficients along the same axis."""
    return np.asarray(values @ fit_matrix(values.shape[-1]))


def joined(parts: list[Series], jd_from: float = -np.inf, jd_to: float = np.inf) -> Series:
    """Join series of consecutive segments into one, leaving out segments wholly outside a span.

    Raises:
        ValueError: a gap or an overlap between two parts.
    """
    head = parts[0]
    expected = head.first_segment
    for part in parts:
        if part.first_segment != expected:
            raise ValueError(f"segments {expected} and {part.first_segment} do not join")
        expected += part.middle_jd.size
    parts = [part.between(jd_from, jd_to) for part in parts]
    head = parts[0]
    return Series(
        head.origin_jd,
        head.segment_days,
        head.first_segment,
        np.concatenate([part.middle_jd for part in parts]),
        np.concatenate([part.half_days for part in parts]),
        np.concatenate([part.coefficients for part in parts], axis=3),
    )
