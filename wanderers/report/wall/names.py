"""Names of months and days, and the notes of a page, in the edition's language: English."""

from __future__ import annotations

from typing import Final

from wanderers.report import facts
from wanderers.site import hours

MONTHS: Final = facts.MONTHS
WEEKDAYS: Final = hours.WEEKDAY_NAMES
WEEKDAYS_SHORT: Final = ("Mo", "Tu", "We", "Th", "Fr", "Sa", "Su")
WEEK: Final = "week"
MORE: Final = "+{count} more in the table"
FEW_MORE: Final = "+{count} more"
WARNING_SIGN: Final = "\N{WARNING SIGN}"
MIDNIGHT_MARK: Final = "*"
RETROGRADE: Final = "{planet} retrograde"
"""What a bar says."""

FOOT_SITE: Final = "Not to be seen from here:"
FOOT_GEOCENTRIC: Final = "Lost in the glare, less than 10° from the Sun:"
UNPRINTED_ONE: Final = "1 further event of this month is in the table only."
UNPRINTED: Final = "{count} further events of this month are in the table only."

LEGEND_LOOK: Final = "when and where to look"
LEGEND_SMALL_HOURS: Final = "when and where to look (after midnight: the first hours of that date)"
LEGEND_MOMENT: Final = "the moment it happens"
LEGEND_NEAR_SUN: Final = f"{WARNING_SIGN} near the Sun, see below"
LEGEND_MIDNIGHT: Final = f"{MIDNIGHT_MARK} within 30 min of midnight"
LEGEND_TABLE: Final = "the table: wanderers almanac, same dates"
LEGEND_WEEKS: Final = "weeks by ISO 8601"
LEGEND_STATIONS: Final = (
    "retrograde, Mercury to Saturn: westward among the stars, from station to station, in longitude"
)
NORTHERN_MOON: Final = "Moon as seen from northern latitudes"
SOUTHERN_MOON: Final = "Moon as seen from southern latitudes"
