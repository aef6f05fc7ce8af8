"""A site: where it lies, which clock it keeps, what its horizon hides."""

from __future__ import annotations

import re
from collections.abc import Sequence
from dataclasses import dataclass, field
from typing import Final

import numpy as np

from wanderers.arrays import Floats
from wanderers.errors import UsageProblem

LOWEST_M: Final = -500.0
HIGHEST_M: Final = 9_000.0
"""Elevations accepted: from below the shore of the Dead Sea to above the highest summit."""
ACCEPTED_PLACE: Final = (
    "write LATITUDE,LONGITUDE[,ELEVATION_M] in decimal degrees, north and east positive, as 52.13,11.62,80"
)
_NUMBER: Final = r"[+-]?(?:\d+(?:\.\d*)?|\.\d+)"
_PLACE: Final = re.compile(rf"\s*({_NUMBER})\s*,\s*({_NUMBER})\s*(?:,\s*({_NUMBER})\s*m?\s*)?")


class SiteError(UsageProblem, LookupError):
    """A site that does not exist, is ambiguous or is no place on the Earth."""


@dataclass(frozen=True, slots=True)
class HorizonProfile:
    """How high the horizon stands, by azimuth.

    Attributes:
        points: azimuth (from north through east) and altitude in degrees, in order of azimuth; straight
            lines between them, all round. Empty for a level horizon.
    """

    points: tuple[tuple[float, float], ...] = ()

    def __post_init__(self) -> None:
        """Refuse points that lie nowhere.

        Raises:
            SiteError: an azimuth outside 0 to 360, twice the same, or an altitude outside -10 to 90.
        """
        azimuths = [azimuth for azimuth, _ in self.points]
        if any(not 0.0 <= azimuth < 360.0 for azimuth in azimuths):
            raise SiteError("a horizon needs azimuths from 0 up to 360 degrees")
        if sorted(set(azimuths)) != azimuths:
            raise SiteError("a horizon needs each azimuth once, in rising order")
        if any(not -10.0 <= altitude < 90.0 for _, altitude in self.points):
            raise SiteError("a horizon needs altitudes from -10 up to 90 degrees")

    @property
    def is_level(self) -> bool:
        """Whether the horizon hides nothing."""
        return not self.points

    def altitude_deg(self, azimuth_deg: Floats) -> Floats:
        """Return the altitude of the horizon at azimuths, shape (n,); -90 all round if nothing is known."""
        if self.is_level:
            return np.full_like(azimuth_deg, -90.0)
        azimuths, altitudes = zip(*self.points, strict=True)
        return np.asarray(np.interp(azimuth_deg, azimuths, altitudes, period=360.0))


@dataclass(frozen=True, slots=True)
class Site:
    """A place from which the sky is watched.

    Attributes:
        name: what it is called.
        latitude_deg: geodetic (WGS 84), north positive.
        longitude_deg: east positive, (-180, 180].
        elevation_m: above the ellipsoid; sea level is good enough.
        zone: name of its time zone in the IANA database.
        horizon: what hides the sky, by azimuth.
    """

    name: str
    latitude_deg: float
    longitude_deg: float
    elevation_m: float = 0.0
    zone: str = "UTC"
    horizon: HorizonProfile = field(default_factory=HorizonProfile)

    def __post_init__(self) -> None:
        """Refuse what is no place on the Earth.

        Raises:
            SiteError: a latitude beyond 90, a longitude beyond 360 or an elevation out of reach.
        """
        if not abs(self.latitude_deg) <= 90.0:
            raise SiteError(f"latitude {self.latitude_deg:g} is beyond 90 degrees: {ACCEPTED_PLACE}")
        if not -180.0 <= self.longitude_deg <= 360.0:
            raise SiteError(f"longitude {self.longitude_deg:g} is not within -180 to 360: {ACCEPTED_PLACE}")
        if not LOWEST_M <= self.elevation_m <= HIGHEST_M:
            raise SiteError(
                f"elevation {self.elevation_m:g} m is not within {LOWEST_M:.0f} to {HIGHEST_M:.0f}: "
                + ACCEPTED_PLACE
            )
        if self.longitude_deg > 180.0:
            object.__setattr__(self, "longitude_deg", self.longitude_deg - 360.0)
        elif self.longitude_deg == -180.0:
            object.__setattr__(self, "longitude_deg", 180.0)


def looks_like_coordinates(text: str) -> bool:
    """Return whether a text is meant as numbers, right or wrong, rather than as a name."""
    return re.fullmatch(r"[\s\d.,;+\-°m]+", text) is not None


def parse_coordinates(text: str) -> tuple[float, float, float]:
    """Return latitude, longitude (degrees) and elevation (metres, 0 where not given) of a text.

    Raises:
        SiteError: it is not of the form LATITUDE,LONGITUDE[,ELEVATION_M].
    """
    match = _PLACE.fullmatch(text)
    if match is None:
        raise SiteError(f"'{text}' is no place: {ACCEPTED_PLACE}")
    latitude, longitude, elevation = match.groups()
    return float(latitude), float(longitude), float(elevation or 0.0)


def parse_horizon(text: str) -> HorizonProfile:
    """Read a horizon written as AZIMUTH:ALTITUDE pairs, as ``0:2,90:5.5,270:1``.

    Raises:
        SiteError: it is not of that form.
    """
    if not text.strip():
        return HorizonProfile()
    pairs = [part.split(":") for part in text.split(",")]
    try:
        points = [(float(azimuth), float(altitude)) for azimuth, altitude in pairs]
    except ValueError:
        raise SiteError(
            f"'{text}' is no horizon: write AZIMUTH:ALTITUDE pairs, as 0:2,90:5.5,270:1"
        ) from None
    return horizon_of(points)


def horizon_of(points: Sequence[Sequence[float]]) -> HorizonProfile:
    """Return the profile through points in any order."""
    return HorizonProfile(tuple(sorted((float(azimuth), float(altitude)) for azimuth, altitude in points)))
