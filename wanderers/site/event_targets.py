"""What must be seen to watch an event: its body and the one it meets, or all that gather."""

from __future__ import annotations

from collections.abc import Mapping
from typing import Final

import numpy as np
import polars as pl

from wanderers.arrays import Ints
from wanderers.ephemeris.bodies import Body
from wanderers.events.kinds import Kind
from wanderers.events.ledger import target_names
from wanderers.site.prospects import ABSENT, Parties

MOON_REACH_DAYS: Final = 0.75
"""The Moon moves 13 degrees a day: half of that from its instant a meeting is hardly one. Common practice, no
source."""
REACH_DAYS: Final = 1.5
"""Everything else is watched on the evening before, of or after its instant."""


def parties_of(events: pl.DataFrame) -> Parties:
    """Return what must be seen together for each event of an event table."""
    numbers = {name: number for number, name in enumerate(target_names())}
    with_moon = (events["body"] == Body.MOON.value) & events["other"].is_not_null()
    reach = np.where(with_moon.to_numpy(), MOON_REACH_DAYS, REACH_DAYS)
    return Parties(events["jd_tt"].to_numpy(), reach, _members(events, numbers))


def _members(events: pl.DataFrame, numbers: Mapping[str, int]) -> Ints:
    """Return target numbers, shape (n, most), ABSENT where an event has fewer."""
    gathered = pl.col("kind") == Kind.GATHERING.value
    pair = pl.concat_list("body", "other").list.drop_nulls()
    names = events.select(pl.when(gathered).then(pl.col("detail").str.split("+")).otherwise(pair)).to_series()
    most = max(int(names.list.len().max() or 0), 1)  # type: ignore[arg-type]
    columns = [
        names.list.get(slot, null_on_oob=True).replace_strict(numbers, default=ABSENT, return_dtype=pl.Int64)
        for slot in range(most)
    ]
    return np.column_stack([column.fill_null(ABSENT).to_numpy() for column in columns])
