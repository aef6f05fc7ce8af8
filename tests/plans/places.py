"""Invented sites north, on and south of the equator, and how skyfield sees the sky from them."""

from __future__ import annotations

import datetime as dt
from typing import Any

from skyfield.api import load, wgs84
from skyfield.units import Angle

from wanderers.site.places import Site

HILL = Site("hill", 52.13, 11.62, 120.0, "Europe/Berlin")
ATOLL = Site("atoll", 0.0, -150.0, 3.0, "Etc/GMT+10")
RIDGE = Site("ridge", -38.0, 145.1, 300.0, "Australia/Melbourne")
CAPE = Site("cape", 69.65, 18.96, 10.0, "Europe/Oslo")
INHABITED = (HILL, ATOLL, RIDGE)

TARGETS = {"mars": "mars barycenter", "jupiter": "jupiter barycenter", "saturn": "saturn barycenter"}


class Watcher:
    """A site in skyfield: altitudes and separations from the same kernel, computed independently."""

    def __init__(self, kernel: Any, site: Site) -> None:
        self.kernel = kernel
        self.time_scale = load.timescale(builtin=True)
        self.place = wgs84.latlon(site.latitude_deg, site.longitude_deg, elevation_m=site.elevation_m)
        self.at = kernel["earth"] + self.place

    def time(self, utc: str) -> Any:
        return self.time_scale.from_datetime(dt.datetime.fromisoformat(utc))

    def see(self, name: str, utc: str) -> Any:
        return self.at.at(self.time(utc)).observe(self.kernel[TARGETS.get(name, name)]).apparent()

    def altitude_deg(self, name: str, utc: str, *, refracted: bool) -> float:
        if not refracted:
            return float(self.see(name, utc).altaz()[0].degrees)
        return float(self.see(name, utc).altaz(temperature_C=10.0, pressure_mbar=1010.0)[0].degrees)

    def separation_deg(self, name: str, other: str, utc: str) -> float:
        apart: Angle = self.see(name, utc).separation_from(self.see(other, utc))
        return float(apart.degrees)

    def moon_lit(self, utc: str) -> float:
        return float(self.see("moon", utc).fraction_illuminated(self.kernel["sun"]))
