"""Names of events that stay the same in every run, span and version."""

from __future__ import annotations

from collections.abc import Callable
from typing import Final

import numpy as np

from wanderers.arrays import Floats, Ints
from wanderers.ephemeris import vectors
from wanderers.ephemeris.bodies import INNER, Body
from wanderers.ephemeris.frames import ecliptic_of_j2000
from wanderers.ephemeris.sky import FIRST_STAR
from wanderers.ephemeris.stars import StarCatalogue
from wanderers.events import cycles
from wanderers.events.kinds import Batch, Kind

MOON: Final = Body.MOON.order
_INNER: Final = [body.order for body in INNER]


def round_numbers(found: Batch, catalogue: StarCatalogue) -> Ints:
    """Return the number of the cycle each event belongs to, shape (n,)."""
    return _ROUND_OF[found.kind](found, catalogue)


def ordinals(found: Batch, rounds: Ints) -> Ints:
    """Return 1 for the first event of its bodies, detail and round in a batch, 2 for the second, ...

    Counts in order of time; right only if the batch holds every event of each round it touches.
    """
    keys = np.stack([found.body, found.other, _told_apart(found), rounds])
    order = np.lexsort((found.jd, *keys))
    sorted_keys = keys[:, order]
    starts = np.ones(found.jd.size, dtype=np.bool_)
    starts[1:] = (sorted_keys[:, 1:] != sorted_keys[:, :-1]).any(axis=0)
    position = np.arange(found.jd.size)
    first = np.maximum.accumulate(np.where(starts, position, 0))
    out = np.empty(found.jd.size, dtype=np.int64)
    out[order] = position - first + 1
    return out


def _told_apart(found: Batch) -> Ints:
    """Return the detail where it is part of an event's identity; a quasi appulse is still that appulse."""
    if found.kind is Kind.APPULSE:
        return found.detail // 2
    if found.entered is not None:
        return found.detail * 100 + found.entered
    return found.detail


def _nearest(phase: Floats) -> Ints:
    return np.round(phase).astype(np.int64)


def _between(phase: Floats) -> Ints:
    return np.floor(phase).astype(np.int64)


def _synodic(found: Batch, _: StarCatalogue) -> Ints:
    return _nearest(cycles.synodic_phase(found.body, found.jd))


def _solar_conjunction(found: Batch, _: StarCatalogue) -> Ints:
    phase = cycles.synodic_phase(found.body, found.jd)
    inferior = np.array([word == "inferior" for word in found.details])[found.detail]
    return np.where(inferior, _nearest(phase), _between(phase))


def _perigee(found: Batch, _: StarCatalogue) -> Ints:
    return _round_of_distance(found, _nearest)


def _apogee(found: Batch, _: StarCatalogue) -> Ints:
    return _round_of_distance(found, _between)


def _round_of_distance(found: Batch, rounding: Callable[[Floats], Ints]) -> Ints:
    """Count Sun and Moon from their own perigees, planets from their meetings with the Earth."""
    planet = found.body > MOON
    anomalistic = cycles.anomalistic_phase(found.body, found.jd)
    return rounding(np.where(planet, cycles.synodic_phase(found.body, found.jd), anomalistic))


def _perihelion(found: Batch, _: StarCatalogue) -> Ints:
    return _nearest(cycles.anomalistic_phase(found.body, found.jd))


def _aphelion(found: Batch, _: StarCatalogue) -> Ints:
    return _between(cycles.anomalistic_phase(found.body, found.jd))


def _node(found: Batch, _: StarCatalogue) -> Ints:
    phase = cycles.draconic_phase(found.body, found.jd)
    ascending = np.array([word == "ascending" for word in found.details])[found.detail]
    return np.where(ascending, _nearest(phase), _between(phase))


def _approach_year(found: Batch, catalogue: StarCatalogue) -> Ints:
    """Return the number of the year in which two bodies come together, shape (n,).

    Slow bodies near each other for decades approach once a year, as the Earth swings by: the year is
    counted by synodic rounds, of the second body, or of the first where the second is a star. Its ends are
    put where no approach is: with an inner planet, which stays by the Sun, at opposition; else at
    conjunction with the Sun. Where the first body itself laps the second within a year, laps will do.
    """
    star = found.other >= FIRST_STAR
    slower = np.where(star, found.body, found.other)
    phase = cycles.synodic_phase(slower, found.jd)
    inner = np.isin(found.body, _INNER)
    years = np.where(inner, np.floor(phase), np.round(phase)).astype(np.int64)
    laps = (found.body == MOON) | (star & inner) | np.isin(found.other, _INNER)
    return np.where(laps, encounters(found, catalogue), years)


def encounters(found: Batch, catalogue: StarCatalogue) -> Ints:
    """Return the number of the encounter of two bodies, counted by laps, shape (n,)."""
    return _nearest(
        cycles.encounter_phase(found.body, found.other, found.jd, _star_longitudes(catalogue, found.other))
    )


def _star_longitudes(catalogue: StarCatalogue, other: Ints) -> Floats:
    """Return J2000 ecliptic longitudes of the stars among targets, zero for the rest."""
    out = np.zeros(other.size)
    star = other >= FIRST_STAR
    if star.any():
        ra, dec = np.radians(catalogue.ra_deg), np.radians(catalogue.dec_deg)
        direction = np.stack([np.cos(dec) * np.cos(ra), np.cos(dec) * np.sin(ra), np.sin(dec)])
        longitude = vectors.longitude_deg(vectors.rotate(ecliptic_of_j2000(), direction[None]))[0]
        out[star] = longitude[other[star] - FIRST_STAR]
    return out


def _lunation(found: Batch, _: StarCatalogue) -> Ints:
    return _nearest(cycles.lunation_phase(found.jd) - found.detail / 4.0)


def _season(found: Batch, _: StarCatalogue) -> Ints:
    return _nearest(cycles.solar_year(found.jd) - found.detail / 4.0)


def _constellation(found: Batch, _: StarCatalogue) -> Ints:
    """Count rounds among the constellations; slow planets, years at a boundary, by synodic rounds."""
    longitude = np.zeros(0) if found.figure_deg is None else found.figure_deg
    rounds = cycles.constellation_round(found.body, found.jd, longitude)
    years = _nearest(cycles.synodic_phase(found.body, found.jd))
    return np.where(found.body >= Body.JUPITER.order, years, rounds)


def _day(found: Batch, _: StarCatalogue) -> Ints:
    """Return the TT day: for kinds that belong to no cycle."""
    return np.floor(found.jd + 0.5).astype(np.int64)


_ROUND_OF: Final[dict[Kind, Callable[[Batch, StarCatalogue], Ints]]] = {
    Kind.STATION: _synodic,
    Kind.OPPOSITION: _synodic,
    Kind.SOLAR_CONJUNCTION: _solar_conjunction,
    Kind.QUADRATURE: _synodic,
    Kind.GREATEST_ELONGATION: _synodic,
    Kind.PERIGEE: _perigee,
    Kind.APOGEE: _apogee,
    Kind.PERIHELION: _perihelion,
    Kind.APHELION: _aphelion,
    Kind.GREATEST_BRILLIANCY: _synodic,
    Kind.CONJUNCTION: _approach_year,
    Kind.APPULSE: _approach_year,
    Kind.OCCULTATION: _approach_year,
    Kind.TRANSIT: _synodic,
    Kind.GATHERING: _day,
    Kind.CONSTELLATION_ENTRY: _constellation,
    Kind.NODE: _node,
    Kind.SEASON_POINT: _season,
    Kind.RING_PLANE_CROSSING: _day,
    Kind.MOON_PHASE: _lunation,
}
