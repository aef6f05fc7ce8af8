"""Events from a site where it is hard: at the kernel's ends, without a Moon, at the pole, behind hills.

What can be seen at all is held against a sampling of the sky by skyfield.
"""

from __future__ import annotations

from dataclasses import replace
from pathlib import Path
from typing import Any

import numpy as np
import polars as pl
import pytest
from polars.testing import assert_frame_equal
from skyfield.api import load

from tests.site.places import ATOLL, CAPE, EVERYWHERE, HILL, POLE, RIDGE, SUMMIT, skyfield_place
from wanderers.ephemeris.bodies import Body
from wanderers.ephemeris.dates import parse_date
from wanderers.ephemeris.kernels import inspect_kernel
from wanderers.ephemeris.store import TrackStore
from wanderers.ephemeris.timescales import jd_tt_from_utc
from wanderers.events.almanac import almanac
from wanderers.events.catalogue import Query
from wanderers.events.kinds import Kind
from wanderers.site.almanac import almanac_from_site, seen_from_site
from wanderers.site.audience import Audience, chosen_by_figures, chosen_from_site
from wanderers.site.event_view import from_site
from wanderers.site.places import HorizonProfile, Site, horizon_of
from wanderers.site.rules import Rules

BODIES = [body.value for body in Body]
SYSTEMS = ("mars", "jupiter", "saturn", "uranus", "neptune", "pluto")
HIDDEN = "hidden by the site's horizon"
FEW_DAYS = 12.0
SAMPLES_A_DAY = 144


def apparent(jpl: Any, site: Site, name: str, jd_tt: Any) -> Any:
    target = jpl[f"{name} barycenter" if name in SYSTEMS else name]
    time = load.timescale(builtin=True).tt_jd(jd_tt)
    return (jpl["earth"] + skyfield_place(site)).at(time).observe(target).apparent()


def instants(texts: pl.Series) -> np.ndarray:
    return jd_tt_from_utc(np.array([parse_date(text) for text in texts]))


# ---- the ends of the kernel


@pytest.fixture(scope="module", params=["first", "last"])
def days_at_an_end(store: TrackStore, request: pytest.FixtureRequest) -> pl.DataFrame:
    low, high = store.span_jd
    span = (low, low + FEW_DAYS) if request.param == "first" else (high - FEW_DAYS, high)
    return almanac(store, Query(*span))


@pytest.mark.parametrize(
    "site", [HILL, ATOLL, POLE, replace(ATOLL, zone="UTC")], ids=lambda site: f"{site.name} {site.zone}"
)
def test_at_the_kernels_ends_every_event_has_a_verdict_within_the_kernel(
    store: TrackStore, days_at_an_end: pl.DataFrame, site: Site
) -> None:
    low, high = store.span_jd
    seen = seen_from_site(store, site, days_at_an_end)
    assert seen.height == days_at_an_end.height > 20
    assert seen["verdict"].null_count() == seen["verdict_reason"].null_count() == 0
    watchable = seen.filter(pl.col("best_utc").is_not_null())
    assert watchable.height > 2
    for name in ("window_start_utc", "best_utc", "window_end_utc"):
        jd = instants(watchable[name])
        assert low < jd.min() and jd.max() < high


@pytest.mark.parametrize("site", [HILL, RIDGE, ATOLL], ids=lambda site: site.name)
def test_an_event_at_the_kernels_end_is_seen_alone_as_among_others(
    store: TrackStore, days_at_an_end: pl.DataFrame, site: Site
) -> None:
    whole = from_site(store, site, days_at_an_end)
    for place in (0, 1, -2, -1):
        alone = from_site(store, site, days_at_an_end[place])
        assert_frame_equal(alone, whole[place], abs_tol=1e-7)


def test_at_the_kernels_ends_the_instant_is_looked_at_itself(
    store: TrackStore, days_at_an_end: pl.DataFrame, jpl: Any
) -> None:
    # The whole evenings there are may end hours before the last event, or begin after the first.
    seen = from_site(store, HILL, days_at_an_end).filter(pl.col("body") != "moon")
    for row in (seen.row(0, named=True), seen.row(-1, named=True)):
        altitude = apparent(jpl, HILL, "sun", row["jd_tt"]).altaz()[0].degrees
        assert row["instant_sun_altitude_deg"] == pytest.approx(altitude, abs=0.02)  # Delta-T of 1550, 2650
        body = apparent(jpl, HILL, row["body"], row["jd_tt"]).altaz()[0].degrees
        raised = row["instant_altitude_deg"] - body
        assert -0.02 < raised < 0.6  # refraction


# ---- a kernel without the Moon


@pytest.fixture(scope="module")
def moonless(small_kernel: Path, cache_folder: Path) -> TrackStore:
    return TrackStore(inspect_kernel(small_kernel, cache_folder), cache_folder)


@pytest.fixture(scope="module")
def without_moon(moonless: TrackStore) -> pl.DataFrame:
    return almanac_from_site(moonless, Query(parse_date("2001-01-01"), parse_date("2001-04-01")), HILL)


def test_without_a_moon_in_the_kernel_events_are_seen_by_no_moonlight(without_moon: pl.DataFrame) -> None:
    assert without_moon.filter(pl.col("verdict") == "naked_eye").height > 10
    for name in ("moon_illuminated", "moon_altitude_deg", "moon_separation_deg"):
        assert without_moon[name].null_count() == without_moon.height
    assert not without_moon["verdict_reason"].str.contains("(?i)moon").any()


def test_without_a_moon_windows_are_those_of_a_kernel_with_one(
    store: TrackStore, without_moon: pl.DataFrame
) -> None:
    # The Moon changes how dark the sky is, not when bodies are high and the Sun is low.
    full = from_site(store, HILL, without_moon.select(almanac_columns(without_moon)))
    both = without_moon["best_utc"].is_not_null() & full["best_utc"].is_not_null()
    assert both.to_list() == without_moon["best_utc"].is_not_null().to_list()
    assert both.sum() > 10
    same = without_moon["evening_date"] == full["evening_date"]
    for name in ("window_start_utc", "window_end_utc"):
        ours, theirs = (instants(table.filter(both & same)[name]) for table in (without_moon, full))
        assert np.abs(ours - theirs).max() * 86_400.0 < 2.0


def almanac_columns(table: pl.DataFrame) -> list[str]:
    return table.columns[: table.columns.index("site")]


def test_without_a_moon_an_audience_can_choose(moonless: TrackStore, without_moon: pl.DataFrame) -> None:
    events = without_moon.select(almanac_columns(without_moon))
    bright, removed = chosen_by_figures(moonless, events, Audience(brighter=1.0, least_elongation_deg=15.0))
    assert 0 < bright.height == events.height - sum(one.count for one in removed)
    kept, _ = chosen_from_site(moonless, HILL, bright, Rules(), Audience(visible=True))
    assert 0 < kept.height <= bright.height


@pytest.mark.parametrize("days", [(0.0, 6.0), (-6.0, 0.0)])
def test_the_ends_of_a_short_kernel_are_no_failure(moonless: TrackStore, days: tuple[float, float]) -> None:
    low, high = moonless.span_jd
    edge = low if days[0] == 0.0 else high
    kinds = frozenset({Kind.APPULSE, Kind.NODE, Kind.CONSTELLATION_ENTRY, Kind.PERIGEE})
    table = almanac_from_site(moonless, Query(edge + days[0], edge + days[1], kinds), RIDGE)
    assert table["verdict"].null_count() == 0
    assert table.height > 0


# ---- the pole and the date line


def test_at_the_pole_only_what_is_north_can_be_seen_and_only_in_winter(store: TrackStore) -> None:
    # At the pole altitude is declination, refraction apart: definition.
    events = almanac(store, Query(parse_date("2027-10-01"), parse_date("2028-04-01")))
    bodies = events.filter(pl.col("other").is_null(), pl.col("kind") != "gathering", pl.col("body") != "moon")
    seen = from_site(store, POLE, bodies)
    watchable = seen.filter(pl.col("best_utc").is_not_null())
    assert watchable.height > 3
    assert watchable["dec_deg"].min() > 9.0  # type: ignore[operator]
    np.testing.assert_allclose(watchable["airless_altitude_deg"], watchable["dec_deg"], atol=1.0)
    bright = seen.filter(pl.col("verdict_reason").str.contains("the Sun is never"))
    assert bright.height > 0
    assert set(bright["utc"].str.slice(5, 2)) <= {"10", "03"}  # the Sun is above -6 degrees till 8 October
    assert set(seen.filter(pl.col("dec_deg") < -3.0)["verdict"]) == {"not_visible"}


def test_beside_the_date_line_evenings_bear_the_date_of_their_side(store: TrackStore) -> None:
    # Two clocks a whole day apart at one meridian: the same night has two dates.
    west, east = (replace(ATOLL, zone=zone) for zone in ("Pacific/Fiji", "Pacific/Midway"))
    events = almanac(store, Query(parse_date("2027-03-01"), parse_date("2027-03-15")))
    ours, theirs = (from_site(store, site, events) for site in (west, east))
    assert ours["best_utc"].is_not_null().to_list() == theirs["best_utc"].is_not_null().to_list()
    both = pl.DataFrame(
        {
            "a": ours["evening_date"],
            "b": theirs["evening_date"],
            "best": ours["best_utc"],
            "same": ours["best_utc"] == theirs["best_utc"],
        }
    )
    both = both.drop_nulls().filter("same")
    assert both.height > 30
    apart = both["a"].str.to_date() - both["b"].str.to_date()
    assert set(apart.dt.total_days()) == {1}


# ---- hills


def behind(site: Site, horizon: HorizonProfile) -> Site:
    return replace(site, horizon=horizon)


ALL_ROUND = horizon_of([(0, 85), (90, 85), (180, 85), (270, 85)])
"""At middle latitudes nothing of the ecliptic climbs over it."""


@pytest.fixture(scope="module")
def january(store: TrackStore) -> pl.DataFrame:
    return almanac(store, Query(parse_date("2027-01-01"), parse_date("2027-02-01")))


def test_behind_hills_all_round_what_would_be_high_is_hidden_by_them(
    store: TrackStore, january: pl.DataFrame
) -> None:
    level, hidden = (from_site(store, site, january) for site in (HILL, behind(HILL, ALL_ROUND)))
    assert set(hidden["verdict"]) == {"not_visible"}
    assert hidden["best_utc"].null_count() == hidden.height
    lost = hidden.filter(level["best_utc"].is_not_null())
    assert lost.height > 50
    assert lost["verdict_reason"].str.contains(f"{HIDDEN} while the sky is dark enough$").mean() > 0.9  # type: ignore[operator]


def test_behind_hills_what_was_not_to_be_seen_anyway_keeps_its_reason(
    store: TrackStore, january: pl.DataFrame
) -> None:
    level, hidden = (from_site(store, site, january) for site in (HILL, behind(HILL, ALL_ROUND)))
    anyway = level["verdict_reason"].str.contains("up only by day|sets|rises|no higher").to_numpy()
    alone = (january["other"].is_null() & (january["kind"] != "gathering")).to_numpy()
    assert (anyway & alone).sum() > 3
    for ours, theirs in zip(
        level.filter(anyway & alone)["verdict_reason"],
        hidden.filter(anyway & alone)["verdict_reason"],
        strict=True,
    ):
        assert ours == theirs


def test_hills_on_one_side_leave_the_other_open(store: TrackStore, january: pl.DataFrame) -> None:
    west = behind(HILL, horizon_of([(0, 0), (179.9, 0), (180, 70), (359.9, 70)]))
    seen = from_site(store, west, january).filter(pl.col("best_utc").is_not_null())
    assert seen.height > 30
    low = seen.filter(pl.col("altitude_deg") < 69.0)
    assert low["azimuth_deg"].max() <= 180.1  # type: ignore[operator]
    ends = from_site(store, HILL, january).filter(pl.col("best_utc").is_not_null())
    assert ends["azimuth_deg"].max() > 200.0  # type: ignore[operator]


def test_a_level_horizon_hides_nothing(store: TrackStore) -> None:
    events = almanac(
        store,
        Query(
            parse_date("2027-10-01"), parse_date("2029-01-01"), frozenset({Kind.APPULSE, Kind.CONJUNCTION})
        ),
    )
    with_moon = events.filter(pl.col("body") == "moon")
    assert with_moon.height > 500
    for site in (SUMMIT, POLE, CAPE):
        reasons = from_site(store, site, with_moon)["verdict_reason"]
        assert not reasons.str.contains(HIDDEN).any(), site.name


# ---- against a sampling of the sky


@pytest.mark.parametrize("site", [HILL, RIDGE], ids=lambda site: site.name)
def test_what_can_be_watched_is_what_a_sampling_finds_high_in_the_dark(
    store: TrackStore, site: Site, events_of_2027: pl.DataFrame, jpl: Any
) -> None:
    pairs = events_of_2027.filter(
        pl.col("kind") == "appulse", pl.col("body") != "moon", pl.col("other").is_in(BODIES)
    )
    seen = from_site(store, site, pairs)
    rules, told = Rules(), 0
    for row in seen.iter_rows(named=True):
        jd = row["jd_tt"] + np.arange(-1.5, 1.5, 1.0 / SAMPLES_A_DAY)
        sun = apparent(jpl, site, "sun", jd).altaz()[0].degrees
        lowest = np.minimum(
            *(apparent(jpl, site, row[name], jd).altaz("standard")[0].degrees for name in ("body", "other"))
        )
        dark = sun <= rules.sun_below_deg
        best = lowest[dark].max() if dark.any() else -90.0
        if abs(best - rules.min_altitude_deg) > 1.5:  # ten minutes lift a body by up to 2.5 degrees
            assert (row["best_utc"] is not None) == (best > rules.min_altitude_deg), (row["event_id"], best)
            told += 1
    assert told > 5
    assert seen["best_utc"].null_count() not in (0, seen.height)


@pytest.mark.parametrize("site", EVERYWHERE, ids=lambda site: site.name)
def test_the_reason_never_contradicts_the_verdict(
    store: TrackStore, site: Site, events_of_2027: pl.DataFrame
) -> None:
    seen = from_site(store, site, events_of_2027.gather_every(4))
    can = seen["verdict"] != "not_visible"
    easy = seen["verdict_reason"].str.contains("to see|be seen|^needs |^all |both ")
    easy &= ~seen["verdict_reason"].str.contains("lost in|too faint")
    assert not (seen["best_utc"].is_null() & can).any()
    assert not (
        seen["verdict_reason"].str.contains("does not rise|no higher|hidden|up only by day") & can
    ).any()
    assert not (easy & seen["best_utc"].is_null()).any()
