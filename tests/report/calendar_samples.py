"""Event tables made up for tests of calendars: one row of every kind, and rows that are hard to write."""

from __future__ import annotations

import csv
from datetime import UTC, datetime, timedelta
from pathlib import Path
from typing import Any

import polars as pl

from wanderers import schema
from wanderers.ephemeris.bodies import BODIES
from wanderers.ephemeris.kernels import Kernel
from wanderers.report.calendars import Style

CHECKSUM = "0123456789abcdef" * 4
KERNEL = Kernel(Path("nowhere/de999.bsp"), CHECKSUM, 1_000, "DE999", 2_400_000.5, 2_500_000.5, BODIES)
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
    "occultation", "2027-05-01T10:00:00.000Z", body="moon", other="Citalá, the jaguar; a\\N star",
    detail="star", separation_deg=0.01, elongation_deg=95.0, distance_au=0.0026,
)  # fmt: skip

THE_OTHER_KINDS = """
kind,utc,body,detail,frame,separation_deg,elongation_deg,magnitude,distance_au,constellation
opposition,2027-02-19T15:51:00.000Z,mars,,ecliptic,,175.5,-1.3,0.68,Leo
solar_conjunction,2027-01-01T17:07:31.092Z,mercury,superior,ecliptic,,1.8,-1.3,1.44,Sgr
quadrature,2027-02-20T15:11:00.000Z,uranus,east,ecliptic,,90.0,5.7,19.39,Tau
greatest_elongation,2027-01-03T17:58:00.601Z,venus,west,,,46.95,-4.5,0.674,Lib
perigee,2027-01-03T02:32:43.283Z,sun,,,,,-26.8,0.98333,Sgr
apogee,2027-01-07T08:08:00.000Z,moon,,,,6.4,,0.0027179,Sgr
perihelion,2027-02-06T07:44:00.000Z,mercury,,,,17.7,-0.1,0.872,Aqr
aphelion,2027-03-04T23:06:00.000Z,mars,,,,161.1,-1.0,0.697,Leo
greatest_brilliancy,2028-04-30T01:32:00.000Z,venus,,,,37.5,-4.76,0.42,Tau
gathering,2027-08-19T23:06:00.000Z,mercury,mercury+venus+jupiter,,6.3,28.0,-1.1,1.35,Leo
constellation_entry,2027-01-02T05:30:00.000Z,moon,Vir,,,61.7,-8.8,0.00265,Lib
node,2027-01-10T15:57:00.000Z,moon,ascending,ecliptic,,30.5,-6.8,0.0027,Cap
season_point,2027-03-20T20:25:00.000Z,sun,equinox_march,ecliptic,,,-26.7,0.996,Psc
ring_plane_crossing,2038-10-15T12:00:00.000Z,saturn,earth,,,40.0,1.1,10.2,Vir
moon_phase,2027-01-07T20:24:00.000Z,moon,new,ecliptic,,2.9,,0.00272,Sgr
"""


def _others() -> list[dict[str, Any]]:
    rows = csv.DictReader(THE_OTHER_KINDS.strip().splitlines())
    numbers = {name for name, kind in schema.EVENT_COLUMNS.items() if kind == pl.Float64}
    return [
        event(**{name: float(cell) if name in numbers else cell for name, cell in row.items() if cell})
        for row in rows
    ]


ONE_OF_EVERY_KIND = table(STATION, CONJUNCTION, NEAR_SUN, TRANSIT, STAR, *_others())


def nearest_minute(utc: str) -> datetime:
    """Return an instant rounded to the minute, but within its day; reckoned apart from the program."""
    instant = datetime.fromisoformat(utc.replace("Z", "+00:00"))
    rounded = (instant + timedelta(seconds=30)).replace(second=0, microsecond=0)
    same_day = rounded.date() == instant.date()
    return (rounded if same_day else instant.replace(second=0, microsecond=0)).astimezone(UTC)
