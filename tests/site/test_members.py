"""Who takes part in events, how faint and how near to the Sun they are.

Held against skyfield (places, magnitudes) and the star catalogue's file as it is packaged.
"""

from __future__ import annotations

import csv
from importlib.resources import files
from typing import Any

import numpy as np
import polars as pl
import pytest
from polars.testing import assert_frame_equal
from skyfield.api import load
from skyfield.magnitudelib import planetary_magnitude

from tests.direct import Direct
from wanderers import schema
from wanderers.ephemeris.bodies import Body
from wanderers.ephemeris.dates import parse_date
from wanderers.ephemeris.store import TrackStore
from wanderers.events.almanac import almanac
from wanderers.events.catalogue import Query
from wanderers.events.kinds import Kind
from wanderers.events.members import ABSENT, member_figures, members_of

BODIES = [body.value for body in Body]


@pytest.fixture(scope="module")
def catalogue() -> dict[str, float]:
    """V of every star met, by the name that stands in the event table."""
    text = (files("wanderers.data") / "ecliptic_stars.csv").read_text(encoding="utf-8")
    return {
        row["name"] or f"HIP {row['hip']}": float(row["v_mag"]) for row in csv.DictReader(text.splitlines())
    }


def members(row: dict[str, Any]) -> list[str]:
    names = row["detail"].split("+") if row["kind"] == "gathering" else [row["body"], row["other"]]
    return [name for name in names if name is not None]


def by_skyfield(jpl: Any, name: str, jd_tt: float) -> float:
    """Magnitude of a planet: NaN where skyfield gives none."""
    target = jpl[name if name in ("mercury", "venus") else f"{name} barycenter"]
    observed = jpl["earth"].at(load.timescale(builtin=True).tt_jd(jd_tt)).observe(target)
    return float(planetary_magnitude(observed))


# skyfield puts the Sun at the barycentre of the Solar System, up to 0.009 au away (its documentation of
# planetary_magnitude says that the phase is taken there). For planets beyond the Earth, that changes
# distance and phase by less than 0.02 mag; Mercury's and Venus's phase by up to 1.5 degrees.
LIMIT_MAG = {"mercury": 0.12, "venus": 0.05}


def test_the_faintest_of_all_members_counts_stars_among_them(
    figures_of_2027: pl.DataFrame, jpl: Any, catalogue: dict[str, float]
) -> None:
    known = {"mercury", "venus", "mars", "jupiter", "saturn", "uranus", "neptune"}
    some = [
        row
        for row in figures_of_2027.iter_rows(named=True)
        if all(n in known or n in catalogue for n in members(row))
    ]
    some = [row for row in some if row["elongation_deg"] is None or row["elongation_deg"] > 8.0]
    decided_by_star = 0
    for row in some[:: max(len(some) // 120, 1)]:
        of = {
            name: catalogue[name] if name in catalogue else by_skyfield(jpl, name, row["jd_tt"])
            for name in members(row)
        }
        faintest = max(of, key=lambda name: of[name])
        decided_by_star += faintest in catalogue
        if not np.isnan(list(of.values())).any():
            limit = 1e-9 if faintest in catalogue else LIMIT_MAG.get(faintest, 0.02)
            assert row["faintest_magnitude"] == pytest.approx(of[faintest], abs=limit), row["event_id"]
    assert decided_by_star > 10


def test_a_star_is_as_bright_as_its_catalogue_says(
    figures_of_2027: pl.DataFrame, catalogue: dict[str, float]
) -> None:
    with_star = figures_of_2027.filter(
        pl.col("other").is_in(list(catalogue)), pl.col("body").is_in(["venus", "jupiter"])
    )
    assert with_star.height > 10
    for row in with_star.iter_rows(named=True):  # both planets outshine every star near their paths
        assert row["faintest_magnitude"] == catalogue[row["other"]]


def test_gatherings_are_judged_by_all_who_gather(store: TrackStore, direct: Direct, jpl: Any) -> None:
    query = Query(parse_date("2020-01-01"), parse_date("2026-01-01"), frozenset({Kind.GATHERING}))
    gathered = almanac(store, query)
    gathered = gathered.hstack(member_figures(store, gathered))
    several = gathered.filter(~pl.col("detail").str.contains("moon|pluto"))
    assert several.height > 3
    for row in several.iter_rows(named=True):
        names, jd = row["detail"].split("+"), np.array([row["jd_tt"]])
        assert len(names) >= 3
        nearest = min(float(direct.separation_deg(Body(name), Body.SUN, jd)[0]) for name in names)
        assert row["least_elongation_deg"] == pytest.approx(nearest, abs=2e-5)
        magnitudes = [by_skyfield(jpl, name, row["jd_tt"]) for name in names]
        if nearest > 8.0 and not np.isnan(magnitudes).any():
            assert row["faintest_magnitude"] == pytest.approx(max(magnitudes), abs=max(LIMIT_MAG.values()))


def test_the_least_elongation_is_that_of_skyfield(figures_of_2027: pl.DataFrame, direct: Direct) -> None:
    two = figures_of_2027.filter(pl.col("other").is_in(BODIES), pl.col("body") != "sun").gather_every(5)
    assert two.height > 20
    for row in two.iter_rows(named=True):
        jd = np.array([row["jd_tt"]])
        apart = [float(direct.separation_deg(Body(row[name]), Body.SUN, jd)[0]) for name in ("body", "other")]
        assert row["least_elongation_deg"] == pytest.approx(min(apart), abs=2e-5)  # 0.07 arcseconds


def test_events_of_the_sun_have_no_elongation(figures_of_2027: pl.DataFrame) -> None:
    alone = figures_of_2027.filter(pl.col("body") == "sun", pl.col("other").is_null())
    assert alone.height > 3
    assert alone["least_elongation_deg"].null_count() == alone.height


def test_figures_do_not_depend_on_the_order_of_rows(store: TrackStore, figures_of_2027: pl.DataFrame) -> None:
    turned = figures_of_2027.sample(fraction=1.0, shuffle=True, seed=3)
    again = member_figures(store, turned.select(list(schema.EVENT_COLUMNS)))
    assert_frame_equal(again, turned.select(again.columns))


def test_a_table_without_rows_has_figures_without_rows(store: TrackStore) -> None:
    assert member_figures(store, pl.DataFrame(schema=schema.EVENT_COLUMNS)).height == 0


def test_every_event_has_as_many_members_as_names(figures_of_2027: pl.DataFrame) -> None:
    counted = (members_of(figures_of_2027) != ABSENT).sum(axis=1)
    assert counted.tolist() == [len(members(row)) for row in figures_of_2027.iter_rows(named=True)]
