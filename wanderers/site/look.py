"""One look at a body from a site: where it stands, what lights the sky there, how well it shows."""

from __future__ import annotations

from dataclasses import dataclass
from typing import Final, TypeVar

import numpy as np

from wanderers.arrays import Bools, Floats, Ints
from wanderers.ephemeris.appearance import Triangle
from wanderers.ephemeris.bodies import Body
from wanderers.ephemeris.sky import SUN, Sky
from wanderers.ephemeris.vectors import separation_deg
from wanderers.site.earth import Vantage, vantage
from wanderers.site.places import Site
from wanderers.site.refraction import refracted_deg
from wanderers.site.skylight import Lights
from wanderers.site.topocentric import Horizontal, Sight, horizontal, see_body
from wanderers.site.visibility import Criteria, Looks, Margins, margins

MOON: Final = Body.MOON.order


@dataclass(frozen=True, slots=True)
class Heaven:
    """Sun and Moon over a site at n instants: what is the same for everything else that is looked at.

    Attributes:
        at: the site.
        sun: the Sun.
        moon: the Moon; None where the kernel has none.
        sun_altitude_deg: without refraction, shape (n,).
        moon_altitude_deg: as seen, shape (n,); NaN without a Moon.
        moon_phase_angle_deg: as seen from the site, shape (n,); NaN without a Moon.
    """

    at: Vantage
    sun: Sight
    moon: Sight | None
    sun_altitude_deg: Floats
    moon_altitude_deg: Floats
    moon_phase_angle_deg: Floats

    def chosen(self, keep: Bools | Ints) -> Heaven:
        """Return some of the instants."""
        moon = None if self.moon is None else self.moon.chosen(keep)
        angles = (self.sun_altitude_deg, self.moon_altitude_deg, self.moon_phase_angle_deg)
        return Heaven(self.at.chosen(keep), self.sun.chosen(keep), moon, *(angle[keep] for angle in angles))


@dataclass(frozen=True, slots=True)
class View:
    """A body at n instants, arrays of shape (n,).

    Attributes:
        place: altitude without air, azimuth, hour angle, declination.
        altitude_deg: as seen.
        lights: what lights the sky there.
        distance_au: from the site.
    """

    place: Horizontal
    altitude_deg: Floats
    lights: Lights
    distance_au: Floats

    def chosen(self, keep: Bools | Ints) -> View:
        """Return some of the instants."""
        place, lights = _chosen(self.place, keep), _chosen(self.lights, keep)
        return View(place, self.altitude_deg[keep], lights, self.distance_au[keep])


Part = TypeVar("Part", Horizontal, Lights)


def _chosen(part: Part, keep: Bools | Ints) -> Part:
    return type(part)(*(getattr(part, name)[keep] for name in part.__slots__))


def heaven(sky: Sky, site: Site, jd: Floats) -> Heaven:
    """Return Sun and Moon over a site at instants, shape (n,)."""
    at = vantage(sky, site, jd)
    sun = see_body(sky, at, SUN)
    sun_altitude = horizontal(at, sun.direction[0]).airless_altitude_deg
    if sky.tracks.moon is None:
        unknown = np.full(jd.size, np.nan)
        return Heaven(at, sun, None, sun_altitude, unknown, unknown)
    moon = see_body(sky, at, MOON)
    moon_altitude = refracted_deg(horizontal(at, moon.direction[0]).airless_altitude_deg, site.elevation_m)
    to_moon, to_sun = (sight.direction[0] * sight.distance_au for sight in (moon, sun))
    return Heaven(
        at, sun, moon, sun_altitude, moon_altitude, Triangle(to_moon, to_moon - to_sun).phase_angle_deg
    )


def sun_altitude_deg(sky: Sky, at: Vantage) -> Floats:
    """Return the altitude of the Sun's centre without refraction, shape (n,)."""
    return horizontal(at, see_body(sky, at, SUN).direction[0]).airless_altitude_deg


def view(over: Heaven, sight: Sight, *, is_moon: Bools | bool = False) -> View:
    """Return how things seen from the site, one an instant, stand among the lights of the sky."""
    place = horizontal(over.at, sight.direction[0])
    altitude = refracted_deg(place.airless_altitude_deg, over.at.site.elevation_m)
    from_moon = np.full(altitude.size, np.nan)
    if over.moon is not None:
        apart = separation_deg(sight.direction[0], over.moon.direction[0])
        from_moon = np.where(is_moon, np.nan, apart)
    lights = Lights(
        altitude,
        over.sun_altitude_deg,
        separation_deg(sight.direction[0], over.sun.direction[0]),
        over.moon_altitude_deg,
        from_moon,
        over.moon_phase_angle_deg,
    )
    return View(place, altitude, lights, sight.distance_au)


def view_body(sky: Sky, over: Heaven, body: int) -> View:
    """Return the view of one body, by number."""
    sight = over.sun if body == SUN else see_body(sky, over.at, body)
    return view(over, sight, is_moon=body == MOON)


def margins_of(
    seen: View, magnitude: Floats, criteria: Criteria, site: Site, *, is_moon: Bools | bool = False
) -> Margins:
    """Return by how much something passes each criterion of visibility."""
    looks = Looks(
        magnitude,
        seen.place.airless_altitude_deg,
        seen.lights,
        np.broadcast_to(np.asarray(is_moon), magnitude.shape),
        seen.distance_au,
    )
    return margins(looks, criteria, criteria.extinction_at(site.elevation_m))
