"""The Moon's disc at its four phases, as it hangs in the sky of either half of the Earth."""

from __future__ import annotations

from typing import Final

from matplotlib.patches import Circle, Wedge

from wanderers.report.wall.layout import Sheet

DARK: Final = "#2b2b2b"
LIT: Final = "#ffffff"
NAMES: Final = ("New Moon", "First quarter", "Full Moon", "Last quarter")


def draw_moon(sheet: Sheet, x: float, y: float, radius: float, phase: int, *, southern: bool) -> None:
    """Draw a disc: what is lit is white paper, the rest dark.

    The waxing Moon is lit on the right for whoever faces it north of the tropics, on the left south of them.

    Args:
        sheet: the page.
        x: of its middle, points.
        y: of its middle, points.
        radius: points.
        phase: 0 new, 1 first quarter, 2 full, 3 last quarter.
        southern: whether it is seen from the southern half of the Earth.
    """
    ground = LIT if phase == 2 else DARK
    sheet.ax.add_patch(Circle((x, y), radius, facecolor=ground, edgecolor=DARK, linewidth=0.8, zorder=2.5))
    if phase in (1, 3):
        lit_right = (phase == 1) != southern
        start = -90.0 if lit_right else 90.0
        half = Wedge((x, y), radius, start, start + 180.0, facecolor=LIT, edgecolor=DARK, linewidth=0.8)
        half.set_zorder(2.6)
        half.set_gid(f"moon-lit-{'right' if lit_right else 'left'}")
        sheet.ax.add_patch(half)
