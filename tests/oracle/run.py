"""Runs the searches over a span, some years at a time."""

from __future__ import annotations

from collections.abc import Callable, Collection, Iterable
from dataclasses import dataclass
from itertools import combinations, pairwise

import numpy as np
import polars as pl

from tests.oracle import (
    gatherings,
    kinds_constellation,
    kinds_disc,
    kinds_light,
    kinds_pair,
    kinds_single,
    kinds_sun,
)
from tests.oracle.places import BODIES, OUTER, PLANETS, Sky
from tests.oracle.rows import SCHEMA
from tests.oracle.sampling import Grid, sample
from tests.oracle.search import MARGIN

Find = Callable[[Sky, Grid, tuple[str, ...]], pl.DataFrame]
Subjects = tuple[tuple[str, ...], ...]
Job = tuple[Find, tuple[str, ...]]

_EACH = tuple((body,) for body in PLANETS)
_OUTER = tuple((body,) for body in OUTER)
_INNER = (("mercury",), ("venus",))
_PAIRS = tuple(combinations(PLANETS, 2))
_MOON = (("moon",),)
_MOON_PAIRS = tuple(("moon", body) for body in PLANETS)


@dataclass(frozen=True, slots=True)
class Kind:
    """A search and the bodies it is run for, with the Moon apart: it needs a finer step."""

    find: Find
    planets: Subjects = ()
    moon: Subjects = ()


KINDS: dict[str, Kind] = {
    "station": Kind(kinds_single.station, _EACH),
    "opposition": Kind(kinds_sun.opposition, _OUTER),
    "solar_conjunction": Kind(kinds_sun.solar_conjunction, _EACH),
    "quadrature": Kind(kinds_sun.quadrature, _OUTER),
    "greatest_elongation": Kind(kinds_sun.greatest_elongation, _INNER),
    "perigee": Kind(kinds_single.perigee, _EACH, _MOON),
    "apogee": Kind(kinds_single.apogee, _EACH, _MOON),
    "conjunction": Kind(kinds_pair.conjunction, _PAIRS, _MOON_PAIRS),
    "appulse": Kind(kinds_pair.appulse, _PAIRS, _MOON_PAIRS),
    "perihelion": Kind(kinds_single.perihelion, _EACH),
    "aphelion": Kind(kinds_single.aphelion, _EACH),
    "node": Kind(kinds_single.node, _EACH, _MOON),
    "greatest_brilliancy": Kind(kinds_light.greatest_brilliancy, (("venus",),)),
    "ring_plane_crossing": Kind(kinds_light.ring_plane_crossing, (("saturn",),)),
    "transit": Kind(kinds_disc.transit, (("mercury", "sun"), ("venus", "sun"))),
    "occultation": Kind(kinds_disc.occultation, _PAIRS, _MOON_PAIRS),
    "constellation_entry": Kind(kinds_constellation.constellation_entry, (("sun",), *_EACH), _MOON),
    "gathering": Kind(gatherings.gathering),
    "season_point": Kind(kinds_sun.season_point, (("sun",),)),
    "moon_phase": Kind(kinds_sun.moon_phase, (), _MOON),
}

TRACK_KINDS = (
    "station",
    "opposition",
    "solar_conjunction",
    "quadrature",
    "greatest_elongation",
    "perigee",
    "apogee",
    "conjunction",
    "appulse",
)


@dataclass(frozen=True, slots=True)
class Steps:
    """How dense the samples are: some hundredths of the fastest oscillation of any searched function."""

    planets_days: float = 0.25
    moon_days: float = 0.05
    chunk_days: float = 1461.0


def run(
    sky: Sky,
    span: tuple[float, float],
    kinds: Iterable[str],
    *,
    moon: bool = False,
    gathered: Subjects = (),
    bodies: Collection[str] = BODIES,
    steps: Steps | None = None,
) -> pl.DataFrame:
    """Find all events of the given kinds in a half-open span of TT Julian dates.

    Args:
        sky: an open kernel.
        span: from (included), to (excluded).
        kinds: names in ``KINDS``.
        moon: also search the kinds and pairs of the Moon.
        gathered: groups of three bodies or more, for the kind ``gathering``.
        bodies: search only for these and their pairs; the Sun goes without saying.
        steps: density of the samples.

    Returns:
        Rows with the columns of ``rows.SCHEMA``, rising in time.
    """
    steps = steps or Steps()
    jobs = _jobs(tuple(kinds), gathered, moon=moon)
    plan = _plan([job for job in jobs if set(job[1]) <= {"sun", *bodies}], steps)
    tables = [SCHEMA.to_frame()]
    for low, high in _chunks(span, steps.chunk_days):
        for step, jobs in plan:
            grid = sample(sky, _bodies(jobs), (low, high), step, MARGIN)
            for find, subject in jobs:
                found = find(sky, grid, subject)
                tables.append(found.filter((pl.col("jd_tt") >= low) & (pl.col("jd_tt") < high)))
    return pl.concat(tables).sort("jd_tt", "kind", "body", "other", "frame")


def _chunks(span: tuple[float, float], chunk_days: float) -> list[tuple[float, float]]:
    """Divide a span into equal chunks no longer than asked."""
    count = max(1, int(np.ceil((span[1] - span[0]) / chunk_days)))
    edges = np.linspace(span[0], span[1], count + 1).tolist()
    return list(pairwise(edges))


def _jobs(names: tuple[str, ...], gathered: Subjects, *, moon: bool) -> list[Job]:
    """List the searches to run, one a kind and subject."""
    subjects = {name: KINDS[name].planets + (KINDS[name].moon if moon else ()) for name in names}
    if "gathering" in subjects:
        subjects["gathering"] = gathered
    return [(KINDS[name].find, subject) for name in names for subject in subjects[name]]


def _plan(jobs: list[Job], steps: Steps) -> list[tuple[float, list[Job]]]:
    """Divide the searches by sample step: the planets' and the Moon's."""
    planets = [job for job in jobs if "moon" not in job[1]]
    lunar = [job for job in jobs if "moon" in job[1]]
    plan = [(steps.planets_days, planets), (steps.moon_days, lunar)]
    return [(step, part) for step, part in plan if part]


def _bodies(jobs: list[Job]) -> tuple[str, ...]:
    """Name the bodies that some searches need, the Sun always."""
    needed = {body for _, subject in jobs for body in subject} | {"sun"}
    return tuple(body for body in BODIES if body in needed)
