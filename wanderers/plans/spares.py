"""Which planned night serves which moment, and which nights stand in if it is cloudy."""

from __future__ import annotations

from dataclasses import dataclass
from typing import Final

import numpy as np

from wanderers.arrays import Bools, Floats, Ints
from wanderers.plans.season import Moment

NEAR_DAYS: Final = 1.5
"""A night this near in time serves a moment however far the planet moves meanwhile."""
SPARES_FOR_GOOD: Final = 2
"""Nights listed for a planned night that no moment depends on."""


@dataclass(frozen=True, slots=True)
class Line:
    """All nights of a campaign by place and time.

    Attributes:
        jd: TT of the recommended moments, shape (n,).
        along_deg: arc length there, shape (n,).
        near_deg: how far along the path a night still serves a moment.
        stand_in_deg: how far a night that serves none still stands in for another.
    """

    jd: Floats
    along_deg: Floats
    near_deg: float
    stand_in_deg: float

    def serves(self, moment: Moment, moment_deg: float) -> Bools:
        """Return which nights are near enough to a moment, shape (n,)."""
        by_place = np.abs(self.along_deg - moment_deg) <= self.near_deg
        return np.asarray(by_place | (np.abs(self.jd - moment.jd_tt) <= NEAR_DAYS))

    def nearest(self, nights: Ints, moment: Moment, moment_deg: float) -> int | None:
        """Return which of some nights serves a moment best: nearest along the path, then in time."""
        able = nights[self.serves(moment, moment_deg)[nights]]
        if able.size == 0:
            return None
        off = np.abs(self.along_deg[able] - moment_deg)
        return int(able[np.lexsort((np.abs(self.jd[able] - moment.jd_tt), np.round(off, 6)))[0]])


def holders(line: Line, nights: Ints, moments: tuple[Moment, ...], moment_deg: Floats) -> dict[str, int]:
    """Return the night of each moment by the moment's name; a moment that none serves is left out."""
    found = {
        moment.name: line.nearest(nights, moment, place)
        for moment, place in zip(moments, moment_deg.tolist(), strict=True)
    }
    return {name: night for name, night in found.items() if night is not None}


def spare_nights(
    line: Line, planned: Ints, musts: dict[int, float], free: Bools, wanted: int
) -> dict[int, list[int]]:
    """Return the nights that stand in for each planned night, in the order in which to try them.

    A must-night's are the next free nights before the next planned one, near enough to its moment; if they
    are too few, those before it, to be used when bad weather is forecast. The other planned nights take what
    is left after each of them. So no night stands in for two.

    Args:
        line: all nights.
        planned: places of the planned nights still to come and of those kept, rising.
        musts: arc length of the moment served, by must-night.
        free: which nights may stand in, shape (n,).
        wanted: spares for a must-night.
    """
    free = free.copy()
    free[planned] = False
    out: dict[int, list[int]] = {}
    for night in sorted(musts):
        after, before = _around(planned, night, line.jd.size)
        near = np.abs(line.along_deg - musts[night]) <= line.near_deg
        near |= np.abs(line.jd - line.jd[night]) <= NEAR_DAYS
        able = free & near
        found = [*after[able[after]].tolist(), *before[able[before]][::-1].tolist()][:wanted]
        free[found] = False
        out[night] = found
    for night in planned.tolist():
        if night not in musts:
            after, _ = _around(planned, night, line.jd.size)
            near = np.abs(line.along_deg - line.along_deg[night]) <= line.stand_in_deg
            found = after[(free & near)[after]][: min(wanted, SPARES_FOR_GOOD)].tolist()
            free[found] = False
            out[night] = found
    return out


def _around(planned: Ints, night: int, size: int) -> tuple[Ints, Ints]:
    """Return the nights after a planned night until the next, and those since the one before."""
    at = int(np.searchsorted(planned, night))
    following = int(planned[at + 1]) if at + 1 < planned.size else size
    earlier = int(planned[at - 1]) if at > 0 else -1
    return np.arange(night + 1, following), np.arange(earlier + 1, night)
