"""The parabola through three samples: where a sampled quantity turns, between its samples."""

from __future__ import annotations

import numpy as np

from wanderers.arrays import Floats


def lowest(x: Floats, y: Floats, within: tuple[Floats | float, Floats | float]) -> tuple[Floats, Floats]:
    """Return where the parabolas through three evenly spaced points are lowest, and their values there.

    They are sought among the three points; where a curve does not bend upwards, its middle point is returned.

    Args:
        x: rising and evenly spaced, shape (3, ...).
        y: the values there, shape (3, ...).
        within: the first and last ``x`` that are allowed; the middle point's must be.
    """
    step, bend, tilt = x[2] - x[1], y[0] - 2.0 * y[1] + y[2], 0.5 * (y[2] - y[0])
    upwards = bend > 0.0
    free = np.divide(-tilt, bend, out=np.zeros_like(bend), where=upwards).clip(-1.0, 1.0)
    at = np.clip(x[1] + free * step, *within)
    shift = np.divide(at - x[1], step, out=np.zeros_like(bend), where=step > 0.0)
    return at, np.where(upwards, y[1] + shift * (tilt + 0.5 * shift * bend), y[1])


def least_within(x: Floats, y: Floats, within: tuple[float, float]) -> tuple[float, float] | None:
    """Return where within a stretch a sampled curve is least, and its value; None where nothing is known.

    Args:
        x: rising and evenly spaced, shape (n,).
        y: the values there, NaN where unknown, shape (n,).
        within: first and last ``x`` of the stretch.
    """
    usable = np.where((x >= within[0]) & (x <= within[1]) & np.isfinite(y), y, np.inf)
    best = int(np.argmin(usable))
    if not np.isfinite(usable[best]):
        return None
    if not 0 < best < x.size - 1:
        return float(x[best]), float(y[best])
    near = slice(best - 1, best + 2)
    at, value = lowest(x[near], y[near], within)
    return float(at), float(value)
