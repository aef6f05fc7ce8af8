"""Names and types of the columns that depend on a site; what ``wanderers.schema`` is for the others.

Angles named without more are topocentric and those at ``best_utc``; a null means "does not apply".
"""

from __future__ import annotations

from typing import Final

import polars as pl

Columns = dict[str, type[pl.DataType]]

WINDOW_COLUMNS: Final[Columns] = {
    "window_start_utc": pl.String,
    "best_utc": pl.String,
    "window_end_utc": pl.String,
    "window_start_local": pl.String,
    "best_local": pl.String,
    "window_end_local": pl.String,
}
"""When to watch."""

PLACE_COLUMNS: Final[Columns] = {
    "altitude_deg": pl.Float64,
    "airless_altitude_deg": pl.Float64,
    "azimuth_deg": pl.Float64,
    "compass": pl.String,
    "airmass": pl.Float64,
    "sun_altitude_deg": pl.Float64,
    "dimmed_magnitude": pl.Float64,
    "moon_illuminated": pl.Float64,
    "moon_separation_deg": pl.Float64,
    "moon_altitude_deg": pl.Float64,
}
"""Where it then stands. ``altitude_deg`` and ``moon_altitude_deg`` with standard refraction,
``sun_altitude_deg`` and ``airless_altitude_deg`` without; ``moon_illuminated`` 0 to 1."""

VERDICT_COLUMNS: Final[Columns] = {
    "verdict": pl.String,
    "verdict_reason": pl.String,
    "caution": pl.String,
}

SITE_COLUMNS: Final[Columns] = {
    "site": pl.String,
    "zone": pl.String,
    "local_date": pl.String,
    "local_time": pl.String,
    "evening_date": pl.String,
    **WINDOW_COLUMNS,
    **PLACE_COLUMNS,
    **VERDICT_COLUMNS,
}
"""What a site adds to a table of events: there ``local_date`` and ``local_time`` are the instant's."""

EVENT_VIEW_COLUMNS: Final[Columns] = {
    **SITE_COLUMNS,
    "seen_separation_deg": pl.Float64,
    "seen_placement": pl.String,
    "upper": pl.String,
    "left": pl.String,
    "other_altitude_deg": pl.Float64,
    "other_magnitude": pl.Float64,
    "instant_altitude_deg": pl.Float64,
    "instant_sun_altitude_deg": pl.Float64,
}
"""All that a site adds to a table of events. At ``best_utc``: how far ``other`` stands from ``body``, on
which side of it, which of them is upper and which left with the horizon level, and the other's altitude and
magnitude outside the air; at the instant itself: the altitudes of ``body``, as seen, and of the Sun."""

CONTACTS: Final = (1, 2, 3, 4)
LOCAL_DISC_COLUMNS: Final[Columns] = {
    "local_closest_utc": pl.String,
    "local_closest_local": pl.String,
    "local_separation_deg": pl.Float64,
    **{f"local_contact{number}_utc": pl.String for number in CONTACTS},
    **{f"local_contact{number}_local": pl.String for number in CONTACTS},
    **{f"local_contact{number}_altitude_deg": pl.Float64 for number in CONTACTS},
    "disappears_limb": pl.String,
    "reappears_limb": pl.String,
    "circumstances": pl.String,
}
"""What becomes of an occultation, a transit or a close pass of the Moon at the site: least separation of the
centres, contacts and how high they happen, the Moon's ``bright`` or ``dark`` limb, and all of it in words."""

SUN_TIMES: Final = (
    "sunset",
    "civil_dusk",
    "nautical_dusk",
    "astronomical_dusk",
    "astronomical_dawn",
    "nautical_dawn",
    "civil_dawn",
    "sunrise",
)
BODY_TIMES: Final = ("rise", "culmination", "set")

NIGHT_COLUMNS: Final[Columns] = {
    "evening_date": pl.String,
    "body": pl.String,
    "site": pl.String,
    "zone": pl.String,
    "local_date": pl.String,
    "local_time": pl.String,
    **WINDOW_COLUMNS,
    **PLACE_COLUMNS,
    **VERDICT_COLUMNS,
    **{f"{name}_utc": pl.String for name in (*SUN_TIMES, *BODY_TIMES)},
    "magnitude": pl.Float64,
    "elongation_deg": pl.Float64,
    "constellation": pl.String,
    "hour_angle_deg": pl.Float64,
    "parallactic_angle_deg": pl.Float64,
    "remark": pl.String,
    **{f"{name}_local": pl.String for name in (*SUN_TIMES, *BODY_TIMES)},
}
"""One row an evening and body; ``local_date`` and ``local_time`` are those of ``best_utc``. ``remark`` says
what is out of the ordinary about rising and setting."""

MOMENT_COLUMNS: Final[Columns] = {
    "body": pl.String,
    "kind": pl.String,
    "site": pl.String,
    "zone": pl.String,
    "utc": pl.String,
    "local": pl.String,
    "altitude_deg": pl.Float64,
    "airless_altitude_deg": pl.Float64,
    "azimuth_deg": pl.Float64,
    "compass": pl.String,
    "airmass": pl.Float64,
    "magnitude": pl.Float64,
    "dimmed_magnitude": pl.Float64,
    "elongation_deg": pl.Float64,
    "constellation": pl.String,
    "sun_altitude_deg": pl.Float64,
    "neighbours": pl.String,
    "nearest_star": pl.String,
    "nearest_star_separation_deg": pl.Float64,
    **VERDICT_COLUMNS,
}
"""Everything that is up at one moment, brightest first."""

SITE_LIST_COLUMNS: Final[Columns] = {
    "site": pl.String,
    "latitude_deg": pl.Float64,
    "longitude_deg": pl.Float64,
    "elevation_m": pl.Float64,
    "zone": pl.String,
    "horizon": pl.String,
    "file": pl.String,
    "problem": pl.String,
}
"""The user's sites."""

CITY_COLUMNS: Final[Columns] = {
    "city": pl.String,
    "country": pl.String,
    "population": pl.Int64,
    "latitude_deg": pl.Float64,
    "longitude_deg": pl.Float64,
    "zone": pl.String,
}
"""Places of the gazetteer."""


LINEUP_COLUMNS: Final[Columns] = {
    "first_evening": pl.String,
    "last_evening": pl.String,
    "evenings": pl.Int64,
    "bodies": pl.String,
    "body_count": pl.Int64,
    "best_evening": pl.String,
    "best_utc": pl.String,
    "best_local": pl.String,
    "morning_or_evening": pl.String,
    "arc_deg": pl.Float64,
    "from_compass": pl.String,
    "to_compass": pl.String,
    "from_body": pl.String,
    "to_body": pl.String,
    "lowest_altitude_deg": pl.Float64,
    "lowest_body": pl.String,
    "highest_altitude_deg": pl.Float64,
    "highest_body": pl.String,
    "faintest_body": pl.String,
    "faintest_dimmed_magnitude": pl.Float64,
    "elongation_deg": pl.Float64,
    "sun_altitude_deg": pl.Float64,
    "moon_altitude_deg": pl.Float64,
    "moon_illuminated": pl.Float64,
    "verdict": pl.String,
    "places": pl.String,
    "evenings_with_most": pl.Int64,
    "evenings_before_midnight": pl.Int64,
    "evenings_after_midnight": pl.Int64,
    "first_utc": pl.String,
    "first_local": pl.String,
    "first_bodies": pl.String,
    "last_utc": pl.String,
    "last_local": pl.String,
    "last_bodies": pl.String,
    "cut_at_start": pl.Boolean,
    "cut_at_end": pl.Boolean,
    "site": pl.String,
    "zone": pl.String,
    "sunset_local": pl.String,
    "sunrise_local": pl.String,
    "caution": pl.String,
}
"""One row a run of evenings on which enough bodies stand up at one moment. The bodies (joined by ``+``) and
all angles are those at ``best_utc``; ``arc_deg`` is the widest angle between two of them, which stand left
(``from``) and right (``to``) for who faces them. ``elongation_deg`` is that of the one nearest the Sun,
``verdict`` that of the worst seen; ``first`` and ``last`` are the best moments of the run's two ends.
``evenings_with_most`` counts the evenings with as many bodies as the best, ``evenings_before_midnight`` those
with such a moment while the Sun is west of the meridian, ``evenings_after_midnight`` while it is east.
``cut_at_start`` and ``cut_at_end``: the run reaches the border of the span, so it may be longer."""

SIGHT_ANGLES: Final = (
    "altitude_deg",
    "sun_altitude_deg",
    "azimuth_difference_deg",
    "arcus_deg",
    "elongation_deg",
    "magnitude",
)

APPARITION_COLUMNS: Final[Columns] = {
    "body": pl.String,
    "kind": pl.String,
    "first_sight_earliest": pl.String,
    "first_sight_likely": pl.String,
    "first_sight_latest": pl.String,
    "last_sight_earliest": pl.String,
    "last_sight_likely": pl.String,
    "last_sight_latest": pl.String,
    "event_kind": pl.String,
    "event_id": pl.String,
    "event_utc": pl.String,
    "event_elongation_deg": pl.Float64,
    "event_magnitude": pl.Float64,
    "weeks_from": pl.String,
    "weeks_to": pl.String,
    "weeks_nights": pl.Int64,
    "best_evening": pl.String,
    "best_utc": pl.String,
    "best_local": pl.String,
    "best_at_civil_hour": pl.Boolean,
    "best_altitude_deg": pl.Float64,
    "best_azimuth_deg": pl.Float64,
    "best_compass": pl.String,
    "best_sun_altitude_deg": pl.Float64,
    "best_elongation_deg": pl.Float64,
    "best_magnitude": pl.Float64,
    "ease_rank": pl.Int64,
    "first_sight_haze_days": pl.Int64,
    "last_sight_haze_days": pl.Int64,
    "first_sight_clear_days": pl.Int64,
    "last_sight_clear_days": pl.Int64,
    **{f"first_sight_{name}": pl.Float64 for name in SIGHT_ANGLES},
    **{f"last_sight_{name}": pl.Float64 for name in SIGHT_ANGLES},
    "morning_weeks_from": pl.String,
    "morning_weeks_to": pl.String,
    "morning_weeks_nights": pl.Int64,
    "criterion": pl.String,
    "extinction_mag": pl.Float64,
    "extinction_clear_mag": pl.Float64,
    "extinction_hazy_mag": pl.Float64,
    "site": pl.String,
    "zone": pl.String,
    "remark": pl.String,
    "caution": pl.String,
}
"""One row an apparition: ``evening`` or ``morning`` of Mercury and Venus, ``morning_to_evening`` of the
others, from one conjunction with the Sun to the next. Sights are local calendar dates of the moment itself (a
morning's own date); ``weeks`` and ``best_evening`` are dates of evenings. ``latest`` first and ``earliest``
last sight are null where haze may hide it altogether. ``haze_days`` is by how many days haze of
``extinction_hazy_mag`` delays the first and hastens the last sight, ``clear_days`` the same of usual against
clear air. Angles of a sight are those at the best moment of the likely date; ``arcus_deg`` is the planet's
altitude less the Sun's, both without air. ``weeks`` is the run of evenings around the best on which it stands
above the least altitude and shows at a civil hour to whoever must first find it; ``best`` is at a civil hour
if it then shows at all. ``ease_rank``: 1 is the easiest of a body's apparitions that stand best within the
span, by how well it shows and how high at a civil hour, however low."""


def arranged(table: pl.DataFrame, columns: Columns) -> pl.DataFrame:
    """Return a table with exactly these columns, in this order and of these types."""
    return table.select(pl.col(name).cast(kind) for name, kind in columns.items())
