"""Sourced numbers shared by the whole package. Units end the names."""

from __future__ import annotations

from typing import Final

AU_KM: Final = 149_597_870.7
"""Astronomical unit. IAU 2012 Resolution B2."""

SPEED_OF_LIGHT_KM_PER_S: Final = 299_792.458
"""Exact. BIPM, SI brochure."""

SECONDS_PER_DAY: Final = 86_400.0

SPEED_OF_LIGHT_AU_PER_DAY: Final = SPEED_OF_LIGHT_KM_PER_S * SECONDS_PER_DAY / AU_KM

GM_SUN_KM3_PER_S2: Final = 132_712_440_041.279419
"""Park, Folkner, Williams and Boggs 2021, AJ 161, 105 (DE440)."""

J2000_JD: Final = 2_451_545.0
"""2000 January 1.5 TT, the standard epoch."""

DAYS_PER_JULIAN_YEAR: Final = 365.25

DAYS_PER_CENTURY: Final = 36_525.0

J2000_OBLIQUITY_ARCSEC: Final = 84_381.406
"""Mean obliquity of the ecliptic at J2000. IAU 2006 precession: Capitaine et al. 2003, A&A 412, 567."""

ARCSEC_PER_DEG: Final = 3_600.0
