"""What stands in a drawn chart: its texts, its marks, and whether all of it can be read."""

from __future__ import annotations

import numpy as np
import polars as pl
from matplotlib.axes import Axes
from matplotlib.figure import Figure
from matplotlib.lines import Line2D
from matplotlib.text import Text

from tests.report.test_charts_model import track
from wanderers.ephemeris.bodies import Body
from wanderers.report import charts


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
