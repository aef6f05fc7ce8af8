"""The floor: nutation, observe and aberration at a block's track nodes, by skyfield, on one core."""

from __future__ import annotations

from skyfield.api import load
from skyfield.nutationlib import iau2000a_radians
from skyfield.relativity import add_aberration

from wanderers.ephemeris import blocks
from wanderers.ephemeris.blocks import Layout
from wanderers.ephemeris.store import TrackStore

PLANET_NAMES = (
    "sun",
    "mercury",
    "venus",
    "mars barycenter",
    "jupiter barycenter",
    "saturn barycenter",
    "uranus barycenter",
    "neptune barycenter",
    "pluto barycenter",
)


def bare_pass(store: TrackStore, index: int) -> None:
    """Evaluate everything a block is fitted to, and throw it away."""
    ephemeris = load(str(store.kernel.path))
    timescale = load.timescale(builtin=True)

    def nodes(layout: Layout) -> object:
        segments = blocks._segments(layout, index, store.span_jd)
        return timescale.tt_jd(*blocks._instants(*segments[1:], layout.terms))

    iau2000a_radians(nodes(blocks.OBSERVER_LAYOUT))
    for names, layout in ((PLANET_NAMES, blocks.PLANET_LAYOUT), (("moon",), blocks.MOON_LAYOUT)):
        earth = ephemeris["earth"].at(nodes(layout))
        for name in names:
            seen = earth.observe(ephemeris[name])
            add_aberration(seen.xyz.au.copy(), earth.velocity.au_per_d, seen.light_time)
