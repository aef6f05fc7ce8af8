"""How the members of parties stand at one moment each, and which of them shows least."""

from __future__ import annotations

from dataclasses import dataclass

import numpy as np

from wanderers.arrays import Bools, Floats, Ints
from wanderers.ephemeris.appearance import lit_part
from wanderers.events.members import ABSENT
from wanderers.site.sightings import Watch, look_exactly


@dataclass(frozen=True, slots=True)
class Members:
    """Parties at one moment each: arrays of shape (n, most), NaN where there is no member, or of shape (n,).

    Attributes:
        there: whether there is a member.
        altitude_deg: as seen.
        airless_altitude_deg: without refraction.
        azimuth_deg: from north through east.
        magnitude: outside the air.
        margin_sky: by how many magnitudes each criterion of visibility is passed.
        margin_arcus: likewise.
        margin_crescent: likewise.
        sun_separation_deg: from the Sun.
        moon_separation_deg: from the Moon; NaN for the Moon itself.
        sun_altitude_deg: without refraction, shape (n,).
        moon_altitude_deg: as seen, shape (n,).
        moon_illuminated: 0 to 1, shape (n,).
    """

    there: Bools
    altitude_deg: Floats
    airless_altitude_deg: Floats
    azimuth_deg: Floats
    magnitude: Floats
    margin_sky: Floats
    margin_arcus: Floats
    margin_crescent: Floats
    sun_separation_deg: Floats
    moon_separation_deg: Floats
    sun_altitude_deg: Floats
    moon_altitude_deg: Floats
    moon_illuminated: Floats

    @property
    def margin(self) -> Floats:
        """The margin that counts, shape (n, most)."""
        return np.minimum(np.minimum(self.margin_sky, self.margin_arcus), self.margin_crescent)

    @property
    def faintest(self) -> Ints:
        """Which member of each party shows least, shape (n,)."""
        return np.asarray(np.argmin(np.where(self.there, self.margin, np.inf), axis=1))


def members_at(watched: Watch, member: Ints, jd: Floats) -> Members:
    """Look at all members of parties.

    Args:
        watched: from where.
        member: target numbers, shape (n, most), ABSENT where there is none; each party has at least one.
        jd: TT, one moment a party, shape (n,).
    """
    there = member != ABSENT
    instants = np.broadcast_to(jd[:, None], there.shape)[there]
    over, seen, margins, magnitude = look_exactly(watched, member[there], instants)

    def spread(values: Floats) -> Floats:
        out = np.full(there.shape, np.nan)
        out[there] = values
        return out

    first = np.cumsum(there.sum(axis=1)) - there.sum(axis=1)
    return Members(
        there,
        spread(seen.altitude_deg),
        spread(seen.place.airless_altitude_deg),
        spread(seen.place.azimuth_deg),
        spread(magnitude),
        spread(margins.sky),
        spread(margins.arcus),
        spread(margins.crescent),
        spread(seen.lights.sun_separation_deg),
        spread(seen.lights.moon_separation_deg),
        over.sun_altitude_deg[first],
        over.moon_altitude_deg[first],
        lit_part(over.moon_phase_angle_deg[first]),
    )


def of_member(values: Floats, which: Ints) -> Floats:
    """Return one member's value of each party, shape (n,)."""
    return np.asarray(np.take_along_axis(values, which[:, None], axis=1)[:, 0])
