"""Invented sites all over the Earth, and how to make them in general-purpose libraries."""

from __future__ import annotations

from typing import Any

from skyfield.api import wgs84

from wanderers.site.places import Site

HILL = Site("hill", 52.13, 11.62, 120.0, "Europe/Berlin")
RIDGE = Site("ridge", -35.3, 149.1, 780.0, "Australia/Sydney")
SUMMIT = Site("summit", 28.3, -16.5, 2_390.0, "Atlantic/Canary")
ATOLL = Site("atoll", 0.0, 180.0, 3.0, "Pacific/Tarawa")
CAPE = Site("cape", 69.65, 18.96, 10.0, "Europe/Oslo")
PLATEAU = Site("plateau", -89.9, 10.0, 2_800.0, "Antarctica/McMurdo")
POLE = Site("pole", 90.0, 0.0, 0.0, "UTC")
EVERYWHERE = (HILL, RIDGE, SUMMIT, ATOLL, CAPE, PLATEAU, POLE)
INHABITED = (HILL, RIDGE, SUMMIT, ATOLL, CAPE)


def skyfield_place(site: Site) -> Any:
    """Return a site as skyfield knows it."""
    return wgs84.latlon(site.latitude_deg, site.longitude_deg, elevation_m=site.elevation_m)
