"""Tracks: where every body was, ready to be evaluated at any instant of a span."""

from __future__ import annotations

from collections.abc import Sequence
from dataclasses import dataclass
from typing import Final

import numpy as np

from wanderers.arrays import Floats, Ints
from wanderers.ephemeris import chebyshev
from wanderers.ephemeris.blocks import Block
from wanderers.ephemeris.bodies import Body
from wanderers.ephemeris.chebyshev import Located, Series

POSITION: Final = slice(0, 3)
EARTH_DISTANCE: Final = slice(3, 4)
ROTATION: Final = slice(0, 9)
OBLIQUITY: Final = slice(9, 10)
EARTH_POSITION: Final = slice(10, 13)


@dataclass(frozen=True, slots=True)
class Tracks:
    """Consecutive blocks joined.

    Derivatives stand first in every array returned: index 0 the value, 1 the rate per day, 2 the second
    derivative.
    """

    bodies: tuple[Body, ...]
    planets: Series
    moon: Series | None
    observer: Series

    @property
    def start_jd(self) -> float:
        """First TT Julian date held."""
        return self.observer.start_jd

    @property
    def end_jd(self) -> float:
        """Last TT Julian date held."""
        return self.observer.end_jd

    def evaluate(self, body: Body, jd: Floats, components: slice, order: int = 0) -> Floats:
        """Evaluate one body's track: shape (order + 1, components, n)."""
        series, row = self._series_of(body)
        return series.evaluate(row, jd, components, order)

    def evaluate_grid(self, body: Body, jd: Floats, components: slice, order: int = 0) -> Floats:
        """Evaluate one body's track on a rising grid: shape (order + 1, components, n)."""
        series, row = self._series_of(body)
        return np.asarray(series.evaluate_grid(np.array([row]), jd, components, order)[0])

    def locate(self, jd: Floats, order: int = 0) -> Located:
        """Prepare instants for every track but the Moon's: the observer's has the most terms."""
        return self.observer.locate(jd, order)

    def evaluate_each(
        self,
        rows: Ints,
        jd: Floats,
        components: slice,
        order: int = 0,
        located: Located | None = None,
    ) -> Floats:
        """Evaluate one body an instant.

        Args:
            rows: shape (n,), place of each instant's body in ``Body``'s written order.
            jd: shape (n,).
            components: which components.
            order: highest derivative.
            located: the instants prepared by :meth:`locate`, if they already are.

        Returns:
            shape (order + 1, components, n).

        Raises:
            LookupError: a body that the kernel does not hold.
        """
        is_moon = rows == Body.MOON.order
        functions = self._function_of_order()[rows]
        if ((functions < 0) & ~is_moon).any():
            raise LookupError("the kernel holds no such body")
        if not is_moon.any():
            return self.planets.evaluate(functions, jd, components, order, located)
        out = np.empty((order + 1, components.stop - components.start, jd.size))
        moon, _ = self._series_of(Body.MOON)
        out[..., is_moon] = moon.evaluate(0, jd[is_moon], components, order)
        others = ~is_moon
        if others.any():
            some = None if located is None else located.chosen(others)
            out[..., others] = self.planets.evaluate(functions[others], jd[others], components, order, some)
        return out

    def _series_of(self, body: Body) -> tuple[Series, int]:
        if body is Body.MOON:
            if self.moon is None:
                raise LookupError("the kernel holds no Moon")
            return self.moon, 0
        return self.planets, self.bodies.index(body)

    def _function_of_order(self) -> Ints:
        """Return, for each body in written order, its function among the planets' series, -1 if absent."""
        out = np.full(len(Body), -1, dtype=np.int64)
        for function, body in enumerate(self.bodies):
            out[body.order] = function
        return out


def joined(blocks: Sequence[Block], jd_from: float = -np.inf, jd_to: float = np.inf) -> Tracks:
    """Join blocks that follow one another, leaving out segments wholly outside a span."""
    moons = [block.moon for block in blocks if block.moon is not None]
    return Tracks(
        blocks[0].bodies,
        chebyshev.joined([block.planets for block in blocks], jd_from, jd_to),
        chebyshev.joined(moons, jd_from, jd_to) if moons else None,
        chebyshev.joined([block.observer for block in blocks], jd_from, jd_to),
    )
