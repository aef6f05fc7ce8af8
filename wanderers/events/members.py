"""Who takes part in each event of an event table: its body and the one it meets, or all that gather."""

from __future__ import annotations

from typing import Final

import numpy as np
import polars as pl

from wanderers.arrays import Floats, Ints
from wanderers.ephemeris.appearance import appearance
from wanderers.ephemeris.bodies import Body
from wanderers.ephemeris.sky import FIRST_STAR, SUN, Sky
from wanderers.ephemeris.store import TrackStore
from wanderers.ephemeris.vectors import separation_deg
from wanderers.events.catalogue import sky_of
from wanderers.events.kinds import Kind
from wanderers.events.ledger import by_block, target_names

ABSENT: Final = -1


def members_of(events: pl.DataFrame) -> Ints:
    """Return target numbers, shape (n, most), those of an event first, ABSENT where it has fewer."""
    gathered = pl.col("kind") == Kind.GATHERING.value
    pair = pl.concat_list("body", "other").list.drop_nulls()
    names = events.select(pl.when(gathered).then(pl.col("detail").str.split("+")).otherwise(pair)).to_series()
    most = int(names.list.len().to_numpy().max(initial=1))
    numbers = {name: number for number, name in enumerate(target_names())}
    columns = [
        names.list.get(slot, null_on_oob=True).replace_strict(numbers, default=ABSENT, return_dtype=pl.Int64)
        for slot in range(most)
    ]
    return np.column_stack([column.fill_null(ABSENT).to_numpy() for column in columns])


def member_figures(store: TrackStore, events: pl.DataFrame) -> pl.DataFrame:
    """Return how faint and how near to the Sun the members of each event are at its instant.

    Args:
        store: the tracks.
        events: in any order.

    Returns:
        ``faintest_magnitude`` and ``least_elongation_deg`` (the Sun's own left out), null where unknown, one
        row an event.
    """
    ordered = events.select("kind", "detail", "body", "other", "jd_tt").with_row_index("row").sort("jd_tt")
    member, jd = members_of(ordered), ordered["jd_tt"].to_numpy()

    def look_up(some: slice) -> dict[str, np.ndarray]:
        if jd[some].size == 0:
            return {"faintest_magnitude": np.empty(0), "least_elongation_deg": np.empty(0)}
        return _figures(sky_of(store, float(jd[some][0]), float(jd[some][-1])), member[some], jd[some])

    found = by_block(store, jd, look_up)
    table = pl.DataFrame({name: pl.Series(values, nan_to_null=True) for name, values in found.items()})
    return table.with_columns(ordered["row"]).sort("row").drop("row")


def _figures(sky: Sky, member: Ints, jd: Floats) -> dict[str, np.ndarray]:
    there = member != ABSENT
    instants = np.broadcast_to(jd[:, None], there.shape)[there]
    magnitude, elongation = np.full((2, *there.shape), np.nan)
    magnitude[there], elongation[there] = (
        _magnitude(sky, member[there], instants),
        _elongation(sky, member[there], instants),
    )
    unknown = there & np.isnan(magnitude)
    faintest = np.where(unknown, np.inf, np.where(there, magnitude, -np.inf)).max(axis=1)
    nearest = np.where(np.isnan(elongation), np.inf, elongation).min(axis=1)
    return {
        "faintest_magnitude": np.where(np.isfinite(faintest), faintest, np.nan),
        "least_elongation_deg": np.where(np.isfinite(nearest), nearest, np.nan),
    }


def _magnitude(sky: Sky, target: Ints, jd: Floats) -> Floats:
    out = np.full(jd.size, np.nan)
    star = target >= FIRST_STAR
    if star.any() and sky.catalogue is not None:
        out[star] = sky.catalogue.v_mag[target[star] - FIRST_STAR]
    out[~star] = appearance(sky, target[~star], jd[~star]).magnitude
    return out


def _elongation(sky: Sky, target: Ints, jd: Floats) -> Floats:
    sun = sky.apparent(np.full(jd.size, Body.SUN.order), jd)[0]
    apart = separation_deg(sky.apparent(target, jd)[0], sun)
    return np.where(target == SUN, np.nan, apart)
