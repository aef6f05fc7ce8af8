"""Files of charts: that they repeat, their names, sizes and texts, the look by night."""

from __future__ import annotations

import re
import subprocess
import sys
from pathlib import Path
from xml.etree import ElementTree

import matplotlib
import numpy as np
import polars as pl
import pytest
from matplotlib.figure import Figure
from PIL import Image

from tests.report.chart_reading import drawn_texts, path_track
from tests.report.test_charts_model import track
from wanderers.ephemeris.bodies import Body
from wanderers.report import charts
from wanderers.report.pictures import lean


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


def test_a_leaner_svg_says_what_the_figure_says(all_seasons: pl.DataFrame, tmp_path: Path) -> None:
    figure = charts.draw_brightness(Body.MARS, track(Body.MARS), all_seasons)
    svg = charts.save(figure, "chart", tmp_path, formats=("svg",))["svg"].read_text(encoding="utf-8")
    texts = ElementTree.fromstring(lean(svg)).iter("{http://www.w3.org/2000/svg}text")
    said = {word for text in texts for word in "".join(text.itertext()).split()}
    drawn = {word for text in drawn_texts(figure) for word in text.get_text().split()}
    assert any(re.search(r"\d\.\d\d\d", word) for word in drawn)
    assert {word for word in drawn if re.search(r"\d", word)} <= said


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
