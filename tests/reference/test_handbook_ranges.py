"""Means and extremes over two centuries of the event table against the figures handbooks print."""

from __future__ import annotations

from collections.abc import Callable

import numpy as np
import polars as pl
import pytest

from tests.reference.published import jd_of_date, rows
from tests.reference.test_published_events import Almanac
from wanderers.arrays import Floats

SPAN = (jd_of_date("1900-01-01"), jd_of_date("2100-01-01"))
KINDS = ["station", "opposition", "solar_conjunction", "greatest_elongation", "perigee"]
STATISTICS: dict[str, Callable[[Floats], float]] = {"mean": np.mean, "min": np.min, "max": np.max}
ROWS = rows("handbook_ranges")


@pytest.fixture(scope="module")
def two_centuries(published_almanac: Almanac) -> pl.DataFrame:
    bodies = ["sun", "mercury", "venus", "mars", "jupiter", "saturn", "uranus", "neptune"]
    return published_almanac(*SPAN, KINDS, ["ecliptic"], bodies)


def synodic_days(events: pl.DataFrame) -> Floats:
    """Times between neighbouring oppositions, or inferior conjunctions."""
    middle = (pl.col("kind") == "opposition") | (pl.col("detail") == "inferior")
    return np.asarray(np.diff(events.filter(middle)["jd_tt"].to_numpy()))


def retrogradations(events: pl.DataFrame) -> tuple[pl.DataFrame, pl.DataFrame]:
    """The stations at which each whole retrogradation begins, and those at which it ends."""
    stations = events.filter(pl.col("kind") == "station")
    begin = (pl.col("detail") == "retrograde") & (pl.col("detail").shift(-1) == "direct")
    begins = stations.select(begin.fill_null(False)).to_series()
    return stations.filter(begins), stations.filter(begins.shift(1, fill_value=False))


def retrograde_days(events: pl.DataFrame) -> Floats:
    """Durations of the retrogradations."""
    first, last = retrogradations(events)
    return np.asarray(last["jd_tt"] - first["jd_tt"])


def arc_deg(events: pl.DataFrame) -> Floats:
    """Longitudes gone back."""
    first, last = retrogradations(events)
    return np.asarray(first["longitude_deg"] - last["longitude_deg"]) % 360.0


def elongation_deg(events: pl.DataFrame) -> Floats:
    """Angles at the greatest elongations."""
    return np.asarray(events.filter(pl.col("kind") == "greatest_elongation")["elongation_deg"])


def diameter_arcsec(events: pl.DataFrame) -> Floats:
    """Diameters at the perigees."""
    return np.asarray(events.filter(pl.col("kind") == "perigee")["diameter_arcsec"])


QUANTITIES = {
    function.__name__: function
    for function in (synodic_days, retrograde_days, arc_deg, elongation_deg, diameter_arcsec)
}


@pytest.mark.parametrize("row", ROWS, ids=lambda row: f"{row['statistic']} {row['quantity']} {row['body']}")
def test_handbook_figure(row: dict[str, str], two_centuries: pl.DataFrame) -> None:
    events = two_centuries.filter(pl.col("body") == row["body"]).sort("jd_tt")
    values = QUANTITIES[row["quantity"]](events)
    assert values.size > 50  # a figure of two centuries, not of a few events
    found = STATISTICS[row["statistic"]](values)
    assert found == pytest.approx(float(row["published"]), abs=float(row["tolerance"])), row[
        "tolerance_reason"
    ]
