"""The look of every chart: colours, dashes, sizes of type, and the settings that hold while one is drawn.

Colours: hues of Okabe and Ito (2002), Color Universal Design; those too pale for a line on white are darkened
until they reach a contrast of 3:1 (WCAG 2.1, 1.4.11). A dash and a direct label go with every colour, so
that nothing depends on colour alone.
"""

from __future__ import annotations

from collections.abc import Iterator, Mapping
from contextlib import contextmanager
from dataclasses import dataclass, field
from types import MappingProxyType
from typing import Any, Final

import matplotlib
import numpy as np
from matplotlib.axes import Axes
from matplotlib.backends.backend_agg import FigureCanvasAgg
from matplotlib.colors import to_hex, to_rgb
from matplotlib.figure import Figure

from wanderers.ephemeris.bodies import BODIES, Body

DPI: Final = 150
"""Dots an inch of the PNG."""

WIDTH_IN: Final = 32.0 / 3.0
"""Width of every chart: 1600 dots. On a page it is shown at about five eighths of that."""

Dash = tuple[float, ...]

DASHES: Final[Mapping[Body, Dash]] = MappingProxyType(
    {
        Body.SUN: (1.0, 2.0),
        Body.MOON: (1.0, 1.0),
        Body.MERCURY: (4.0, 1.5),
        Body.VENUS: (),
        Body.MARS: (9.0, 2.0, 1.5, 2.0),
        Body.JUPITER: (12.0, 2.5),
        Body.SATURN: (6.0, 2.0, 6.0, 2.0, 1.5, 2.0),
        Body.URANUS: (6.0, 1.5, 1.5, 1.5, 1.5, 1.5),
        Body.NEPTUNE: (2.5, 2.5),
        Body.PLUTO: (1.5, 1.5, 1.5, 4.0),
    }
)
"""On and off, in line widths; nothing for an unbroken line."""

_DAY_COLOURS: Final[Mapping[Body, str]] = MappingProxyType(
    {
        Body.SUN: "#6b6b6b",
        Body.MOON: "#6b6b6b",
        Body.MERCURY: "#00805e",  # bluish green, darkened
        Body.VENUS: "#b07500",  # orange, darkened
        Body.MARS: "#c44f00",  # vermilion, darkened
        Body.JUPITER: "#0072b2",  # blue
        Body.SATURN: "#000000",  # black
        Body.URANUS: "#1f86bb",  # sky blue, darkened
        Body.NEPTUNE: "#a9527f",  # reddish purple, darkened
        Body.PLUTO: "#7a6a00",  # yellow, darkened
    }
)
_NIGHT_RED: Final = "#e8402a"


@dataclass(frozen=True, slots=True)
class Style:
    """What a chart is drawn with.

    Attributes:
        name: what the style is called.
        paper: behind everything.
        ink: text, axes and stars.
        quiet_ink: less important text; at least 4.5:1 on paper.
        rule: grids and boundaries.
        back_fill: where a planet runs backwards.
        colours: one a body.
        type_pt: size of ordinary type.
        small_pt: size of the smallest type.
        title_pt: size of a title.
        line_pt: width of a planet's line.
        back_line_pt: its width where it runs backwards.
    """

    name: str
    paper: str
    ink: str
    quiet_ink: str
    rule: str
    back_fill: str
    colours: Mapping[Body, str] = field(default_factory=lambda: _DAY_COLOURS)
    type_pt: float = 11.0
    small_pt: float = 10.0
    title_pt: float = 14.0
    line_pt: float = 1.5
    back_line_pt: float = 3.8

    def line(self, body: Body, *, dashed: bool = True) -> dict[str, Any]:
        """Return how the line of a body is drawn; ``dashed`` where several bodies share a chart."""
        dash = DASHES[body] if dashed else ()
        return {
            "color": self.colours[body],
            "linewidth": self.line_pt,
            "linestyle": (0, dash) if dash else "-",
            "dash_capstyle": "butt",
        }

    def name_colour(self, body: Body) -> str:
        """Return the colour in which a body's name is written: its line's, nearer to that of ink."""
        line, ink = (np.array(to_rgb(colour)) for colour in (self.colours[body], self.ink))
        return str(to_hex(tuple((0.65 * line + 0.35 * ink).tolist())))

    def note(self, **more: Any) -> dict[str, Any]:
        """Return how a note within a chart is written: small, on a little paper of its own."""
        paper = {"boxstyle": "square,pad=0.08", "facecolor": self.paper, "edgecolor": "none", "alpha": 0.8}
        return {"fontsize": self.small_pt, "color": self.ink, "linespacing": 1.05, "bbox": paper} | more

    def back_line(self, body: Body) -> dict[str, Any]:
        """Return how the line of a body is drawn where it runs backwards: heavy and unbroken."""
        return {"color": self.colours[body], "linewidth": self.back_line_pt, "solid_capstyle": "butt"}


LIGHT: Final = Style(
    name="light",
    paper="#ffffff",
    ink="#1a1a1a",
    quiet_ink="#5a5a5a",
    rule="#c4c4c4",
    back_fill="#ebebeb",
)
"""For screens and paper."""

NIGHT: Final = Style(
    name="night",
    paper="#000000",
    ink="#f0442e",
    quiet_ink="#d93d29",
    rule="#6b1d13",
    back_fill="#2b0c07",
    colours=MappingProxyType(dict.fromkeys(BODIES, _NIGHT_RED)),
)
"""For screens beside a telescope: red on black, so that eyes stay used to the dark."""


def _settings(style: Style) -> dict[str, Any]:
    """Return every setting of matplotlib that a chart relies on, whatever the user's own are."""
    ours = {
        "figure.dpi": DPI,
        "figure.facecolor": style.paper,
        "savefig.facecolor": "auto",
        "savefig.dpi": "figure",
        "axes.facecolor": style.paper,
        "axes.edgecolor": style.quiet_ink,
        "axes.labelcolor": style.ink,
        "axes.linewidth": 0.8,
        "axes.axisbelow": True,
        "axes.unicode_minus": True,
        "text.color": style.ink,
        "xtick.color": style.quiet_ink,
        "ytick.color": style.quiet_ink,
        "xtick.labelcolor": style.ink,
        "ytick.labelcolor": style.ink,
        "grid.color": style.rule,
        "grid.linewidth": 0.6,
        "font.family": ["DejaVu Sans"],
        "font.size": style.type_pt,
        "axes.labelsize": style.type_pt,
        "xtick.labelsize": style.small_pt,
        "ytick.labelsize": style.small_pt,
        "legend.fontsize": style.small_pt,
        "legend.frameon": False,
        "legend.handlelength": 2.6,
        "hatch.color": style.rule,
        "hatch.linewidth": 0.6,
        "path.simplify": True,
        "svg.fonttype": "none",
        "svg.hashsalt": "wanderers",
        "pdf.fonttype": 42,
    }
    kept = {key: value for key, value in matplotlib.rcParamsDefault.items() if not _of_the_caller(key)}
    return kept | ours


def _of_the_caller(key: str) -> bool:
    """Return whether a setting concerns how the caller shows figures, not how they look."""
    return key.startswith(("backend", "interactive", "toolbar", "webagg", "keymap", "datapath", "docstring"))


@contextmanager
def in_force(style: Style) -> Iterator[None]:
    """Draw with a style, and leave matplotlib's settings as they were.

    The settings belong to the whole process: charts are drawn in one thread, or in several processes.
    """
    settings: Any = _settings(style)
    with matplotlib.rc_context(settings):
        yield


def new_figure(height_in: float, style: Style) -> Figure:
    """Return an empty figure of the width all charts share, able to measure its own text."""
    figure = Figure(figsize=(WIDTH_IN, height_in), dpi=DPI, facecolor=style.paper)
    FigureCanvasAgg(figure)
    return figure


def axes_at(figure: Figure, left: float, right: float, bottom: float, top: float) -> Axes:
    """Return new axes with margins in inches from the figure's four edges."""
    width, height = figure.get_size_inches()
    box = (left / width, bottom / height, 1.0 - (left + right) / width, 1.0 - (bottom + top) / height)
    return figure.add_axes(box)


def tidy(ax: Axes, style: Style, *, grid: str = "both", framed: bool = False) -> None:
    """Give axes the common look: two spines, all four if framed, and a quiet grid beneath everything."""
    ax.spines[["top", "right"]].set_visible(framed)
    ax.grid(True, axis=grid, color=style.rule, linewidth=0.6)  # type: ignore[arg-type]
    ax.set_axisbelow(True)


def write_title(figure: Figure, title: str, remark: str, style: Style) -> None:
    """Write what a chart shows above it, and how it is to be read below that."""
    width, height = figure.get_size_inches()
    left = 0.12 / width
    figure.text(left, 1.0 - 0.12 / height, title, fontsize=style.title_pt, weight="bold", va="top")
    figure.text(left, 1.0 - 0.42 / height, remark, fontsize=style.small_pt, color=style.quiet_ink, va="top")
