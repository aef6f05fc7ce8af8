"""The path among the stars: what stands in its chart, that nothing collides, what is said."""

from __future__ import annotations

import re

import numpy as np
import polars as pl
import pytest
from matplotlib.figure import Figure

from tests.report.chart_reading import assert_legible, of_body, path_track, words
from wanderers.ephemeris.bodies import PLANETS, Body
from wanderers.report import charts
from wanderers.report.charts import timeaxis


@pytest.mark.parametrize("body", [Body.MERCURY, Body.MARS, Body.NEPTUNE])
def test_path_is_legible(all_seasons: pl.DataFrame, body: Body) -> None:
    season = of_body(all_seasons, body)[:1]
    assert_legible(charts.draw_path(path_track(season), season))


def test_right_ascension_grows_to_the_left_and_the_chart_says_so(mars_path: Figure) -> None:
    ax = mars_path.axes[0]
    assert ax.xaxis_inverted()
    assert "to the left" in ax.get_xlabel()
    assert "east left" in words(mars_path)
    assert "J2000" in ax.get_xlabel() and "J2000" in ax.get_ylabel()


def test_both_directions_have_one_scale_on_the_sky(mars_path: Figure) -> None:
    ax = mars_path.axes[0]
    ra, dec = np.mean(ax.get_xlim()), np.mean(ax.get_ylim())
    here, east, north = ax.transData.transform([(ra, dec), (ra + 1.0, dec), (ra, dec + 1.0)])
    assert (here - east)[0] == pytest.approx((north - here)[1] * np.cos(np.radians(dec)), rel=1e-6)
    assert (here - east)[0] > 0.0


def test_any_axes_get_one_scale_in_both_directions(mars_season: pl.DataFrame) -> None:
    figure = charts.style.new_figure(9.0, charts.LIGHT)
    ax = figure.add_axes((0.1, 0.1, 0.3, 0.8))
    charts.plot_path(path_track(mars_season), mars_season, ax)
    ra, dec = np.mean(ax.get_xlim()), np.mean(ax.get_ylim())
    here, east, north = ax.transData.transform([(ra, dec), (ra + 1.0, dec), (ra, dec + 1.0)])
    assert (here - east)[0] == pytest.approx((north - here)[1] * np.cos(np.radians(dec)), rel=1e-6)


@pytest.mark.parametrize("body", PLANETS)
def test_the_field_holds_the_whole_path(all_seasons: pl.DataFrame, body: Body) -> None:
    season = of_body(all_seasons, body)[:1]
    ax = charts.draw_path(path_track(season), season).axes[0]
    dots = ax.transAxes.inverted().transform(ax.transData.transform(ax.lines[2].get_xydata()))
    assert np.all((dots > 0.05) & (dots < 0.95))


def test_the_path_stands_where_ecliptic_coordinates_say(mars_season: pl.DataFrame, mars_path: Figure) -> None:
    # tan RA = (sin l cos e - tan b sin e) / cos l, sin dec = sin b cos e + cos b sin e sin l, mean obliquity
    # of J2000 23.4392911 degrees (Meeus, Astronomical Algorithms, 2nd ed., eqs. 13.3 and 13.4).
    rows = path_track(mars_season)
    longitude, latitude = (np.radians(rows[name].to_numpy()) for name in ("longitude_deg", "latitude_deg"))
    tilt = np.radians(23.4392911)
    across = np.sin(longitude) * np.cos(tilt) - np.tan(latitude) * np.sin(tilt)
    ra = np.degrees(np.arctan2(across, np.cos(longitude))) % 360.0
    dec = np.degrees(
        np.arcsin(np.sin(latitude) * np.cos(tilt) + np.cos(latitude) * np.sin(tilt) * np.sin(longitude))
    )
    drawn = np.asarray(mars_path.axes[0].lines[2].get_xydata(), dtype=np.float64)
    np.testing.assert_allclose(drawn[:, 0] % 360.0, ra, atol=2e-5)
    np.testing.assert_allclose(drawn[:, 1], dec, atol=2e-5)


def test_turns_middle_and_ends_are_dated(mars_season: pl.DataFrame, mars_path: Figure) -> None:
    text = words(mars_path)
    for mark in ("station_retrograde", "middle", "station_direct"):
        day = timeaxis.day_text(float(timeaxis.utc_days(mars_season[f"{mark}_jd_tt"][0])))
        assert day in text
    for word in ("turns retrograde", "opposition", "turns direct", "first pass begins", "third pass ends"):
        assert word in text


def test_a_flat_path_is_drawn_again_with_its_heights_larger(all_seasons: pl.DataFrame) -> None:
    season = of_body(all_seasons, Body.NEPTUNE)[:1]
    figure = charts.draw_path(path_track(season), season)
    sky, flat = figure.axes
    assert flat.xaxis_inverted()
    times = int(re.findall(r"drawn (\d+) times larger", words(figure))[0])
    here, east, north = flat.transData.transform([(5.0, 0.0), (6.0, 0.0), (5.0, 1.0)])
    assert (north - here)[1] / (here - east)[0] == pytest.approx(times, rel=1e-6)
    assert sky.get_xlabel() != flat.get_xlabel()


def test_the_inner_planets_carry_a_caution(all_seasons: pl.DataFrame, mars_path: Figure) -> None:
    season = of_body(all_seasons, Body.VENUS)[:1]
    assert "never sweep" in words(charts.draw_path(path_track(season), season))
    assert "never sweep" not in words(mars_path)


def test_a_season_at_the_kernels_edge_is_drawn_without_the_unknown_marks(mars_season: pl.DataFrame) -> None:
    cut = mars_season.with_columns(
        first_pass_start_jd_tt=pl.lit(None, pl.Float64), first_pass_start_utc=pl.lit(None, pl.String)
    )
    figure = charts.draw_path(path_track(cut), cut)
    assert "first pass begins" not in words(figure)
    assert_legible(figure)
    assert "Path of Mars" in charts.path_alt_text(cut)


def test_path_alt_text_tells_shape_constellations_and_dates(mars_season: pl.DataFrame) -> None:
    text = charts.path_alt_text(mars_season)
    assert "stars of Cancer and Leo" in text
    assert "crosses itself in a loop" in text
    zigzag = mars_season.with_columns(path_shape=pl.lit("zigzag"))
    assert "zigzag" in charts.path_alt_text(zigzag)
