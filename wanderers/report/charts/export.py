"""Charts as files: PNG, SVG and PDF that come out the same, byte for byte, whenever they are made."""

from __future__ import annotations

from collections.abc import Callable, Mapping, Sequence
from pathlib import Path
from types import MappingProxyType
from typing import Any, BinaryIO, Final, Literal

import numpy as np
from matplotlib.backends.backend_agg import FigureCanvasAgg
from matplotlib.figure import Figure
from PIL import Image

from wanderers.files import write_atomically
from wanderers.report.charts.style import DPI, LIGHT, Style, in_force

Format = Literal["png", "svg", "pdf"]

PALETTE: Final = 128
"""Colours of a PNG: a third of the size of true colour, and no colour off by more than 4 percent."""

NO_STAMP: Final[Mapping[Format, Any]] = MappingProxyType(
    {
        "svg": {"Date": None, "Creator": None},
        "pdf": {"CreationDate": None, "Creator": None, "Producer": None},
    }
)
"""No file tells when or with which version of a library it was made."""


def save(
    figure: Figure,
    stem: str,
    folder: Path,
    *,
    formats: Sequence[Format] = ("png", "svg"),
    style: Style = LIGHT,
) -> dict[str, Path]:
    """Write a chart under one name in several formats, each complete or not at all.

    Args:
        figure: the chart.
        stem: name of the files without their ending.
        folder: where to; it exists.
        formats: any of png (1600 dots wide), svg (text stays text) and pdf (fonts embedded).
        style: what the chart was drawn with.

    Returns:
        the paths by format.

    Raises:
        OSError: a file cannot be written.
    """
    paths = {kind: folder / f"{stem}.{kind}" for kind in formats}
    with in_force(style):
        for kind, path in paths.items():
            write_atomically(path, _writer(figure, kind))
    return {str(kind): path for kind, path in paths.items()}


def _writer(figure: Figure, kind: Format) -> Callable[[BinaryIO], None]:
    """Return what writes a figure into an open file."""

    def write(file: BinaryIO) -> None:
        if kind == "png":
            _write_png(figure, file)
        else:
            figure.savefig(file, format=kind, metadata=NO_STAMP[kind])

    return write


def _write_png(figure: Figure, file: BinaryIO) -> None:
    """Write a figure as a PNG with a palette."""
    canvas: Any = FigureCanvasAgg(figure)
    canvas.draw()
    image = Image.fromarray(np.asarray(canvas.buffer_rgba())).convert("RGB")
    few = image.quantize(PALETTE, method=Image.Quantize.MAXCOVERAGE, dither=Image.Dither.NONE)
    few.save(file, format="png", dpi=(DPI, DPI), compress_level=6)
