"""The wanderers and what is known of each: kernel codes, radii, mean motion.

Radii: Archinal et al. 2018, Report of the IAU Working Group on Cartographic Coordinates and Rotational
Elements 2015, Celest. Mech. Dyn. Astr. 130, 22, Tables 4 and 5 (equatorial); the Sun: IAU 2015 Resolution B3.
"""

from __future__ import annotations

from enum import StrEnum
from typing import Final

from wanderers.errors import UnknownNameError


class Body(StrEnum):
    """A body that wanders among the stars, in the order in which pairs are written."""

    SUN = "sun"
    MOON = "moon"
    MERCURY = "mercury"
    VENUS = "venus"
    MARS = "mars"
    JUPITER = "jupiter"
    SATURN = "saturn"
    URANUS = "uranus"
    NEPTUNE = "neptune"
    PLUTO = "pluto"

    @property
    def order(self) -> int:
        """Place in the written order, 0 for the Sun."""
        return _ORDER[self]

    @property
    def label(self) -> str:
        """The name as a heading prints it."""
        return self.value.capitalize()


BODIES: Final = tuple(Body)
_ORDER: Final = {body: index for index, body in enumerate(BODIES)}
PLANETS: Final = BODIES[2:]
"""Mercury to Pluto: the bodies that turn back."""
INNER: Final = (Body.MERCURY, Body.VENUS)
OUTER: Final = BODIES[4:]
NAKED_EYE_PLANETS: Final = BODIES[2:7]

NAIF_CHAINS: Final[dict[Body, tuple[tuple[int, int], ...]]] = {
    Body.SUN: ((0, 10),),
    Body.MOON: ((0, 3), (3, 301)),
    Body.MERCURY: ((0, 1), (1, 199)),
    Body.VENUS: ((0, 2), (2, 299)),
    Body.MARS: ((0, 4),),
    Body.JUPITER: ((0, 5),),
    Body.SATURN: ((0, 6),),
    Body.URANUS: ((0, 7),),
    Body.NEPTUNE: ((0, 8),),
    Body.PLUTO: ((0, 9),),
}
"""Kernel segments (center, target) whose sum is the body seen from the solar-system barycentre.

Mars to Pluto are the barycentres of their systems, as JPL's planetary kernels hold them.
"""
EARTH_CHAIN: Final = ((0, 3), (3, 399))

EQUATORIAL_RADIUS_KM: Final[dict[Body, float]] = {
    Body.SUN: 695_700.0,
    Body.MOON: 1_737.4,
    Body.MERCURY: 2_440.53,
    Body.VENUS: 6_051.8,
    Body.MARS: 3_396.19,
    Body.JUPITER: 71_492.0,
    Body.SATURN: 60_268.0,
    Body.URANUS: 25_559.0,
    Body.NEPTUNE: 24_764.0,
    Body.PLUTO: 1_188.3,
}

SUN_SEMIDIAMETER_AT_1_AU_ARCSEC: Final = 959.63
"""The Sun's limb as almanacs of transits and eclipses take it: Auwers 1891; Explanatory Supplement, 3rd ed.,
section 11.2.2 (from memory). The IAU's nominal radius, 0.4 arcseconds less, is no limb anybody observes."""


def body_named(name: str) -> Body:
    """Return the body of that name, in any case.

    Raises:
        UnknownNameError: with the nearest names.
    """
    try:
        return Body(name.strip().lower())
    except ValueError:
        raise UnknownNameError("body", name, [body.value for body in BODIES]) from None
