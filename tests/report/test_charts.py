"""The charts themselves: what stands in the axes, that nothing collides, that files repeat, what is said."""

from __future__ import annotations

import re
import subprocess
import sys
from pathlib import Path

import matplotlib
import numpy as np
import polars as pl
import pytest
from matplotlib.axes import Axes
from matplotlib.figure import Figure
from matplotlib.lines import Line2D
from matplotlib.text import Text
from PIL import Image

from tests.report.test_charts_model import START_JD, conjunctions, seasons, track
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
def all_seasons() -> pl.DataFrame:
    return pl.concat([seasons(body) for body in PLANETS])


@pytest.fixture(scope="module")
def events() -> pl.DataFrame:
    return conjunctions(PLANETS)


@pytest.fixture(scope="module")
def mars_season() -> pl.DataFrame:
    return seasons(Body.MARS)[:1]


@pytest.fixture(scope="module")
def mars_path(mars_season: pl.DataFrame) -> Figure:
    return charts.draw_path(path_track(mars_season), mars_season)


def path_track(season: pl.DataFrame) -> pl.DataFrame:
    jd_from, jd_to, step = charts.path_span(season)
    return track(Body(season["body"][0]), jd_from, jd_to - jd_from + step, step)


def of_body(table: pl.DataFrame, body: Body) -> pl.DataFrame:
    return table.filter(pl.col("body") == body.value)


def drawn_texts(figure: Figure) -> list[Text]:
    """Return the texts that are seen: not empty, and no ticks beyond the limits of their axis."""
    figure.canvas.draw()
    hidden = set()
    for ax in figure.axes:
        for axis in (ax.xaxis, ax.yaxis):
            low, high = sorted(axis.get_view_interval())
            for tick in (*axis.get_major_ticks(), *axis.get_minor_ticks()):
                if not low - 1e-9 <= tick.get_loc() <= high + 1e-9:
                    hidden.add(tick.label1)
    return [
        text
        for text in figure.findobj(Text)
        if text.get_visible() and text.get_text().strip() and text not in hidden
    ]


def assert_legible(figure: Figure) -> None:
    """Assert that every text lies within the figure and none on another."""
    texts = drawn_texts(figure)
    boxes = [text.get_window_extent() for text in texts]
    width, height = figure.bbox.size
    for number, (text, box) in enumerate(zip(texts, boxes, strict=True)):
        within = box.x0 >= 0 and box.y0 >= 0 and box.x1 <= width and box.y1 <= height
        assert within, f"{text.get_text()!r} leaves the figure"
        for other, beside in zip(texts[:number], boxes[:number], strict=True):
            wide = min(box.x1, beside.x1) - max(box.x0, beside.x0)
            high = min(box.y1, beside.y1) - max(box.y0, beside.y0)
            assert wide <= 1.0 or high <= 1.0, f"{text.get_text()!r} covers {other.get_text()!r}"


def marked(ax: Axes, marker: str) -> np.ndarray:
    """Return where a marker is drawn, shape (n, 2)."""
    lines = [line for line in ax.lines if line.get_marker() == marker and line.get_linestyle() == "None"]
    return np.concatenate([np.asarray(line.get_xydata(), dtype=np.float64) for line in lines])


def heavy(ax: Axes) -> list[Line2D]:
    return [line for line in ax.lines if line.get_linewidth() == charts.LIGHT.back_line_pt]


def words(figure: Figure) -> str:
    return " ".join(text.get_text() for text in drawn_texts(figure))


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


@pytest.mark.parametrize("body", SHOWN)
def test_path_is_legible(all_seasons: pl.DataFrame, body: Body) -> None:
    season = of_body(all_seasons, body)[:1]
    assert_legible(charts.draw_path(path_track(season), season))


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


# --- path


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


# --- files


def test_files_repeat_byte_for_byte_whatever_the_users_settings(
    mars_season: pl.DataFrame, tmp_path: Path
) -> None:
    formats: tuple[charts.export.Format, ...] = ("png", "svg", "pdf")
    rows = path_track(mars_season)
    first = charts.save(charts.draw_path(rows, mars_season), "one", tmp_path, formats=formats)
    with matplotlib.rc_context(
        {"font.size": 20, "lines.linewidth": 9, "svg.fonttype": "path", "savefig.dpi": 50}
    ):
        second = charts.save(charts.draw_path(rows, mars_season), "two", tmp_path, formats=formats)
    for kind in formats:
        assert first[kind].read_bytes() == second[kind].read_bytes(), kind


def test_saving_a_figure_again_changes_nothing(mars_path: Figure, tmp_path: Path) -> None:
    once = charts.save(mars_path, "chart", tmp_path)["svg"].read_bytes()
    assert charts.save(mars_path, "chart", tmp_path)["svg"].read_bytes() == once


def test_files_have_the_promised_names_and_size(mars_path: Figure, tmp_path: Path) -> None:
    paths = charts.save(mars_path, "mars-path", tmp_path)
    assert sorted(path.name for path in tmp_path.iterdir()) == ["mars-path.png", "mars-path.svg"]
    with Image.open(paths["png"]) as image:
        assert image.width == 1600
        assert image.info["dpi"][0] == pytest.approx(150.0, abs=0.1)


def test_text_of_an_svg_is_text(mars_path: Figure, tmp_path: Path) -> None:
    svg = charts.save(mars_path, "chart", tmp_path, formats=("svg",))["svg"].read_text(encoding="utf-8")
    assert re.search(r"<text[^>]*>[^<]*(<tspan[^>]*>)?turns retrograde", svg)
    assert "DejaVu Sans" in svg
    assert "<dc:date>" not in svg
    glyphs = re.findall(r'<path id="DejaVuSans', svg)
    assert not glyphs


def test_the_night_style_holds_nothing_but_red(mars_season: pl.DataFrame, tmp_path: Path) -> None:
    figure = charts.draw_path(path_track(mars_season), mars_season, style=charts.NIGHT)
    path = charts.save(figure, "night", tmp_path, formats=("png",), style=charts.NIGHT)["png"]
    with Image.open(path) as image:
        dots = np.asarray(image.convert("RGB")).astype(int)
    assert dots[..., 1:].max() < 100
    assert dots[..., 0].max() > 200


def test_charts_need_no_global_figure_state() -> None:
    loaded = "import sys, wanderers.report.charts; print('matplotlib.pyplot' in sys.modules)"
    done = subprocess.run([sys.executable, "-c", loaded], capture_output=True, text=True, check=True)
    assert done.stdout.strip() == "False"


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


def test_path_alt_text_tells_shape_constellations_and_dates(mars_season: pl.DataFrame) -> None:
    text = charts.path_alt_text(mars_season)
    assert "stars of Cancer and Leo" in text
    assert "crosses itself in a loop" in text
    zigzag = mars_season.with_columns(path_shape=pl.lit("zigzag"))
    assert "zigzag" in charts.path_alt_text(zigzag)
