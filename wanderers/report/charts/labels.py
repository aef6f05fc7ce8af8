"""Labels that do not collide: each takes the cheapest of its candidate places that is still free.

All lengths are dots at the figure's own resolution; y grows upward. Nothing here knows what is drawn.
"""

from __future__ import annotations

from collections.abc import Sequence
from dataclasses import dataclass, field
from typing import Any, Final

import numpy as np
from matplotlib.axes import Axes
from matplotlib.backends.backend_agg import FigureCanvasAgg
from matplotlib.text import Text

from wanderers.arrays import Floats, Ints

DIRECTIONS: Final = 16
REACHES_PT: Final = (5.0, 9.0, 15.0, 23.0, 33.0, 46.0)
"""How far from its anchor the near side of a label may stand."""

GAP_PT: Final = 2.0
"""Least room between two labels."""

COVER_COST: Final = 2.5
"""What it costs to cover one dot of a line or a star, in points of distance."""

TURN_COST: Final = 9.0
"""What it costs to stand at the opposite of the preferred direction, in points of distance."""

MESH_DOTS: Final = 3.0
"""Width of the mesh on which covered dots are counted."""

LEADER_FROM_PT: Final = 12.0
"""Distance from which a thin line leads from the label to what it names."""


@dataclass(frozen=True, slots=True)
class Label:
    """A text that wants a place.

    Attributes:
        text: what it says.
        anchor: the dot it names.
        centres: candidate places of its middle, shape (k, 2).
        costs: what each costs, shape (k,), in points.
        size: width and height in dots.
        look: keywords for the text.
        leads: whether a line may lead to the anchor.
        dearest: a place that costs more is refused, and the label left out.
    """

    text: str
    anchor: tuple[float, float]
    centres: Floats
    costs: Floats
    size: tuple[float, float]
    look: dict[str, Any] = field(default_factory=dict)
    leads: bool = True
    dearest: float = 90.0


@dataclass(frozen=True, slots=True)
class Ground:
    """What labels keep clear of.

    Attributes:
        bounds: left, bottom, right, top of where labels may be.
        points: dots better not covered, shape (m, 2).
        boxes: left, bottom, right, top of what must not be covered, shape (n, 4).
    """

    bounds: tuple[float, float, float, float]
    points: Floats
    boxes: Floats = field(default_factory=lambda: np.zeros((0, 4)))


def place(labels: Sequence[Label], ground: Ground, dots_per_pt: float) -> list[int | None]:
    """Return which candidate each label takes, in order of the labels; None where it is left out."""
    boxes = ground.boxes
    counts = _summed(ground)
    taken: list[int | None] = []
    for label in labels:
        candidates = boxes_around(label.centres, label.size)
        costs = label.costs + COVER_COST * _covered(candidates, counts, ground.bounds)
        costs[~_inside(candidates, ground.bounds)] = np.inf
        costs[_overlaps(candidates, boxes, GAP_PT * dots_per_pt)] = np.inf
        best = int(np.argmin(costs)) if costs.size else 0
        fits = costs.size > 0 and bool(costs[best] <= label.dearest)
        taken.append(best if fits else None)
        if fits:
            boxes = np.vstack([boxes, candidates[best]])
    return taken


def around(
    anchor: tuple[float, float],
    size: tuple[float, float],
    prefer_deg: Sequence[float],
    dots_per_pt: float,
    *,
    nearest_pt: float = 0.0,
) -> tuple[Floats, Floats]:
    """Return candidate middles of a label round its anchor, and their costs.

    Args:
        anchor: the dot named.
        size: width and height of the label, dots.
        prefer_deg: preferred directions, counter-clockwise from the right.
        dots_per_pt: resolution.
        nearest_pt: how far from the anchor the first candidates stand, more than usual.

    Returns:
        shape (k, 2) and (k,).
    """
    angle = np.radians(np.arange(DIRECTIONS) * 360.0 / DIRECTIONS)
    towards = np.stack([np.cos(angle), np.sin(angle)], axis=1)
    half = np.array(size) / 2.0
    with np.errstate(divide="ignore"):
        depth = np.min(half / np.abs(towards), axis=1)  # from the middle to the edge, along the direction
    off = np.radians(np.asarray(prefer_deg, dtype=np.float64))[:, np.newaxis] - angle
    turned = np.min(1.0 - np.cos(off), axis=0) / 2.0
    reach = np.array(REACHES_PT) + nearest_pt
    centres = np.array(anchor) + towards * (depth + reach[:, np.newaxis] * dots_per_pt)[..., np.newaxis]
    costs = np.array(REACHES_PT)[:, np.newaxis] + TURN_COST * turned
    return centres.reshape(-1, 2), costs.ravel()


def spread(wanted: Floats, least_gap: float, low: float, high: float) -> Floats:
    """Return heights as near to those wanted as can be with a least gap between neighbours.

    Args:
        wanted: shape (n,), any order.
        least_gap: between neighbours.
        low: lowest height allowed.
        high: highest height allowed.

    Returns:
        shape (n,), in the order given.

    Source: pool-adjacent-violators for isotonic least squares (Barlow et al. 1972, from memory).
    """
    order = np.argsort(wanted, kind="stable")
    level = wanted[order] - least_gap * np.arange(wanted.size)
    pools: list[tuple[float, int]] = []
    for value in level.tolist():
        mean, count = value, 1
        while pools and pools[-1][0] > mean:
            before, others = pools.pop()
            mean, count = (before * others + mean * count) / (others + count), others + count
        pools.append((mean, count))
    flat = np.concatenate([np.full(count, mean) for mean, count in pools] or [np.zeros(0)])
    top = high - least_gap * max(wanted.size - 1, 0)
    out = np.empty(wanted.size)
    out[order] = np.clip(flat, low, max(low, top)) + least_gap * np.arange(wanted.size)
    return out


def measure(ax: Axes, text: str, look: dict[str, Any]) -> tuple[float, float]:
    """Return width and height of a text in dots, as these axes would draw it."""
    probe = Text(0.0, 0.0, text, **{key: value for key, value in look.items() if key != "bbox"})
    probe.set_figure(ax.figure)
    canvas = ax.figure.canvas
    if not isinstance(canvas, FigureCanvasAgg):
        raise TypeError("the figure needs an Agg canvas to measure text; new_figure gives one")
    renderer: Any = canvas.get_renderer()  # type: ignore[no-untyped-call]
    extent = probe.get_window_extent(renderer)
    return float(extent.width), float(extent.height)


def dots_per_pt(ax: Axes) -> float:
    """Return the resolution of the axes' figure."""
    return float(ax.figure.dpi) / 72.0


def label_at(
    ax: Axes,
    text: str,
    anchor: tuple[float, float],
    prefer_deg: Sequence[float],
    look: dict[str, Any],
    *,
    nearest_pt: float = 0.0,
    dearest: float = 90.0,
) -> Label:
    """Return a label for a dot of the axes, measured, with candidates all round it."""
    size = measure(ax, text, look)
    centres, costs = around(anchor, size, prefer_deg, dots_per_pt(ax), nearest_pt=nearest_pt)
    return Label(text, anchor, centres, costs, size, look, dearest=dearest)


def ground_of(ax: Axes, points: Floats, boxes: Floats | None = None) -> Ground:
    """Return the ground of axes, their frame being the bounds."""
    box = ax.get_window_extent()
    inset = 2.0 * dots_per_pt(ax)
    bounds = (box.x0 + inset, box.y0 + inset, box.x1 - inset, box.y1 - inset)
    return Ground(bounds, points, np.zeros((0, 4)) if boxes is None else boxes)


def write_labels(ax: Axes, labels: Sequence[Label], ground: Ground) -> list[Text]:
    """Place labels and write those that found room; earlier ones choose first."""
    texts = []
    unit = dots_per_pt(ax)
    to_axes = ax.transAxes.inverted()
    for label, chosen in zip(labels, place(labels, ground, unit), strict=True):
        if chosen is None:
            continue
        centre = label.centres[chosen]
        if label.leads:
            _lead(ax, label, centre, unit)
        x, y = to_axes.transform(centre)
        written = ax.text(
            x, y, label.text, transform=ax.transAxes, ha="center", va="center", zorder=6, **label.look
        )
        written.set_in_layout(False)
        texts.append(written)
    return texts


def dense(points: Floats, spacing: float) -> Floats:
    """Return a broken line, shape (n, 2), NaN between its parts, as dots at most ``spacing`` apart."""
    steps = np.diff(points, axis=0)
    length = np.hypot(steps[:, 0], steps[:, 1])
    whole = np.isfinite(length)
    start, step, count = points[:-1][whole], steps[whole], np.ceil(length[whole] / spacing).astype(np.int64)
    count = np.maximum(count, 1)
    of = np.repeat(np.arange(count.size), count)
    part = (np.arange(of.size) - np.repeat(np.cumsum(count) - count, count)) / count[of]
    return np.asarray(start[of] + part[:, np.newaxis] * step[of])


def boxes_around(centres: Floats, size: tuple[float, float]) -> Floats:
    """Return left, bottom, right, top of boxes of one size, shape (k, 4)."""
    half = np.array(size) / 2.0
    return np.hstack([centres - half, centres + half])


def _lead(ax: Axes, label: Label, centre: Floats, unit: float) -> None:
    """Draw a thin line from a label that stands far from its anchor."""
    anchor = np.array(label.anchor)
    half = np.array(label.size) / 2.0
    near = np.clip(anchor, centre - half, centre + half)
    if np.hypot(*(anchor - near)) < LEADER_FROM_PT * unit:
        return
    ends = ax.transAxes.inverted().transform(np.stack([anchor, near]))
    colour = label.look.get("color", "black")
    ax.plot(ends[:, 0], ends[:, 1], transform=ax.transAxes, color=colour, linewidth=0.6, zorder=5)


def _summed(ground: Ground) -> Ints:
    """Return how many points lie to the lower left of each corner of a mesh over the bounds.

    With such sums the points in any box are counted from its four corners (Crow 1984, Computer Graphics 18,
    207).
    """
    left, bottom, right, top = ground.bounds
    shape = (int((right - left) / MESH_DOTS) + 2, int((top - bottom) / MESH_DOTS) + 2)
    cell = np.floor((ground.points - (left, bottom)) / MESH_DOTS)
    inside = np.all((cell >= 0.0) & (cell < shape), axis=1)
    column, row = cell[inside].astype(np.int64).T
    sums = np.zeros((shape[0] + 1, shape[1] + 1), dtype=np.int64)
    np.add.at(sums, (column + 1, row + 1), 1)
    return np.asarray(sums.cumsum(axis=0).cumsum(axis=1))


def _covered(boxes: Floats, sums: Ints, bounds: tuple[float, float, float, float]) -> Floats:
    """Return about how many points lie in each box, shape (k,), to a mesh's width at its edges."""
    origin = np.array([bounds[0], bounds[1]])
    most = np.array(sums.shape) - 1
    low = np.clip(np.floor((boxes[:, :2] - origin) / MESH_DOTS), 0, most).astype(np.int64)
    high = np.clip(np.ceil((boxes[:, 2:] - origin) / MESH_DOTS), 0, most).astype(np.int64)
    (x0, y0), (x1, y1) = low.T, high.T
    return np.asarray(sums[x1, y1] - sums[x0, y1] - sums[x1, y0] + sums[x0, y0], dtype=np.float64)


def _inside(boxes: Floats, bounds: tuple[float, float, float, float]) -> Any:
    """Return which boxes lie within bounds, shape (k,)."""
    left, bottom, right, top = bounds
    return (boxes[:, 0] >= left) & (boxes[:, 1] >= bottom) & (boxes[:, 2] <= right) & (boxes[:, 3] <= top)


def _overlaps(boxes: Floats, others: Floats, gap: float) -> Any:
    """Return which boxes come closer than a gap to any of the others, shape (k,)."""
    apart = (
        (boxes[:, np.newaxis, 0] >= others[:, 2] + gap)
        | (boxes[:, np.newaxis, 2] <= others[:, 0] - gap)
        | (boxes[:, np.newaxis, 1] >= others[:, 3] + gap)
        | (boxes[:, np.newaxis, 3] <= others[:, 1] - gap)
    )
    return ~apart.all(axis=1)
