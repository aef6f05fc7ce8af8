"""Names of bodies and stars as texts print them."""

from __future__ import annotations

from typing import Final

from wanderers.ephemeris.stars import star_letters

CATALOGUE_NUMBER: Final = "HIP "


def label(name: str) -> str:
    """Return a body's or star's name as text prints it: its letter rather than a catalogue number."""
    if name.startswith(CATALOGUE_NUMBER):
        return star_letters().get(name, name)
    return name if not name.islower() else name.capitalize()
