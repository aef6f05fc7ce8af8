"""Cutting an event table up for several calendars, each event in exactly one of them.

Some calendar programs keep only one of two entries with the same UID, so no event may stand in two files.
"""

from __future__ import annotations

from typing import Final

import polars as pl

from wanderers.ephemeris.bodies import Body
from wanderers.events.kinds import Kind
from wanderers.report.names import label

PARTS: Final = ("body", "kind", "year")
"""What a calendar can be split by; ``body`` is the first body of a pair."""
_NAMES: Final[dict[str, tuple[str, ...]]] = {"body": tuple(Body), "kind": tuple(Kind)}


def split(events: pl.DataFrame, part: str) -> dict[str, pl.DataFrame]:
    """Return the events of every part that has any, by a name fit for a file; ordered as the names are.

    Args:
        events: an event table.
        part: one of PARTS.
    """
    key = events["utc"].str.slice(0, 4) if part == "year" else events[part]
    names = _NAMES.get(part) or key.unique().sort().to_list()
    present = set(key.unique().to_list())
    return {str(name): events.filter(key == str(name)) for name in names if name in present}


def is_part(name: str, part: str) -> bool:
    """Return whether a name can be that of a part."""
    return name in _NAMES[part] if part in _NAMES else len(name) == 4 and name.isdecimal()


def part_title(name: str) -> str:
    """Return what a title calls a part."""
    return label(name.replace("_", " "))
