"""Names of bodies and stars as texts print them."""

from __future__ import annotations

import functools
from typing import Final

from wanderers.ephemeris.stars import ecliptic_stars

CATALOGUE_NUMBER: Final = "HIP "


def label(name: str) -> str:
    """Return a body's or star's name as text prints it: a designation rather than a catalogue number."""
    if name.startswith(CATALOGUE_NUMBER):
        return star_labels().get(name, name)
    return name if not name.islower() else name.capitalize()


@functools.cache
def star_labels() -> dict[str, str]:
    """Return what to call the stars that are met and have no proper name: their letter, as ``phi Sgr``."""
    stars = ecliptic_stars()
    pairs = zip(stars.labels, stars.bayer, strict=True)
    return {name: bayer for name, bayer in pairs if name.startswith(CATALOGUE_NUMBER) and bayer}
