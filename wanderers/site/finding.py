"""From what was typed to a site: the user's own sites, a city, or bare coordinates."""

from __future__ import annotations

import difflib
from collections.abc import Sequence
from dataclasses import dataclass, replace
from pathlib import Path
from typing import Final

from wanderers.site import gazetteer, site_files
from wanderers.site.places import Site, SiteError, looks_like_coordinates, parse_coordinates
from wanderers.site.zones import nautical_zone_name, zone_named

NEIGHBOURHOOD_DEG: Final = 1.0
"""How far a town may lie whose clock stands for a place given without one: 111 km."""
KM_PER_DEG: Final = 111.2


@dataclass(frozen=True, slots=True)
class Finding:
    """A site, and what had to be assumed about it.

    Attributes:
        site: the site.
        notice: one line for the user, or the empty text.
    """

    site: Site
    notice: str = ""


def find_site(text: str, zone: str | None, paths: Sequence[Path]) -> Finding:
    """Return the site that a text means.

    Args:
        text: a name in the user's files, a city, or LATITUDE,LONGITUDE[,ELEVATION_M].
        zone: IANA name; None to take the site's own.
        paths: the user's files, first the one that counts more.

    Raises:
        SiteError: there is none, or several; lists the candidates.
        UnknownNameError: there is no such zone.
        SiteFileError: a file exists but is no TOML.
    """
    given = None if zone is None else zone_named(zone).name
    if looks_like_coordinates(text):
        return _bare_place(text, given)
    own = site_files.site_in_files(text, paths)
    found = Finding(own) if own is not None else _city(text, paths)
    return found if given is None else replace(found, site=replace(found.site, zone=given))


def _bare_place(text: str, zone: str | None) -> Finding:
    latitude, longitude, elevation = parse_coordinates(text)
    site = Site(text.strip(), latitude, longitude, elevation)
    if zone is not None:
        return Finding(replace(site, zone=zone))
    town, apart_deg = gazetteer.nearest_city(latitude, site.longitude_deg)
    if apart_deg <= NEIGHBOURHOOD_DEG:
        away = f"{town.full_name}, {apart_deg * KM_PER_DEG:.0f} km away"
        notice = f"zone {town.zone} taken from {away}; --zone sets another"
        return Finding(replace(site, zone=zone_named(town.zone).name), notice)
    name = nautical_zone_name(site.longitude_deg)
    return Finding(
        replace(site, zone=name), f"no town near: zone {name} taken from the longitude; --zone sets another"
    )


def _city(text: str, paths: Sequence[Path]) -> Finding:
    try:
        city = gazetteer.city_named(text)
    except SiteError as error:
        own = {entry.name.casefold(): entry.name for entry in site_files.read_entries(paths)}
        near = difflib.get_close_matches(text.strip().casefold(), own, n=3, cutoff=0.6)
        if not near:
            raise
        names = " or ".join(own[hit] for hit in near)
        raise SiteError(f"{error}; of your own sites: {names}") from None
    site = Site(city.name, city.latitude_deg, city.longitude_deg, 0.0, zone_named(city.zone).name)
    return Finding(
        site, f"{city.full_name}: {city.latitude_deg:.2f},{city.longitude_deg:.2f}, sea level assumed"
    )
