"""Event tables made up for tests of calendars: one row of every kind, and rows that are hard to write."""

from __future__ import annotations

from datetime import UTC, datetime, timedelta
from pathlib import Path
from typing import Any

import polars as pl

from wanderers import schema
from wanderers.ephemeris.bodies import BODIES
from wanderers.ephemeris.kernels import Kernel
from wanderers.report.calendars import Style

KERNEL = Kernel(Path("/nowhere/de999.bsp"), "0123456789abcdef" * 4, 1_000, "DE999", 2_400_000.5, 2_500_000.5, BODIES)
STYLE = Style("Lantern Hill planetarium", KERNEL)


def event(kind: str, utc: str, **cells: Any) -> dict[str, Any]:
    """Return a row; its id is made from its kind and bodies unless given."""
    row: dict[str, Any] = dict.fromkeys(schema.EVENT_COLUMNS)
    row |= {"kind": kind, "utc": utc, "body": "mars", "constellation": "Leo"} | cells
    named = "-".join(str(row[name]) for name in ("kind", "frame", "body", "other", "detail") if row[name])
    return row | {"event_id": cells.get("event_id", f"{named.lower().replace(' ', '_')}-c1-1")}


def table(*rows: dict[str, Any]) -> pl.DataFrame:
    """Return an event table."""
    return pl.DataFrame(list(rows), schema=schema.EVENT_COLUMNS)


STATION = event(
    "station", "2027-01-10T12:59:03.120Z", detail="retrograde", frame="ecliptic",
    elongation_deg=129.5, magnitude=-0.36, diameter_arcsec=11.1, distance_au=0.8423,
)  # fmt: skip
CONJUNCTION = event(
    "conjunction", "2027-08-25T06:00:31.000Z", body="venus", other="saturn", frame="equator",
    separation_deg=0.42, elongation_deg=33.0, magnitude=-3.9, diameter_arcsec=10.2, distance_au=1.6,
)  # fmt: skip
NEAR_SUN = event(
    "appulse", "2027-03-05T00:00:10.000Z", body="mercury", other="neptune", detail="quasi",
    separation_deg=3.0, elongation_deg=22.5, magnitude=0.04,
)  # fmt: skip
TRANSIT = event(
    "transit", "2032-11-13T08:54:00.000Z", body="mercury", detail="mercury", separation_deg=0.16,
    elongation_deg=0.16, constellation="Lib", contact1_utc="2032-11-13T06:41:00.000Z",
    contact4_utc="2032-11-13T11:07:29.000Z", utc_uncertainty_s=1.94, delta_t_s=72.1,
)  # fmt: skip
STAR = event(
    "occultation", "2027-05-01T10:00:00.000Z", body="moon", other="Citalá, the jaguar; a\\N star", detail="star",
    separation_deg=0.01, elongation_deg=95.0, distance_au=0.0026,
)  # fmt: skip

ONE_OF_EVERY_KIND = table(
    STATION, CONJUNCTION, NEAR_SUN, TRANSIT, STAR,
    event("opposition", "2027-02-19T15:51:00.000Z", frame="ecliptic", elongation_deg=175.5),
    event("solar_conjunction", "2027-01-01T17:07:31.092Z", body="mercury", detail="superior", frame="ecliptic", elongation_deg=1.8),
    event("quadrature", "2027-02-20T15:11:00.000Z", body="uranus", detail="east", frame="ecliptic", elongation_deg=90.0),
    event("greatest_elongation", "2027-01-03T17:58:00.601Z", body="venus", detail="west", elongation_deg=46.95),
    event("perigee", "2027-01-03T02:32:43.283Z", body="sun", distance_au=0.98333),
    event("apogee", "2027-01-07T08:08:00.000Z", body="moon", distance_au=0.0027179, elongation_deg=6.4),
    event("perihelion", "2027-02-06T07:44:00.000Z", body="mercury", elongation_deg=17.7),
    event("aphelion", "2027-03-04T23:06:00.000Z", elongation_deg=161.1),
    event("greatest_brilliancy", "2028-04-30T01:32:00.000Z", body="venus", magnitude=-4.76, elongation_deg=37.5),
    event("gathering", "2027-08-19T23:06:00.000Z", body="mercury", detail="mercury+venus+jupiter", separation_deg=6.3, elongation_deg=28.0),
    event("constellation_entry", "2027-01-02T05:30:00.000Z", body="moon", detail="Vir", constellation="Lib", elongation_deg=61.7),
    event("node", "2027-01-10T15:57:00.000Z", body="moon", detail="ascending", frame="ecliptic", elongation_deg=30.5),
    event("season_point", "2027-03-20T20:25:00.000Z", body="sun", detail="equinox_march", frame="ecliptic", constellation="Psc"),
    event("ring_plane_crossing", "2038-10-15T12:00:00.000Z", body="saturn", detail="earth", elongation_deg=40.0),
    event("moon_phase", "2027-01-07T20:24:00.000Z", body="moon", detail="new", frame="ecliptic", elongation_deg=2.9),
)  # fmt: skip


def nearest_minute(utc: str) -> datetime:
    """Return an instant rounded to the minute, but within its day; reckoned apart from the program."""
    instant = datetime.fromisoformat(utc.replace("Z", "+00:00"))
    rounded = (instant + timedelta(seconds=30)).replace(second=0, microsecond=0)
    same_day = rounded.date() == instant.date()
    return (rounded if same_day else instant.replace(second=0, microsecond=0)).astimezone(UTC)
