"""What must be seen to watch an event: its body and the one it meets, or all that gather."""

from __future__ import annotations

from typing import Final

import numpy as np
import polars as pl

from wanderers.ephemeris.bodies import Body
from wanderers.events.members import members_of
from wanderers.site.prospects import Parties

MOON_REACH_DAYS: Final = 0.75
"""The Moon moves 13 degrees a day: half of that from its instant a meeting is hardly one. Common practice, no
source."""
MOON_HASTE_MAG_PER_DAY: Final = 2.4
"""An hour away from it, in which the Moon moves by its own width, outweighs two degrees of height. Common
practice, no source."""
REACH_DAYS: Final = 1.5
"""Everything else is watched on the evening before, of or after its instant."""


def parties_of(events: pl.DataFrame) -> Parties:
    """Return what must be seen together for each event of an event table."""
    with_moon = (events["body"] == Body.MOON.value) & events["other"].is_not_null()
    reach = np.where(with_moon.to_numpy(), MOON_REACH_DAYS, REACH_DAYS)
    haste = np.where(with_moon.to_numpy(), MOON_HASTE_MAG_PER_DAY, 0.0)
    return Parties(events["jd_tt"].to_numpy(), reach, haste, members_of(events))
