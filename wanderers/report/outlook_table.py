"""The table of seasons side by side for the terminal."""

from __future__ import annotations

from collections.abc import Callable
from typing import Any, Final

import polars as pl

from wanderers.plans.outlook import DARK_DEG, HIGH_DEG
from wanderers.site.places import Site
from wanderers.site.summary import place_words

ASKED: Final = "*"


def outlook_heading(table: pl.DataFrame, site: Site, kernel: str) -> str:
    """Say what a table of seasons side by side is."""
    years = [str(middle)[:4] for middle in table["middle_utc"].drop_nulls()]
    span = f"{min(years)} to {max(years)}" if years else "no year"
    return (
        f"Retrograde seasons of {span} from {place_words(site)}, {kernel}; {ASKED} asked for. High: altitude "
        f"at culmination at the middle; Hours: above {HIGH_DEG:g} degrees with the Sun below {DARK_DEG:g}, "
        "on the first pass, the way back and the last; Size: largest diameter, arcseconds; Box: of the whole "
        "path, degrees; Rank: by hours, high, size (1 is best)"
    )


def _cells(make: Callable[[dict[str, Any]], str]) -> Callable[[pl.DataFrame], list[str]]:
    return lambda table: [make(row) for row in table.iter_rows(named=True)]


def _hours(row: dict[str, Any]) -> str:
    parts = [row[f"dark_hours_{part}"] for part in ("before", "backward", "after")]
    return "+".join("?" if hours is None else f"{hours:.0f}" for hours in parts)


def _box(row: dict[str, Any]) -> str:
    if row["path_width_deg"] is None:
        return "?"
    return f"{row['path_width_deg']:.1f} x {row['path_height_deg']:.1f}"


def _ranks(row: dict[str, Any]) -> str:
    ranks = [row[name] for name in ("dark_hours_rank", "altitude_rank", "diameter_rank")]
    return ", ".join("?" if rank is None else str(rank) for rank in ranks) + f" of {row['ranked_among']}"


def _number(name: str, decimals: int) -> Callable[[pl.DataFrame], list[str]]:
    return _cells(
        lambda row: (
            "?" if row[name] is None else f"{round(row[name], decimals) + 0.0:.{decimals}f}".replace("-", "−")
        )
    )


LAYOUT: Final[list[tuple[str, Callable[[pl.DataFrame], list[str]], bool]]] = [
    ("", _cells(lambda row: ASKED if row["asked_for"] else ""), False),
    ("Planet", _cells(lambda row: str(row["body"]).capitalize()), False),
    ("Middle", _cells(lambda row: str(row["middle_utc"])[:10]), False),
    ("High", _number("culmination_altitude_deg", 0), True),
    ("Hours", _cells(_hours), False),
    ("Size", _number("peak_diameter_arcsec", 1), True),
    ("Mag", _number("peak_magnitude", 1), True),
    ("Arc", _number("arc_deg", 1), True),
    ("Box", _cells(_box), False),
    ("Rank", _cells(_ranks), False),
]
