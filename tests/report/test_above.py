"""The view from above and the season against time: what stands in the axes, and that nothing collides."""

from __future__ import annotations

from pathlib import Path

import numpy as np
import polars as pl
import pytest
from matplotlib.axes import Axes
from PIL import Image

from tests.report.chart_reading import assert_legible, words
from tests.report.season_samples import two_years
from wanderers.report.charts import above, above_scene
from wanderers.report.charts import season as against_time
from wanderers.report.charts.export import save
from wanderers.report.charts.style import NIGHT
from wanderers.report.contents import Contents


@pytest.fixture(scope="module")
def contents(cache_folder: Path) -> Contents:
    return two_years(cache_folder)


def season_of(contents: Contents, body: str) -> tuple[pl.DataFrame, pl.DataFrame, pl.DataFrame]:
    """Return the row, the view and the track of a planet's first season."""
    row = contents.seasons.filter(pl.col("body") == body)[:1]
    season_id = row.item(0, "season_id")
    return row, contents.study.views[season_id], contents.study.tracks[season_id]


def dated(ax: Axes, *, filled: bool) -> np.ndarray:
    """Return where dated places are drawn, shape (n, 2)."""
    ink = "#1a1a1a"
    lines = [
        line
        for line in ax.lines
        if line.get_marker() == "o" and line.get_markersize() == 7.0
        if (line.get_markerfacecolor() == ink) is filled
    ]
    return np.concatenate([np.asarray(line.get_xydata()) for line in lines])


@pytest.mark.parametrize("body", ["mercury", "venus", "mars", "jupiter", "uranus", "neptune"])
def test_no_text_leaves_the_figure_or_covers_another(contents: Contents, body: str) -> None:
    row, view, track = season_of(contents, body)
    assert_legible(above.draw_above(view, row))
    assert_legible(against_time.draw_season(track, row))


@pytest.mark.parametrize("body", ["venus", "mars"])
def test_places_are_drawn_to_one_scale_in_au(contents: Contents, body: str) -> None:
    row, view, _ = season_of(contents, body)
    strip, main = above.draw_above(view, row).axes
    marked = view.drop_nulls("mark")
    for who, filled in (("earth", False), ("planet", True)):
        drawn = dated(main, filled=filled)
        true = marked.select(f"{who}_x_au", f"{who}_y_au").to_numpy()
        # Turned as a whole, so distances from the Sun and between places stay what they are.
        np.testing.assert_allclose(np.hypot(*drawn.T), np.hypot(*true.T), atol=1e-9)
        np.testing.assert_allclose(
            np.hypot(*np.diff(drawn, axis=0).T), np.hypot(*np.diff(true, axis=0).T), atol=1e-9
        )
    box = main.get_window_extent()
    wide, high = np.diff(main.get_xlim())[0] / box.width, np.diff(main.get_ylim())[0] / box.height
    assert wide == pytest.approx(high, rel=1e-9)
    assert strip.get_xlim()[0] > strip.get_xlim()[1]


@pytest.mark.parametrize("body", ["mercury", "mars", "neptune"])
def test_both_planets_go_counterclockwise_and_the_middle_line_points_up(
    contents: Contents, body: str
) -> None:
    row, view, _ = season_of(contents, body)
    scene = above_scene.scene_of(view, row)
    for places in scene.sides:
        angle = np.unwrap(np.arctan2(places[:, 1], places[:, 0]))
        assert (np.diff(angle) > 0.0).all()
    middle = scene.numbers[3]
    line = scene.planet[middle] - scene.earth[middle]
    assert line[0] == pytest.approx(0.0, abs=1e-9) and line[1] > 0.0


def test_the_sky_grows_to_the_left_of_the_upward_line(contents: Contents) -> None:
    # Seen from north, longitude grows counterclockwise: a direction a little farther on leans to the left.
    row, view, _ = season_of(contents, "mars")
    scene = above_scene.scene_of(view, row)
    first = scene.numbers[2]
    lean = scene.planet[first] - scene.earth[first]
    seen = dict(view.drop_nulls("mark").select("mark", "direction_deg").iter_rows())
    assert seen["station_retrograde"] > seen["middle"] and lean[0] < 0.0


def test_lines_of_sight_run_from_earth_through_planet(contents: Contents) -> None:
    row, view, _ = season_of(contents, "mars")
    scene = above_scene.scene_of(view, row)
    main = above.draw_above(view, row).axes[1]
    ends = [np.asarray(line.get_xydata()) for line in main.lines if len(line.get_xdata()) == 2]  # type: ignore[arg-type]
    for number in scene.numbers.values():
        pair = np.stack([scene.earth[number], scene.planet[number]])
        assert any(np.allclose(pair, one) for one in ends)


@pytest.mark.parametrize(("body", "panels"), [("mars", 2), ("jupiter", 3), ("neptune", 3)])
def test_far_planets_show_the_orbit_of_the_earth_once_more_enlarged(
    contents: Contents, body: str, panels: int
) -> None:
    row, view, _ = season_of(contents, body)
    assert len(above.draw_above(view, row).axes) == panels


def test_the_strip_holds_numbers_words_and_dates_of_all_moments(contents: Contents) -> None:
    row, view, _ = season_of(contents, "mars")
    said = words(above.draw_above(view, row))
    for text in (
        "1: first pass begins, 5 Nov 2026",
        "2: turns retrograde, 10 Jan 2027",
        "3: opposition, 19 Feb 2027",
        "4: turns direct, 1 Apr 2027",
        "5: third pass ends, 8 Jun 2027",
        "1 au",
        "lines 1 and 4 are parallel",
    ):
        assert text in said


def test_a_season_cut_by_the_kernel_draws_what_is_known(contents: Contents) -> None:
    row, view, _ = season_of(contents, "mars")
    cut = row.with_columns(
        first_pass_start_utc=pl.lit(None, pl.String), first_pass_start_jd_tt=pl.lit(None, pl.Float64)
    )
    view = view.with_columns(mark=pl.when(pl.col("mark") != "first_pass_start").then(pl.col("mark")))
    figure = above.draw_above(view, cut)
    assert "first pass" not in words(figure) and "parallel" not in words(figure)
    assert_legible(figure)


def test_the_text_alternative_says_who_overtakes_whom(contents: Contents) -> None:
    said = {body: above.above_alt_text(*season_of(contents, body)[1::-1]) for body in ("venus", "mars")}
    assert "Venus, on the inner and faster track, overtakes the Earth" in said["venus"]
    assert "The Earth, on the inner and faster track, overtakes Mars" in said["mars"]
    assert "counterclockwise" in said["mars"]


def test_speed_is_below_zero_between_the_turns_alone(contents: Contents) -> None:
    row, _, track = season_of(contents, "jupiter")
    ax = against_time.draw_season(track, row).axes[-1]
    line = max(ax.lines, key=lambda one: len(np.asarray(one.get_xdata())))
    x, y = np.asarray(line.get_xdata()), np.asarray(line.get_ydata())
    turns = [np.asarray(one.get_xdata())[0] for one in ax.lines if one.get_marker() in "<>"]
    assert ((y < 0.0) == ((x > turns[0]) & (x < turns[1]))).all()


def test_files_repeat_byte_for_byte_and_the_night_copy_has_no_white(
    contents: Contents, tmp_path: Path
) -> None:
    row, view, _ = season_of(contents, "mars")
    for name in ("one", "two"):
        (tmp_path / name).mkdir()
        save(above.draw_above(view, row), "above", tmp_path / name)
    for kind in ("svg", "png"):
        one, two = ((tmp_path / name / f"above.{kind}").read_bytes() for name in ("one", "two"))
        assert one == two
    save(above.draw_above(view, row, style=NIGHT), "night", tmp_path, formats=("png",), style=NIGHT)
    image = np.asarray(Image.open(tmp_path / "night.png").convert("RGB"))
    assert image[..., 1:].max() < 128
