"""The pictures of a report: which are drawn, and how they reach page and folder."""

from __future__ import annotations

import base64
from dataclasses import dataclass
from pathlib import Path

from wanderers.ephemeris.bodies import Body
from wanderers.report.contents import Contents, Progress


@dataclass(frozen=True, slots=True)
class Picture:
    """A drawn picture.

    Attributes:
        stem: file name without its ending.
        title: what it shows.
        alt: what it says, for those who do not see it.
        body: the planet it is about, None for all.
        season_id: the season it is about, if one.
        svg: the drawing, empty where it stands in its file only, so that the page stays light.
    """

    stem: str
    title: str
    alt: str
    body: Body | None = None
    season_id: str = ""
    svg: bytes = b""

    @property
    def source(self) -> str:
        """The drawing as an address that needs no file."""
        return "data:image/svg+xml;base64," + base64.b64encode(self.svg).decode("ascii")


def draw(contents: Contents, folder: Path, progress: Progress) -> tuple[Picture, ...]:
    """Draw every picture of a report into a folder, which is made."""
    folder.mkdir()
    return ()
