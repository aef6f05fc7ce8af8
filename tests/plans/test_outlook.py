"""Seasons side by side: against skyfield's transits and a five-minute sampling of one season's sky."""

from __future__ import annotations

import datetime as dt
from typing import Any
from zoneinfo import ZoneInfo

import numpy as np
import polars as pl
import pytest
from skyfield import almanac as skyfield_almanac
from skyfield.api import load

from tests.site.places import HILL, RIDGE, skyfield_place
from wanderers.ephemeris.bodies import Body
from wanderers.ephemeris.dates import parse_date
from wanderers.ephemeris.store import TrackStore
from wanderers.plans.outlook import OUTLOOK_COLUMNS, RANKS, outlook
from wanderers.site.places import Site

SPAN = (parse_date("2027-01-01"), parse_date("2028-01-01"))
PARTS = ("before", "backward", "after")
MINUTES = 5


@pytest.fixture(scope="module")
def table(store: TrackStore) -> pl.DataFrame:
    return outlook(store, HILL, SPAN, 8.0, (Body.MARS, Body.JUPITER))


@pytest.fixture(scope="module")
def mars(table: pl.DataFrame) -> pl.DataFrame:
    return table.filter(pl.col("body") == "mars")


def test_the_table_has_its_columns_and_seasons_in_order(table: pl.DataFrame) -> None:
    assert dict(table.schema) == OUTLOOK_COLUMNS
    assert table["body"].unique(maintain_order=True).to_list() == ["mars", "jupiter"]
    for body, synodic_days in (("mars", 780.0), ("jupiter", 399.0)):  # mean synodic periods, any handbook
        own = table.filter(pl.col("body") == body)
        middles = own["middle_utc"].str.slice(0, 10).str.to_date()
        assert middles.is_sorted()
        steps = middles.diff().drop_nulls().dt.total_days().to_numpy()
        assert np.abs(steps - synodic_days).max() < 45.0


def test_seasons_whose_middle_lies_in_the_span_are_those_asked_for(table: pl.DataFrame) -> None:
    asked = table.filter("asked_for")
    assert asked["middle_utc"].str.slice(0, 4).to_list() == ["2027", "2027"]
    assert table.filter(~pl.col("asked_for"))["middle_utc"].str.starts_with("2027").sum() == 0
    years = table["middle_utc"].str.slice(0, 4).cast(pl.Int64)
    assert years.min() == 2019 or years.min() == 2020
    assert years.max() == 2035 or years.max() == 2036


@pytest.mark.parametrize(("rank", "figure", "most"), RANKS)
def test_rank_one_is_the_best_of_each_planet(table: pl.DataFrame, rank: str, figure: str, most: bool) -> None:
    for _, own in table.group_by("body"):
        known = own.drop_nulls(figure)
        ordered = sorted(known[figure].to_list(), reverse=most)
        assert known[rank].to_list() == [1 + ordered.index(value) for value in known[figure]]
        assert set(own["ranked_among"]) == {own.height}


def test_most_is_best_save_of_magnitudes() -> None:
    assert {name for name, _, most in RANKS if not most} == {"magnitude_rank"}


def test_years_with_more_dark_hours_are_named_best_first(mars: pl.DataFrame) -> None:
    hours = dict(zip(mars["middle_utc"].str.slice(0, 4), mars["dark_hours"], strict=True))
    for row in mars.drop_nulls("dark_hours").iter_rows(named=True):
        better = sorted(
            (year for year, value in hours.items() if value and value > row["dark_hours"]),
            key=lambda y: -hours[y],
        )
        assert row["years_with_more_dark_hours"] == ", ".join(better)
        assert len(better) == row["dark_hours_rank"] - 1


def test_the_parts_of_the_dark_hours_add_up(table: pl.DataFrame) -> None:
    total = pl.sum_horizontal(f"dark_hours_{part}" for part in PARTS)
    whole = table.drop_nulls("dark_hours")
    assert whole.height == table.height
    np.testing.assert_allclose(whole.select(total).to_series(), whole["dark_hours"], atol=1e-9)


@pytest.mark.parametrize("site", [HILL, RIDGE], ids=lambda site: site.name)
def test_altitudes_are_those_of_skyfields_meridian_transit(
    store: TrackStore, opened: Any, site: Site
) -> None:
    table = outlook(store, site, SPAN, 4.0, (Body.MARS, Body.JUPITER))
    assert table.height > 8
    scale, place = load.timescale(builtin=True), skyfield_place(site)
    for row in table.iter_rows(named=True):
        middle = scale.from_datetime(dt.datetime.fromisoformat(row["middle_utc"]))
        target = opened[f"{row['body']} barycenter"]
        moments = skyfield_almanac.find_transits(
            opened["earth"] + place, target, scale.tt_jd(middle.tt - 0.5), scale.tt_jd(middle.tt + 0.51)
        )
        seen = (opened["earth"] + place).at(moments).observe(target).apparent()
        altitude = seen.altaz("standard")[0].degrees.max()
        # Half a day moves the declination of Mars by up to 0.15 degrees; parallax is below 0.01.
        assert row["culmination_altitude_deg"] == pytest.approx(altitude, abs=0.15)


def test_dark_hours_are_those_of_a_sampling_of_the_sky(store: TrackStore, opened: Any) -> None:
    (row,) = outlook(store, HILL, SPAN, 0.1, (Body.MARS,)).to_dicts()
    # Evenings from that of the first station's date to the one before the second's, from noon to noon.
    dates = (dt.date.fromisoformat(row[f"station_{name}_utc"][:10]) for name in ("retrograde", "direct"))
    start, end = (dt.datetime.combine(date, dt.time(12), tzinfo=ZoneInfo(HILL.zone)) for date in dates)
    scale = load.timescale(builtin=True)
    observer = opened["earth"] + skyfield_place(HILL)
    first, last = (scale.from_datetime(moment).tt for moment in (start, end))
    time = scale.tt_jd(np.arange(first, last, MINUTES / 1_440.0))
    dark = observer.at(time).observe(opened["sun"]).apparent().altaz()[0].degrees <= -12.0
    seen = observer.at(time[dark]).observe(opened["mars barycenter"]).apparent()
    hours = (seen.altaz("standard")[0].degrees >= 30.0).sum() * MINUTES / 60.0
    assert hours > 400.0
    # Each of a night's two ends is off by up to half a step, now one way, now the other.
    assert row["dark_hours_backward"] == pytest.approx(hours, rel=0.003)


def test_the_box_is_as_wide_as_the_path_moves_back(table: pl.DataFrame) -> None:
    # The threefold path lies between the longitudes of its stations: by definition.
    assert (table["path_width_deg"] >= table["path_height_deg"]).all()
    ratio = (table["path_width_deg"] / table["arc_deg"]).to_numpy()
    assert 0.95 < ratio.min() and ratio.max() < 1.35


@pytest.mark.parametrize("end", ["first", "last"])
def test_seasons_cut_by_the_kernels_end_have_gaps_not_guesses(store: TrackStore, end: str) -> None:
    low, high = store.span_jd
    span = (low, low + 300.0) if end == "first" else (high - 300.0, high)
    table = outlook(store, HILL, span, 3.0, (Body.JUPITER, Body.SATURN, Body.NEPTUNE))
    cut = table.filter(pl.col("dark_hours").is_null())
    assert 0 < cut.height < table.height
    parts = [f"dark_hours_{part}" for part in PARTS]
    assert cut.select(pl.any_horizontal(pl.col(name).is_null() for name in parts)).to_series().all()
    assert cut["dark_hours_rank"].null_count() == cut.height
    assert cut["path_width_deg"].null_count() == cut.height
    assert (cut["years_with_more_dark_hours"] == "").all()
    whole = table.drop_nulls("dark_hours")
    assert whole.select(parts).null_count().sum_horizontal().item() == 0
    for _, own in whole.group_by("body"):
        falling = sorted(own["dark_hours"], reverse=True)
        assert own["dark_hours_rank"].to_list() == [1 + falling.index(hours) for hours in own["dark_hours"]]


def test_no_season_near_gives_an_empty_table(store: TrackStore) -> None:
    empty = outlook(store, HILL, (SPAN[0] + 200.0, SPAN[0] + 210.0), 0.01, (Body.MARS,))
    assert empty.is_empty()
    assert dict(empty.schema) == OUTLOOK_COLUMNS
