"""The charts against time: what stands in the axes, that nothing collides, what is said."""

from __future__ import annotations

import re

import numpy as np
import polars as pl
import pytest

from tests.report.chart_reading import assert_legible, drawn_texts, heavy, marked, of_body, words
from tests.report.test_charts_model import START_JD, conjunctions, track
from wanderers import schema
from wanderers.ephemeris.bodies import PLANETS, Body
from wanderers.report import charts
from wanderers.report.charts import timeaxis
from wanderers.report.charts.overview import shown_tracks

SPAN = (START_JD, START_JD + 731.0)
SHOWN = (Body.MERCURY, Body.MARS, Body.NEPTUNE)
NO_SEASONS = pl.DataFrame(schema=schema.SEASON_COLUMNS)


@pytest.fixture(scope="module")
def tracks() -> dict[Body, pl.DataFrame]:
    return {body: track(body) for body in (Body.SUN, *PLANETS)}


@pytest.fixture(scope="module")
def padded() -> dict[Body, pl.DataFrame]:
    return {body: track(body, START_JD - 600.0, 1931.0) for body in PLANETS}


@pytest.fixture(scope="module")
def events() -> pl.DataFrame:
    return conjunctions(PLANETS)


# --- legible


def test_overview_is_legible(tracks: dict[Body, pl.DataFrame], events: pl.DataFrame) -> None:
    assert_legible(charts.draw_overview(tracks, events))


@pytest.mark.parametrize("body", SHOWN)
def test_longitude_is_legible(
    padded: dict[Body, pl.DataFrame], all_seasons: pl.DataFrame, body: Body
) -> None:
    assert_legible(charts.draw_longitude(body, padded[body], all_seasons, span_jd=SPAN))


@pytest.mark.parametrize("body", SHOWN)
def test_brightness_is_legible(
    tracks: dict[Body, pl.DataFrame], all_seasons: pl.DataFrame, body: Body
) -> None:
    assert_legible(charts.draw_brightness(body, tracks[body], all_seasons))


def test_spans_of_ten_days_and_of_sixty_years_are_legible(events: pl.DataFrame) -> None:
    for days, step in ((10.0, 0.25), (60.0 * 365.25, 5.0)):
        tracks = {body: track(body, START_JD, days, step) for body in (Body.SUN, *PLANETS)}
        assert_legible(charts.draw_overview(tracks, events))
        assert_legible(charts.draw_longitude(Body.JUPITER, tracks[Body.JUPITER], NO_SEASONS))


# --- overview


def test_conjunctions_are_marked_where_the_lines_cross(
    tracks: dict[Body, pl.DataFrame], events: pl.DataFrame
) -> None:
    ax = charts.draw_overview(tracks, events).axes[0]
    rings = marked(ax, "o")
    assert len(rings) == events.height
    at = np.sort(rings[:, 0])
    np.testing.assert_allclose(at, np.sort(timeaxis.utc_days(events["jd_tt"].to_numpy())))
    low, high = ax.get_ylim()
    assert high - low == pytest.approx(360.0)
    assert np.all((rings[:, 1] >= low) & (rings[:, 1] <= high))


def test_every_line_of_the_overview_is_named(tracks: dict[Body, pl.DataFrame], events: pl.DataFrame) -> None:
    texts = [text.get_text() for text in drawn_texts(charts.draw_overview(tracks, events))]
    assert all(body.label in texts for body in tracks)


def test_long_spans_leave_out_the_fast_bodies_and_say_so(events: pl.DataFrame) -> None:
    tracks = {body: track(body, START_JD, 20.0 * 365.25, 5.0) for body in (Body.SUN, *PLANETS)}
    assert set(tracks) - set(shown_tracks(tracks)) == {Body.SUN, Body.MERCURY, Body.VENUS}
    assert "Sun, Mercury and Venus" in words(charts.draw_overview(tracks, events))


# --- longitude


def test_turns_are_marked_at_the_dates_and_longitudes_of_the_table(
    tracks: dict[Body, pl.DataFrame], all_seasons: pl.DataFrame
) -> None:
    table = of_body(all_seasons, Body.NEPTUNE)
    ax = charts.draw_longitude(Body.NEPTUNE, tracks[Body.NEPTUNE], all_seasons).axes[0]
    for mark, marker in (("station_retrograde", "<"), ("station_direct", ">")):
        places = marked(ax, marker)
        np.testing.assert_allclose(places[:, 0], timeaxis.utc_days(table[f"{mark}_jd_tt"].to_numpy()))
        np.testing.assert_allclose(places[:, 1] % 360.0, table[f"{mark}_longitude_deg"].to_numpy())


def test_only_retrograde_stretches_are_heavy(
    padded: dict[Body, pl.DataFrame], all_seasons: pl.DataFrame
) -> None:
    figure = charts.draw_longitude(Body.NEPTUNE, padded[Body.NEPTUNE], all_seasons, span_jd=SPAN)
    (line,) = heavy(figure.axes[0])
    y = np.asarray(line.get_ydata(), dtype=np.float64)
    time = np.asarray(line.get_xdata(), dtype=np.float64)
    whole = np.isfinite(time[1:]) & np.isfinite(time[:-1])
    assert whole.sum() > 100
    assert np.all(np.diff(y)[whole] < 0.0)


def test_seasons_too_flat_to_see_get_a_panel_each(
    padded: dict[Body, pl.DataFrame], all_seasons: pl.DataFrame
) -> None:
    count = of_body(all_seasons, Body.MERCURY).height
    figure = charts.draw_longitude(Body.MERCURY, padded[Body.MERCURY], all_seasons, span_jd=SPAN)
    assert len(figure.axes) == 1 + count
    steep = charts.draw_longitude(Body.NEPTUNE, padded[Body.NEPTUNE], all_seasons, span_jd=SPAN)
    assert len(steep.axes) == 1


def test_the_threefold_frame_is_entered_and_left_at_its_corners(mars_season: pl.DataFrame) -> None:
    row = mars_season.row(0, named=True)
    whole = track(Body.MARS, row["first_pass_start_jd_tt"] - 20.0, row["threefold_days"] + 40.0, 0.25)
    ax = charts.draw_longitude(Body.MARS, whole, mars_season).axes[0]
    bars = marked(ax, "|")
    x = np.asarray(ax.lines[0].get_xdata(), dtype=np.float64)
    y = np.asarray(ax.lines[0].get_ydata(), dtype=np.float64)
    np.testing.assert_allclose(np.interp(bars[:, 0], x, y), bars[:, 1], atol=0.05)


def test_a_span_without_a_season_says_so(tracks: dict[Body, pl.DataFrame]) -> None:
    assert "No retrograde motion" in words(charts.draw_longitude(Body.MARS, tracks[Body.MARS], NO_SEASONS))
    said = charts.longitude_alt_text(Body.MARS, tracks[Body.MARS], NO_SEASONS)
    assert said.endswith("It does not run backwards.")


# --- brightness


def test_brighter_is_up_and_farther_is_up(
    tracks: dict[Body, pl.DataFrame], all_seasons: pl.DataFrame
) -> None:
    distance, magnitude, diameter = charts.draw_brightness(Body.MARS, tracks[Body.MARS], all_seasons).axes
    assert magnitude.yaxis_inverted()
    assert not distance.yaxis_inverted() and not diameter.yaxis_inverted()
    assert "au" in distance.get_ylabel() and "arcseconds" in diameter.get_ylabel()
    assert "UTC" in diameter.get_xlabel()


def test_unknown_magnitudes_are_a_gap(tracks: dict[Body, pl.DataFrame]) -> None:
    dim = tracks[Body.MARS].with_columns(
        magnitude=pl.when(pl.int_range(pl.len()) < 100).then(None).otherwise(pl.col("magnitude"))
    )
    line = charts.draw_brightness(Body.MARS, dim, NO_SEASONS).axes[1].lines[0]
    known = np.isfinite(np.asarray(line.get_ydata(), dtype=np.float64))
    assert not known[:100].any() and known[100:].all()


# --- text alternatives


def test_overview_alt_text_tells_counts_and_the_closest(
    tracks: dict[Body, pl.DataFrame], all_seasons: pl.DataFrame, events: pl.DataFrame
) -> None:
    text = charts.overview_alt_text(tracks, all_seasons, events)
    best = events.sort("separation_deg").row(0, named=True)
    assert f"{events.height} conjunctions" in text
    assert f"{Body(best['body']).label} with {Body(best['other']).label}" in text
    assert timeaxis.long_day_text(float(timeaxis.utc_days(best["jd_tt"]))) in text
    for body in PLANETS:
        count = of_body(all_seasons, body).height
        assert (f"{body.label} {count}" in text) == (count > 0)


def test_longitude_alt_text_tells_dates_and_arcs(
    tracks: dict[Body, pl.DataFrame], all_seasons: pl.DataFrame, mars_season: pl.DataFrame
) -> None:
    text = charts.longitude_alt_text(Body.MARS, tracks[Body.MARS], mars_season)
    row = mars_season.row(0, named=True)
    assert f"{row['arc_deg']:.1f} degrees" in text
    assert f"{row['retrograde_days']:.0f} days" in text
    for mark in ("station_retrograde", "station_direct", "middle"):
        assert timeaxis.long_day_text(float(timeaxis.utc_days(row[f"{mark}_jd_tt"]))) in text
    count = of_body(all_seasons, Body.MERCURY).height
    often = charts.longitude_alt_text(Body.MERCURY, tracks[Body.MERCURY], all_seasons)
    assert f"backwards {count} times" in often


def test_brightness_alt_text_tells_the_extremes_of_the_track(tracks: dict[Body, pl.DataFrame]) -> None:
    rows = tracks[Body.MARS]
    text = charts.brightness_alt_text(Body.MARS, rows)
    least = rows.sort("distance_au").row(0, named=True)
    assert f"({least['distance_au']:.3f} au)" in text
    named = float(re.findall(r"magnitude (?:minus )?([\d.]+)", text)[0])
    assert named == pytest.approx(abs(rows["magnitude"].min()), abs=0.06)  # type: ignore[arg-type]


def test_extremes_do_not_depend_on_the_hour_of_the_samples(mars_season: pl.DataFrame) -> None:
    at = mars_season["middle_jd_tt"][0]
    spoken = {
        charts.brightness_alt_text(Body.MARS, track(Body.MARS, at - 40.0 + shift, 80.0)).split("nearest on ")[
            1
        ][:15]
        for shift in (0.0, 0.2, 0.4, 0.6, 0.8)
    }
    assert len(spoken) == 1
