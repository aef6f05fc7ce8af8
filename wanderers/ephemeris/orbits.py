"""Distances from the Sun, straight from the kernel.

An outer planet's distance wobbles as the other planets move the Sun, so its perihelion can only be told by
looking at decades: too long for tracks that a year's almanac would otherwise not need.
"""

from __future__ import annotations

import numpy as np
from jplephem.spk import SPK

from wanderers.arrays import Floats
from wanderers.ephemeris import timescales
from wanderers.ephemeris.bodies import NAIF_CHAINS, Body
from wanderers.ephemeris.places import Instants, barycentric


def sun_distance(spk: SPK, body: Body, jd_tt: Floats) -> tuple[Floats, Floats]:
    """Return the geometric distance from the Sun (au) and its rate (au/day), shape (n,) each.

    Args:
        spk: the open kernel.
        body: a planet.
        jd_tt: shape (n,), within the kernel.
    """
    line, motion = sun_to_body(spk, body, jd_tt)
    distance = np.sqrt(np.einsum("in,in->n", line, line))
    return distance, np.einsum("in,in->n", line, motion) / distance


def sun_to_body(spk: SPK, body: Body, jd_tt: Floats) -> tuple[Floats, Floats]:
    """Return the geometric line from the Sun (au, ICRS axes) and its rate (au/day), shape (3, n) each."""
    at = Instants(jd_tt, timescales.tdb_minus_tt_days(jd_tt))
    position, velocity = barycentric(spk, NAIF_CHAINS[body], at)
    sun_position, sun_velocity = barycentric(spk, NAIF_CHAINS[Body.SUN], at)
    return position - sun_position, velocity - sun_velocity
