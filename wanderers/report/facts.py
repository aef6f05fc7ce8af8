"""Figures rounded to what they can bear, and the short notes that stand beside an event in a table.

Everything here turns finished table rows into words; nothing is computed but changes of unit.
"""

from __future__ import annotations

import datetime as dt
import functools
import math
from collections.abc import Mapping
from typing import Any, Final

import polars as pl

from wanderers.constants import AU_KM, SPEED_OF_LIGHT_KM_PER_S
from wanderers.ephemeris.constellations import full_name
from wanderers.report import words

MOON_WIDTH_DEG: Final = 0.5
"""The Moon's width in the sky, as people speak of it."""

NEAR_SUN_NOTE: Final = (
    "Near the Sun: no optics while any part of the Sun is above the horizon. Follow local rules."
)
SUN_NOTE: Final = (
    "The Sun itself: only with solar filters over the front of every instrument, or by guarded projection. "
    "Follow local rules."
)
SHORT_NOTES: Final = {words.NEAR_SUN_CAUTION: NEAR_SUN_NOTE, words.SUN_CAUTION: SUN_NOTE}
"""Cautions as they stand in a table's row; their full wording stands once above it."""
PAGE_CAUTION: Final = (
    f"{words.NEAR_SUN_CAUTION} Every event less than {words.NEAR_SUN_DEG:.0f} degrees from the Sun is marked "
    "so. For the Sun itself: " + words.SUN_CAUTION.removeprefix("CAUTION: ")
)
NO_VALUE: Final = ""
MINUS: Final = "\N{MINUS SIGN}"

Row = Mapping[str, Any]


def sun_caution(event: Row) -> str:
    """Return the caution about optics that an event needs, in short, empty when none."""
    return " ".join(SHORT_NOTES[line] for line in words.cautions(event) if line in SHORT_NOTES)


def note(event: Row) -> str:
    """Return all that must be said beside an event: glare, caution about optics, doubtful time."""
    return " ".join(filter(None, (_glare(event), sun_caution(event), words.uncertainty(event))))


def _glare(event: Row) -> str:
    elongation = event["elongation_deg"]
    hidden = elongation is not None and elongation < words.GLARE_DEG
    return f"Not observable: {elongation:.0f}° from the Sun." if hidden else NO_VALUE


@functools.cache
def constellation(abbreviation: str | None) -> str:
    """Return the Latin name of a constellation."""
    return NO_VALUE if abbreviation is None else full_name(abbreviation)


def spread(values: pl.Series, unit: str, decimals: int = 0) -> str:
    """Return the range of some figures, rounded: ``81 days``, ``21 to 24 days``."""
    texts = [f"{value:.{decimals}f}" for value in sorted(values.to_list())]
    ends = texts[0] if texts[0] == texts[-1] else f"{texts[0]} to {texts[-1]}"
    return f"{ends} {unit}{'' if ends == '1' else 's'}"


def signed(value: float | None, decimals: int) -> str:
    """Return a number with a real minus sign; nothing for null."""
    return NO_VALUE if value is None else f"{value:.{decimals}f}".replace("-", MINUS)


def angle(degrees: float | None) -> str:
    """Return a separation: in degrees, below one degree in arcminutes, below one of those in arcseconds."""
    if degrees is None:
        return NO_VALUE
    if degrees >= 0.9995:
        return f"{degrees:.1f}°"
    return f"{degrees * 60.0:.0f}′" if degrees * 60.0 >= 0.9995 else f"{degrees * 3_600.0:.0f}″"


def minute(instant: str | None) -> str:
    """Return an ISO 8601 instant to the minute, ``2027-01-10 12:59``, nothing for null."""
    return NO_VALUE if instant is None else words.minute(instant)


def day(instant: str | None) -> str:
    """Return the calendar day of an ISO 8601 instant, ``2027-01-10``."""
    return NO_VALUE if instant is None else instant.partition("T")[0]


def spoken_day(instant: str | None) -> str:
    """Return the calendar day in words, ``10 January 2027``; years before 1 stay in figures."""
    text = day(instant)
    try:
        date = dt.date.fromisoformat(text)
    except ValueError:
        return text
    return f"{date.day} {MONTHS[date.month - 1]} {date.year}"


def spoken_month(instant: str | None) -> str:
    """Return the month of an ISO 8601 instant in words, ``January 2027``."""
    return spoken_day(instant).partition(" ")[2] or day(instant)


MONTHS: Final = (
    "January", "February", "March", "April", "May", "June",
    "July", "August", "September", "October", "November", "December",
)  # fmt: skip


def moon_widths(degrees: float) -> str:
    """Return an angle in Moon widths."""
    return f"{degrees / MOON_WIDTH_DEG:.0f} Moon widths"


def million_km(au: float) -> str:
    """Return a distance in million kilometres."""
    return f"{au * AU_KM / 1e6:.0f} million km"


def light_time(au: float) -> str:
    """Return how long light takes over a distance."""
    seconds = au * AU_KM / SPEED_OF_LIGHT_KM_PER_S
    minutes = seconds / 60.0
    return f"{minutes:.1f} light-minutes" if minutes < 90.0 else f"{minutes / 60.0:.1f} light-hours"


def times_brighter(magnitude_difference: float) -> str:
    """Return a difference of magnitudes as a ratio of brightness, Pogson's 10^(0.4 dm)."""
    ratio = math.pow(10.0, 0.4 * abs(magnitude_difference))
    return f"{ratio:.1f} times" if ratio < 9.95 else f"{ratio:.0f} times"
