"""The table of nights: what limits, hills and haze take away, and that spans do not matter."""

from __future__ import annotations

import datetime as dt
from itertools import pairwise

import numpy as np
import polars as pl
import pytest
from polars.testing import assert_frame_equal

from tests.site.places import HILL, PLATEAU, RIDGE
from wanderers.ephemeris.bodies import Body
from wanderers.ephemeris.store import TrackStore
from wanderers.errors import SpanError
from wanderers.site.nights import WATCHED, nights
from wanderers.site.places import HorizonProfile, Site
from wanderers.site.rules import Rules
from wanderers.site.visibility import VERDICTS, Criteria

MARCH = (np.datetime64("2027-03-01"), np.datetime64("2027-04-01"))


def instants(table: pl.DataFrame, name: str) -> list[dt.datetime]:
    return [dt.datetime.fromisoformat(text) for text in table[name].drop_nulls()]


def test_splitting_a_span_changes_nothing(store: TrackStore) -> None:
    for site in (HILL, RIDGE, PLATEAU):
        middle = np.datetime64("2027-03-28")
        whole = nights(store, site, (np.datetime64("2027-03-20"), np.datetime64("2027-04-05")))
        parts = [
            nights(store, site, (np.datetime64("2027-03-20"), middle)),
            nights(store, site, (middle, np.datetime64("2027-04-05"))),
        ]
        assert_frame_equal(whole, pl.concat(parts), rel_tol=1e-6, abs_tol=1e-6)
        for name in ("best_utc", "verdict", "verdict_reason", "rise_utc", "remark"):
            assert whole[name].to_list() == pl.concat(parts)[name].to_list()


def test_a_long_span_is_what_its_years_are(store: TrackStore) -> None:
    whole = nights(store, HILL, (np.datetime64("2027-06-01"), np.datetime64("2028-09-01")), [Body.VENUS])
    part = nights(store, HILL, (np.datetime64("2028-06-01"), np.datetime64("2028-09-01")), [Body.VENUS])
    assert whole["evening_date"].n_unique() == whole.height == 458
    tail = whole.tail(part.height)
    for name in ("evening_date", "window_start_utc", "best_utc", "set_utc", "verdict"):
        assert tail[name].to_list() == part[name].to_list()


def test_no_verdict_improves_when_the_altitude_limit_rises(store: TrackStore) -> None:
    span = (np.datetime64("2027-09-01"), np.datetime64("2027-12-01"))
    order = {verdict.value: index for index, verdict in enumerate(VERDICTS)}
    for site in (HILL, RIDGE):
        found = [
            nights(store, site, span, rules=Rules(min_altitude_deg=limit))["verdict"].replace_strict(order)
            for limit in (0.0, 3.0, 5.0, 10.0, 15.0, 20.0, 30.0, 45.0, 60.0)
        ]
        for lower, higher in pairwise(found):
            assert (higher >= lower).all()


def test_a_window_never_grows_when_the_limits_tighten(store: TrackStore) -> None:
    def hours(rules: Rules) -> float:
        table = nights(store, HILL, MARCH, rules=rules).filter(pl.col("best_utc").is_not_null())
        opens, closes = instants(table, "window_start_utc"), instants(table, "window_end_utc")
        return sum((b - a).total_seconds() for a, b in zip(opens, closes, strict=True)) / 3_600.0

    lengths = [
        hours(Rules(5.0, -6.0)),
        hours(Rules(10.0, -6.0)),
        hours(Rules(10.0, -12.0)),
        hours(Rules(10.0, -18.0)),
    ]
    assert lengths == sorted(lengths, reverse=True) and len(set(lengths)) == 4


def test_hills_of_the_site_cut_the_window(store: TrackStore) -> None:
    wall = HorizonProfile(((0.0, 0.0), (200.0, 0.0), (201.0, 30.0), (359.0, 30.0)))
    walled = Site("walled", HILL.latitude_deg, HILL.longitude_deg, HILL.elevation_m, HILL.zone, wall)
    free, cut = (nights(store, place, MARCH, [Body.SATURN, Body.JUPITER]) for place in (HILL, walled))
    saturn = cut.filter(pl.col("body") == "saturn")
    assert free.filter(pl.col("body") == "saturn")["best_utc"].null_count() < 31
    assert saturn["best_utc"].null_count() == 31  # in the southwest, below 30 degrees, all month
    hidden = saturn.filter(pl.col("verdict_reason").str.contains("hidden by the site's horizon"))
    assert hidden.height > 0
    jupiter = cut.filter(pl.col("body") == "jupiter")
    assert (jupiter["window_end_utc"] < free.filter(pl.col("body") == "jupiter")["window_end_utc"]).all()
    assert (jupiter["altitude_deg"] >= wall.altitude_deg(jupiter["azimuth_deg"].to_numpy()) - 1e-4).all()


def test_haze_and_a_bright_sky_take_away(store: TrackStore) -> None:
    def eyes(criteria: Criteria) -> int:
        table = nights(store, HILL, MARCH, rules=Rules(criteria=criteria))
        return table.filter(pl.col("verdict") == "naked_eye").height

    assert eyes(Criteria()) > eyes(Criteria(extinction_mag=0.8)) > 0
    assert eyes(Criteria()) >= eyes(Criteria(dark_zenith_mag=16.0))


def test_without_a_choice_the_moon_and_the_planets_to_neptune_are_listed(store: TrackStore) -> None:
    table = nights(store, HILL, (MARCH[0], MARCH[0] + np.timedelta64(1, "D")))
    assert table["body"].to_list() == [body.value for body in WATCHED]


def test_outside_the_kernel_nothing_is_guessed(store: TrackStore) -> None:
    with pytest.raises(SpanError, match="DE440"):
        nights(store, HILL, (np.datetime64("2700-01-01"), np.datetime64("2700-01-02")))
