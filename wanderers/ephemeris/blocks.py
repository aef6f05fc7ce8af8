"""One block of tracks: about 25 years of every body, fitted once.

A block is computed from the kernel alone, so blocks can be made in any order, on any executor, on any
machine. Segment edges lie on the kernel's own 32-day granules, inside which JPL's series are smooth.
"""

from __future__ import annotations

from dataclasses import dataclass
from pathlib import Path
from typing import Final

import numpy as np
from jplephem.spk import SPK
from skyfield.api import load

from wanderers.arrays import Floats
from wanderers.ephemeris import chebyshev, frames, places
from wanderers.ephemeris.bodies import Body
from wanderers.ephemeris.chebyshev import Series
from wanderers.ephemeris.nutation import nutation_at_nodes
from wanderers.ephemeris.spk_files import open_spk

FORMAT_VERSION: Final = 8
"""Raise it whenever what a block holds changes: older files are then rebuilt."""

ORIGIN_JD: Final = 2_287_184.5
"""Where block 0 begins: the granules of JPL's DE4xx kernels all lie on this raster of 32 days."""

BLOCK_DAYS: Final = 32 * 286.0
"""25.06 years."""


@dataclass(frozen=True, slots=True)
class Layout:
    """How finely one kind of series is cut: accuracies are in tests/ephemeris/test_tracks.py."""

    segment_days: float
    terms: int


PLANET_LAYOUT: Final = Layout(16.0, 16)
MOON_LAYOUT: Final = Layout(4.0, 12)
OBSERVER_LAYOUT: Final = Layout(16.0, 18)  # nutation's 5-day terms need more terms than any planet


@dataclass(frozen=True, slots=True)
class Block:
    """The fitted series of one block.

    Attributes:
        index: number of the block; it begins at ``ORIGIN_JD + index * BLOCK_DAYS``.
        bodies: functions of ``planets`` in order, the Moon left out.
        planets: components as :func:`wanderers.ephemeris.places.geocentric_place` returns them.
        moon: the same for the Moon; None where the kernel has none.
        observer: 9 components of the rotation GCRS to true ecliptic of date (row by row), the true
            obliquity (rad), and the Earth's barycentric position (au).
    """

    index: int
    bodies: tuple[Body, ...]
    planets: Series
    moon: Series | None
    observer: Series


def block_index(jd: float) -> int:
    """Return the number of the block that holds an instant."""
    return int(np.floor((jd - ORIGIN_JD) / BLOCK_DAYS))


def block_start_jd(index: int) -> float:
    """Return where a block begins."""
    return ORIGIN_JD + index * BLOCK_DAYS


def build_block(
    kernel_path: Path, bodies: tuple[Body, ...], index: int, usable: tuple[float, float]
) -> Block:
    """Fit every series of one block.

    Args:
        kernel_path: the SPK file; opened and closed here.
        bodies: the bodies the kernel holds.
        index: which block.
        usable: first and last TT Julian date at which light-time stays inside the kernel.
    """
    planets = tuple(body for body in bodies if body is not Body.MOON)
    with open_spk(kernel_path) as spk:
        moon = _body_series(spk, (Body.MOON,), MOON_LAYOUT, index, usable) if Body.MOON in bodies else None
        return Block(
            index,
            planets,
            _body_series(spk, planets, PLANET_LAYOUT, index, usable),
            moon,
            _observer_series(spk, index, usable),
        )


def _segments(layout: Layout, index: int, usable: tuple[float, float]) -> tuple[int, Floats, Floats]:
    """Return the first segment's number, and each segment's middle and half length, cut to the kernel."""
    count = round(BLOCK_DAYS / layout.segment_days)
    edges = block_start_jd(index) + layout.segment_days * np.arange(count + 1)
    starts = np.clip(edges[:-1], *usable)
    ends = np.clip(edges[1:], *usable)
    held = ends > starts
    first = index * count + int(np.argmax(held))
    return first, (starts + ends)[held] / 2.0, (ends - starts)[held] / 2.0


def _instants(middle: Floats, half: Floats, terms: int) -> tuple[Floats, Floats]:
    """Return TT instants of every node as day and part, shape (segments * terms,) each."""
    part = np.outer(half, chebyshev.nodes(terms)).ravel()
    return np.repeat(middle, terms), part


def _as_tdb(day: Floats, part: Floats) -> places.Instants:
    time = load.timescale(builtin=True).tt_jd(day, part)
    return places.Instants(np.asarray(time.whole), np.asarray(time.tdb_fraction))


def _series(layout: Layout, segments: tuple[int, Floats, Floats], values: Floats) -> Series:
    """Fit values at the nodes, shape (functions, components, segments * terms)."""
    first, middle, half = segments
    shaped = values.reshape(*values.shape[:2], middle.size, layout.terms)
    coefficients = np.ascontiguousarray(chebyshev.fit(shaped).transpose(1, 3, 0, 2))
    return Series(ORIGIN_JD, layout.segment_days, first, middle, half, coefficients)


def _body_series(
    spk: SPK, bodies: tuple[Body, ...], layout: Layout, index: int, usable: tuple[float, float]
) -> Series:
    segments = _segments(layout, index, usable)
    at = _as_tdb(*_instants(*segments[1:], layout.terms))
    observer = places.observer_at(spk, at)
    values = np.stack([places.geocentric_place(spk, body, observer) for body in bodies])
    return _series(layout, segments, values)


def _observer_series(spk: SPK, index: int, usable: tuple[float, float]) -> Series:
    segments = _segments(OBSERVER_LAYOUT, index, usable)
    day, part = _instants(*segments[1:], OBSERVER_LAYOUT.terms)
    at_nodes = nutation_at_nodes(*segments[1:], chebyshev.nodes(OBSERVER_LAYOUT.terms))
    rotation, obliquity = frames.ecliptic_of_date(
        load.timescale(builtin=True).tt_jd(day, part), (at_nodes[0].ravel(), at_nodes[1].ravel())
    )
    values = np.empty((1, 13, day.size))
    values[0, :9] = rotation.reshape(9, -1)
    values[0, 9] = obliquity
    values[0, 10:] = places.observer_at(spk, _as_tdb(day, part)).position
    return _series(OBSERVER_LAYOUT, segments, values)
