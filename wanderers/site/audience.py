"""Events chosen for an audience, with a count of what each limit took away."""

from __future__ import annotations

from dataclasses import dataclass, field, replace
from typing import Final

import polars as pl

from wanderers.ephemeris.store import TrackStore
from wanderers.events.members import member_figures
from wanderers.site.almanac import seen_from_site
from wanderers.site.hours import WEEKDAYS, Opening
from wanderers.site.places import Site
from wanderers.site.rules import Rules
from wanderers.site.visibility import Verdict

WATCHABLE: Final = pl.col("verdict") != Verdict.NOT_VISIBLE.value


@dataclass(frozen=True, slots=True)
class Audience:
    """What an audience wants to hear of.

    Attributes:
        visible: only what can be seen from the site, with whatever aid.
        opening: weekdays and hours; only what can be seen then.
        brighter: only where all that takes part is at least this bright, magnitudes; None for no limit.
        least_elongation_deg: only where all is at least so far from the Sun; likewise.
        within_deg: only pairs that are at most so far apart when they are best seen; likewise.
    """

    visible: bool = False
    opening: Opening = field(default_factory=Opening)
    brighter: float | None = None
    least_elongation_deg: float | None = None
    within_deg: float | None = None

    @property
    def must_see(self) -> bool:
        """Whether only what can be seen counts."""
        return self.visible or not self.opening.is_always


@dataclass(frozen=True, slots=True)
class Removed:
    """How many events a limit took away, and which limit, in words."""

    count: int
    words: str


def chosen_by_figures(
    store: TrackStore, events: pl.DataFrame, audience: Audience
) -> tuple[pl.DataFrame, list[Removed]]:
    """Return the events bright enough and far enough from the Sun, and how many either limit took away."""
    if audience.brighter is None and audience.least_elongation_deg is None:
        return events, []
    rows, removed = events.hstack(member_figures(store, events)), []
    if audience.brighter is not None:
        bright = (pl.col("faintest_magnitude") <= audience.brighter).fill_null(value=False)
        rows, count = _split(rows, bright)
        removed.append(Removed(count, f"fainter than magnitude {audience.brighter:g}"))
    if audience.least_elongation_deg is not None:
        clear = (pl.col("least_elongation_deg") >= audience.least_elongation_deg).fill_null(value=True)
        rows, count = _split(rows, clear)
        removed.append(Removed(count, f"within {_degrees(audience.least_elongation_deg)} of the Sun"))
    return rows.select(events.columns), removed


def chosen_from_site(
    store: TrackStore, site: Site, events: pl.DataFrame, rules: Rules, audience: Audience
) -> tuple[pl.DataFrame, list[Removed]]:
    """Return what a site sees of events, only what can be seen if that is asked, and what was taken away."""
    seen = seen_from_site(store, site, events, rules)
    if not audience.must_see:
        return seen, []
    opening = audience.opening
    seen, count = _split(seen, WATCHABLE)
    removed = [Removed(count, "not to be seen from here")]
    limits = []
    if opening.weekdays:
        limits.append((replace(opening, after=None, by=None), f"not on {_days(opening)}"))
    if opening.after is not None or opening.by is not None:
        limits.append((opening, f"not {_hours(opening)}"))
    for limit, words in limits:
        again = seen_from_site(store, site, seen.select(events.columns), rules, limit)
        seen, count = _split(again, WATCHABLE)
        removed.append(Removed(count, words))
    # Last, for on another evening or at another hour a pair stands differently.
    if audience.within_deg is not None:
        near = (pl.col("seen_separation_deg") <= audience.within_deg).fill_null(value=True)
        seen, count = _split(seen, near)
        removed.append(Removed(count, f"farther apart than {_degrees(audience.within_deg)} when best seen"))
    return seen, removed


def removed_words(removed: list[Removed]) -> str:
    """Return what the limits took away in one line, empty if there was none."""
    return "Left out: " + ", ".join(f"{one.count} {one.words}" for one in removed) if removed else ""


def _split(table: pl.DataFrame, keep: pl.Expr) -> tuple[pl.DataFrame, int]:
    kept = table.filter(keep)
    return kept, table.height - kept.height


def _degrees(angle_deg: float) -> str:
    return f"{angle_deg:g} degree{'' if angle_deg == 1.0 else 's'}"


def _days(opening: Opening) -> str:
    return ", ".join(WEEKDAYS[day].capitalize() for day in sorted(opening.weekdays))


def _hours(opening: Opening) -> str:
    parts = [("after", opening.after), ("by", opening.by)]
    return " and ".join(f"{word} {time:%H:%M}" for word, time in parts if time is not None)
