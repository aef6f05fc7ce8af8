"""Can it be seen, and with what: three published criteria on one scale of magnitudes.

The *margin* is by how many magnitudes a thing is brighter than the faintest that shows there and then.
Three margins are taken, the smallest counts:

* against the sky: dimmed by the air, on the brightness of night, moonlight, twilight or day;
* arcus visionis, once the Sun is down: how far it stands above the Sun, against what its magnitude needs;
* for the Moon, whether its crescent is wide enough.
"""

from __future__ import annotations

from dataclasses import dataclass
from enum import StrEnum
from typing import Final

import numpy as np

from wanderers import constants
from wanderers.arrays import Bools, Floats, Ints
from wanderers.ephemeris.bodies import EQUATORIAL_RADIUS_KM, Body
from wanderers.site import airmass, skylight
from wanderers.site.skylight import Lights
from wanderers.site.twilight import SUN_RISE_DEG


class Verdict(StrEnum):
    """With what a thing can be seen, from best to worst."""

    NAKED_EYE = "naked_eye"
    BINOCULARS = "binoculars"
    TELESCOPE = "telescope"
    NOT_VISIBLE = "not_visible"


VERDICTS: Final = tuple(Verdict)


@dataclass(frozen=True, slots=True)
class Criteria:
    """What counts as visible; every number may be replaced.

    Attributes:
        extinction_mag: loss per air mass; None for the average clear night at the site's elevation, see
            :func:`wanderers.site.airmass.extinction_mag`.
        dark_zenith_mag: the moonless night sky, magnitudes a square arcsecond. The edge of a town; common
            practice, no source. 21.6 where no lamp shines (Krisciunas and Schaefer 1991).
        allowance_mag: what an eye loses that must first find the thing, against the threshold measured with
            trained observers. Common practice, no source: with it, second-magnitude stars come out at Sun -9
            degrees, Mercury at -6, Venus at sunset, as observers report.
        arcus_base_deg: arcus visionis of magnitude 0.
        arcus_deg_per_mag: how it grows with magnitude. 10.5 + 1.4 m: a rule in use among historians of
            astronomy, secondary source. Schoch's values of the planets lie within 3 degrees of it.
        binoculars_mag: what 50 mm show beyond the bare eye: 5 log10(50 / 7), geometry of the pupil.
        telescope_mag: likewise 200 mm: 5 log10(200 / 7).
        easy_mag: margin from which nobody misses it. Common practice, no source.
        altitude_worth_mag_per_deg: how much margin below ``easy_mag`` one degree of height outweighs in the
            choice of the best moment among those of one verdict. Common practice, no source.
    """

    extinction_mag: float | None = None
    dark_zenith_mag: float = 21.0
    allowance_mag: float = 1.0
    arcus_base_deg: float = 10.5
    arcus_deg_per_mag: float = 1.4
    binoculars_mag: float = 4.27
    telescope_mag: float = 7.28
    easy_mag: float = 2.0
    altitude_worth_mag_per_deg: float = 0.05

    def extinction_at(self, elevation_m: float) -> float:
        """Return the loss per air mass at an elevation."""
        return airmass.extinction_mag(elevation_m) if self.extinction_mag is None else self.extinction_mag


CRESCENT_Q: Final = (-0.293, -0.232, -0.160, -0.014, 0.216)
"""Bounds of the classes F to A of a young crescent. Yallop 1997, NAO Technical Note 69; from memory."""
WIDEST_CRESCENT_DEG: Final = 30.0
"""Elongation beyond which a crescent's width is no question."""
MOON_RADIUS_KM: Final = EQUATORIAL_RADIUS_KM[Body.MOON]
MOON_RADIUS_PER_PARALLAX: Final = 0.2725
"""The Moon's radius in Earth radii: turns its semidiameter into its horizontal parallax. IAU 1982."""
FARTHEST_MAG: Final = 99.0


@dataclass(frozen=True, slots=True)
class Looks:
    """What is looked at, at n instants, arrays of shape (n,).

    Attributes:
        magnitude: outside the air; NaN where unknown.
        airless_altitude_deg: of the thing.
        lights: where it stands and what lights the sky there.
        is_moon: where it is the Moon.
        distance_au: from the site; only the Moon's counts.
    """

    magnitude: Floats
    airless_altitude_deg: Floats
    lights: Lights
    is_moon: Bools
    distance_au: Floats


@dataclass(frozen=True, slots=True)
class Margins:
    """By how many magnitudes each criterion is passed, shape (n,); below zero it fails the bare eye."""

    sky: Floats
    arcus: Floats
    crescent: Floats

    @property
    def least(self) -> Floats:
        """The margin that counts, shape (n,)."""
        return np.minimum(np.minimum(self.sky, self.arcus), self.crescent)


def margins(looks: Looks, criteria: Criteria, extinction_mag: float) -> Margins:
    """Return the margins of all three criteria."""
    brightness = skylight.sky_brightness_nl(looks.lights, extinction_mag, criteria.dark_zenith_mag)
    limit = skylight.faintest_magnitude(brightness) - criteria.allowance_mag
    dimmed = airmass.dimmed_magnitude(looks.magnitude, looks.lights.altitude_deg, extinction_mag)
    arc = looks.airless_altitude_deg - looks.lights.sun_altitude_deg
    needed = arcus_visionis_deg(looks.magnitude, criteria)
    by_arc = np.nan_to_num((arc - needed) / criteria.arcus_deg_per_mag, nan=-FARTHEST_MAG)
    return Margins(
        np.nan_to_num(limit - dimmed, nan=-FARTHEST_MAG),
        np.where(looks.lights.sun_altitude_deg > 0.0, FARTHEST_MAG, by_arc),
        np.where(looks.is_moon, _crescent_margin(looks, criteria), FARTHEST_MAG),
    )


def arcus_visionis_deg(magnitude: Floats, criteria: Criteria) -> Floats:
    """Return how far above the Sun, along the vertical, a magnitude needs to stand to be seen, shape (n,)."""
    return np.asarray(criteria.arcus_base_deg + criteria.arcus_deg_per_mag * magnitude)


def verdicts(margin: Floats, criteria: Criteria, sun_altitude_deg: Floats) -> Ints:
    """Return the verdict of each margin as an index into VERDICTS, shape (n,).

    With any of the Sun up no verdict asks for binoculars or a telescope: what the bare eye misses then is not
    visible.
    """
    reached = (0.0, -criteria.binoculars_mag, -criteria.telescope_mag)
    by_aid = sum((margin < step).astype(np.int64) for step in reached)
    without = np.where(margin < 0.0, len(VERDICTS) - 1, 0)
    return np.asarray(np.where(sun_altitude_deg > SUN_RISE_DEG, without, by_aid), dtype=np.int64)


def merit(margin: Floats, altitude_deg: Floats, verdict: Ints, criteria: Criteria) -> Floats:
    """Return how good a moment is, shape (n,): its verdict, then margin while it is scarce and height.

    The best verdict to be had wins: so none improves when low altitudes are forbidden.
    """
    shown = np.clip(margin, -FARTHEST_MAG / 4.0, criteria.easy_mag)
    return np.asarray(shown + criteria.altitude_worth_mag_per_deg * altitude_deg - FARTHEST_MAG * verdict)


def crescent_q(arc_deg: Floats, elongation_deg: Floats, semidiameter_arcmin: Floats) -> Floats:
    """Return Yallop's measure of how well a young crescent shows, shape (n,).

    Args:
        arc_deg: the Moon's altitude less the Sun's, geocentric.
        elongation_deg: of the Moon from the Sun.
        semidiameter_arcmin: of the Moon.

    Source: Yallop 1997, NAO Technical Note 69; from memory.
    """
    width = semidiameter_arcmin * (1.0 - np.cos(np.radians(elongation_deg)))
    needed = np.polynomial.polynomial.polyval(width, (11.8371, -6.3226, 0.7319, -0.1018))
    return np.asarray((arc_deg - needed) / 10.0)


def _crescent_margin(looks: Looks, criteria: Criteria) -> Floats:
    """Turn classes of a crescent into magnitudes: one for binoculars lies as far below zero as they reach."""
    semidiameter_rad = np.arcsin(MOON_RADIUS_KM / (looks.distance_au * constants.AU_KM))
    parallax_deg = (
        np.degrees(semidiameter_rad)
        / MOON_RADIUS_PER_PARALLAX
        * np.cos(np.radians(looks.airless_altitude_deg))
    )
    arc = looks.airless_altitude_deg + parallax_deg - looks.lights.sun_altitude_deg
    elongation = looks.lights.sun_separation_deg
    q = crescent_q(arc, np.minimum(elongation, WIDEST_CRESCENT_DEG), np.degrees(semidiameter_rad) * 60.0)
    steps = (-FARTHEST_MAG, -criteria.telescope_mag, -criteria.binoculars_mag, 0.0, criteria.easy_mag)
    margin = np.interp(q, CRESCENT_Q, steps)
    return np.where(elongation >= WIDEST_CRESCENT_DEG, FARTHEST_MAG, margin)
