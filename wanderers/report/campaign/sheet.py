"""The field sheet: two pages to print, black on white, read in red light, ticked by hand.

The first page and part of the second list the nights to come; then what the camera needs, the cautions and
lines for brightness estimates. Nights for which there is no room wait for the next print.
"""

from __future__ import annotations

from dataclasses import replace
from io import BytesIO
from typing import Final

from matplotlib.backends.backend_agg import FigureCanvasAgg
from matplotlib.backends.backend_pdf import PdfPages

from wanderers.ephemeris.bodies import BODIES
from wanderers.report.campaign import cautions, numbers, words
from wanderers.report.campaign.contents import CampaignContents, to_come
from wanderers.report.campaign.leaf import Leaf, paragraph_height
from wanderers.report.campaign.words import Night
from wanderers.report.charts.campaign_field import picture_shape, plot_campaign_field
from wanderers.report.charts.style import LIGHT, in_force
from wanderers.report.wall.layout import Paper
from wanderers.report.wall.text import LEADING, printable, width_pt

TYPE_PT: Final = 11.0
"""Smallest type: read by dim red light. Common practice, no source."""
TITLE_PT: Final = 15.0
HEAD_PT: Final = 12.0
ROWS_PT: Final = (15.2, 21.0)
"""Least and greatest height of a night's row."""
BOX_PT: Final = 8.5
GAP_PT: Final = 3.0
LOG_ROW_PT: Final = 21.0
LOG_ROWS: Final = (4, 6, 12)
"""Lines for brightness estimates: fewest, as many as leave room for the map, and most."""
MAP_PT: Final = 170.0
"""Least height of a map worth having."""
MAP_STYLE: Final = replace(LIGHT, small_pt=TYPE_PT, type_pt=TYPE_PT, colours=dict.fromkeys(BODIES, "#000000"))
STAR_NIGHTS: Final = 3
"""Nights whose comparison stars are printed."""
NOTES: Final = "notes"
SUN: Final = "Sun"
COLUMNS: Final = (
    ("", 14.0),
    ("no", 30.0),
    ("evening", 76.0),
    ("at", 46.0),
    ("window", 82.0),
    ("where", 60.0),
    ("Moon", 66.0),
    ("spares", 94.0),
    (NOTES, 0.0),
)
"""Heads and widths of the list; the last takes what is left."""
LOG_COLUMNS: Final = (
    ("evening", 66.0),
    ("time", 46.0),
    ("star, V", 88.0),
    ("star, V", 88.0),
    ("estimate", 62.0),
    ("sky, clouds, remarks", 0.0),
)
GO: Final = (
    "Go if the sky is clear where the planet stands, wind and dew allow and the place is safe; decided at "
    "____\N{NO-BREAK SPACE}:\N{NO-BREAK SPACE}____"
)


def field_sheet(contents: CampaignContents, paper: Paper) -> bytes:
    """Return the field sheet as a PDF of two pages, fonts embedded; the same campaign gives the same bytes.

    Args:
        contents: the campaign.
        paper: its size, held upright.
    """
    out = BytesIO()
    with in_force(LIGHT), PdfPages(out, metadata=_metadata(contents)) as pdf:
        for leaf in sheet_pages(contents, paper):
            pdf.savefig(leaf.figure)  # type: ignore[no-untyped-call, unused-ignore]
    return out.getvalue()


def sheet_pages(contents: CampaignContents, paper: Paper) -> tuple[Leaf, Leaf]:
    """Return both pages, written."""
    first, second = Leaf(paper), Leaf(paper)
    nights: list[Night] = list(to_come(contents.plan).iter_rows(named=True))
    _write_head(first, contents, 1)
    _write_purpose(first, contents)
    rest = _write_nights(first, contents, nights, first.room)
    _write_head(second, contents, 2)
    about = _about(contents)
    low = _about_height(about, second) + _log_height(LOG_ROWS[0])
    left = _write_nights(second, contents, rest, second.room - low) if rest else []
    if left:
        since = words.short_day(left[0]["evening_date"])
        second.paragraph(f"{len(left)} more from {since} on: see the plan, or print again later.", TYPE_PT)
    for head, texts in about:
        second.line(head, HEAD_PT, bold=True, gap=2.0 * GAP_PT)
        for text in texts:
            second.paragraph(text, TYPE_PT, gap=1.0, hang=10.0)
    high = _map_height(contents, second, second.room - _log_height(LOG_ROWS[1]) - 4.0 * GAP_PT)
    _write_log(second, LOG_ROWS[1] if high else LOG_ROWS[2])
    if high:
        _draw_map(second, contents, high)
    return first, second


def _write_head(leaf: Leaf, contents: CampaignContents, page: int) -> None:
    """Write the head of a page."""
    campaign = contents.campaign
    leaf.y -= TITLE_PT
    leaf.text(
        leaf.left, leaf.y, f"{campaign.season.body.label} from {campaign.site.name}", TITLE_PT, bold=True
    )
    of = f"page {page} of 2, planned as of {words.as_of(contents)}"
    leaf.text(leaf.right, leaf.y, of, TYPE_PT, align="right")
    leaf.y -= 5.0
    leaf.rule(leaf.y, width=1.0)


def _write_purpose(leaf: Leaf, contents: CampaignContents) -> None:
    """Write how the sheet is used, and the line on which is decided whether to go."""
    zone = contents.campaign.site.zone
    leaf.paragraph(
        f"Clock: {zone}. A night is named by its evening: 5 Mar is the night of 5 to 6 March, and a time "
        "marked + lies after midnight. A filled square marks a must-night: if it is lost, use its spares.",
        TYPE_PT,
        gap=GAP_PT,
    )
    leaf.paragraph(lens_line(contents), TYPE_PT, gap=GAP_PT)
    if cautions.is_near_sun(contents):
        leaf.paragraph(cautions.SUN, TYPE_PT, gap=GAP_PT)
    leaf.paragraph(GO, TYPE_PT, gap=GAP_PT)
    leaf.y -= 2.0 * GAP_PT + TYPE_PT
    x = leaf.left
    for text in ("go", "no-go"):
        leaf.box(x, leaf.y - 0.5, BOX_PT)
        x += BOX_PT + 5.0
        x += leaf.text(x, leaf.y, text, TYPE_PT) + 22.0
    leaf.text(x, leaf.y, "Gate opens ____ : ____     everybody off by ____ : ____", TYPE_PT)
    leaf.y -= GAP_PT


def lens_line(contents: CampaignContents) -> str:
    """Return lens, middle and roll in one line."""
    lean = contents.plan["camera_tilt_deg"].drop_nulls()
    tilt = "" if lean.is_empty() else f", tilt from upright {_range(lean.min(), lean.max())}"
    return (
        f"{words.lens_on_sensor(contents)}; middle {numbers.middle(contents)} (J2000); "
        f"upper edge at position angle {contents.frame.position_angle_deg:.0f}°{tilt}."
    )


def _range(low: object, high: object) -> str:
    first, last = (words.signed(float(value), 0) for value in (low, high))  # type: ignore[arg-type]
    return f"{first}°" if first == last else f"{first}° to {last}° (left is +)"


def _edges(leaf: Leaf, columns: tuple[tuple[str, float], ...]) -> list[float]:
    """Return where columns begin."""
    edges = [leaf.left]
    for _, width in columns[:-1]:
        edges.append(edges[-1] + width)
    return edges


def _write_nights(leaf: Leaf, contents: CampaignContents, nights: list[Night], room: float) -> list[Night]:
    """Write as many nights as find room, a row each; return those left over."""
    if not nights:
        if contents.plan.is_empty():
            for text in (*contents.campaign.notes[-1:], *contents.campaign.advice):
                leaf.paragraph(text, TYPE_PT, gap=GAP_PT)
        return []
    edges = _edges(leaf, COLUMNS)
    is_near_sun = cautions.is_near_sun(contents)
    leaf.y -= 2.0 * GAP_PT + TYPE_PT
    for (head, _), x in zip(COLUMNS, edges, strict=True):
        leaf.text(x, leaf.y, SUN if head == NOTES and is_near_sun else head, TYPE_PT, bold=True)
    leaf.y -= 4.0
    leaf.rule(leaf.y, width=0.9)
    free = room - 2.0 * GAP_PT - TYPE_PT - 8.0
    count = min(max(int(free // ROWS_PT[0]), 0), len(nights))
    height = min(free / max(count, 1), ROWS_PT[1])
    for night in nights[:count]:
        note = words.sun_words(contents, night) if is_near_sun else ""
        _write_night(leaf, night, edges, note, height)
    return nights[count:]


def _write_night(leaf: Leaf, night: Night, edges: list[float], note: str, height: float) -> None:
    """Write the row of one night."""
    leaf.y -= height
    must = words.is_must(night)
    leaf.box(edges[0], leaf.y - 0.5, BOX_PT)
    late = "+" if words.is_after_midnight(night) else ""
    cells = (
        str(night["night"]),
        words.short_evening(night),
        f"{words.clock(night['recommended_local'])}{late}",
        words.window(night),
        words.place(night),
        words.moon(night),
        words.spare_days(night) or "none",
        note,
    )
    for text, x in zip(cells, edges[1:], strict=True):
        leaf.text(x, leaf.y, text, TYPE_PT, bold=must and x == edges[1])
    if must:
        wide = width_pt(cells[0], TYPE_PT, bold=True)
        leaf.box(edges[1] + wide + 2.5, leaf.y + 0.8, 5.5, filled=True)
    leaf.rule(leaf.y - 4.0, width=0.3)


def _about(contents: CampaignContents) -> list[tuple[str, list[str]]]:
    """Return what the second page says below the nights, with heads."""
    exposures = "; ".join(f"{name.lower()} {limit}" for name, limit in numbers.exposure_facts(contents))
    stars = ", ".join(f"{row.letter} {row.name} {row.magnitude}" for row in numbers.star_rows(contents))
    parts = [
        ("Camera", [f"Without tracking: {exposures}.", f"Registration stars: {stars or 'none'}."]),
    ]
    compared = numbers.comparison_rows(contents)[:STAR_NIGHTS]
    if compared:
        told = [f"{row.evening} {row.time}: {'; '.join(row.stars) or row.message}." for row in compared]
        parts.append(("Comparison stars (V, B−V, where, air relative to the planet)", told))
    return [*parts, ("Mind", cautions.cautions(contents))]


def _about_height(about: list[tuple[str, list[str]]], leaf: Leaf) -> float:
    """Return how much room the second page's texts take."""
    width = leaf.right - leaf.left
    heads = len(about) * (2.0 * GAP_PT + LEADING * HEAD_PT)
    return heads + sum(paragraph_height(texts, TYPE_PT, width, 1.0, 10.0) for _, texts in about)


def _log_height(rows: int) -> float:
    return 2.0 * GAP_PT + LEADING * HEAD_PT + 6.0 + TYPE_PT + 4.0 + rows * LOG_ROW_PT


def _map_height(contents: CampaignContents, leaf: Leaf, room: float) -> float:
    """Return how high the map of the field is drawn; 0 where there is no room for one."""
    high = min(room, (leaf.right - leaf.left) * picture_shape(contents))
    return high if high >= MAP_PT else 0.0


def _draw_map(leaf: Leaf, contents: CampaignContents, high: float) -> None:
    """Draw the field as the camera sees it below the last line."""
    leaf.y -= 4.0 * GAP_PT
    wide = high / picture_shape(contents)
    left = (leaf.width - wide) / 2.0
    box = (left / leaf.width, (leaf.y - high) / leaf.height, wide / leaf.width, high / leaf.height)
    FigureCanvasAgg(leaf.figure)  # measures the map's text
    plot_campaign_field(contents, leaf.figure.add_axes(box), numbered=False, style=MAP_STYLE)
    leaf.y -= high


def _write_log(leaf: Leaf, most: int) -> None:
    """Draw lines for brightness estimates."""
    rows = min(int((leaf.room - _log_height(0)) // LOG_ROW_PT), most)
    if rows < 1:
        return
    leaf.line("Brightness estimates", HEAD_PT, bold=True, gap=2.0 * GAP_PT)
    edges = _edges(leaf, LOG_COLUMNS)
    leaf.y -= 6.0 + TYPE_PT
    for (head, _), x in zip(LOG_COLUMNS, edges, strict=True):
        leaf.text(x + 2.0, leaf.y, head, TYPE_PT)
    leaf.y -= 4.0
    top = leaf.y
    leaf.rule(top, width=0.9)
    for _ in range(rows):
        leaf.y -= LOG_ROW_PT
        leaf.rule(leaf.y)
    for x in edges[1:]:
        leaf.upright(x, (leaf.y, top))


def _metadata(contents: CampaignContents) -> dict[str, str | None]:
    """Return what the file says of itself: no time, nothing that depends on a library's version."""
    campaign = contents.campaign
    return {
        "Title": printable(f"{campaign.season.body.label} from {campaign.site.name}: field sheet"),
        "CreationDate": None,
        "Creator": None,
        "Producer": None,
    }
