"""Figures as a sentence can bear them: separations to a tenth of a degree, below one to an arcminute."""

from __future__ import annotations

from typing import Final

from wanderers.constants import AU_KM
from wanderers.report.phrases.language import Language

LEAST_DEGREES_ARCMIN: Final = 59.5
"""From here on an angle rounds to 60 arcminutes and is printed in degrees."""
LEAST_ARCMIN: Final = 0.5


def angle(degrees: float, words: Language, manner: str) -> str:
    """Return an angle.

    Args:
        degrees: the angle.
        words: the language.
        manner: table of the language's file: ``signs`` or ``units``.
    """
    arcmin = degrees * 60.0
    if arcmin >= LEAST_DEGREES_ARCMIN:
        return _counted(words, manner, "degree", words.number(degrees, 1))
    if arcmin >= LEAST_ARCMIN:
        return _counted(words, manner, "arcminute", words.number(arcmin, 0))
    return words.phrase("numbers", "under").format(angle=_counted(words, manner, "arcminute", "1"))


def whole_degrees(degrees: float, words: Language) -> str:
    """Return an angle to the degree; below one, that it is below."""
    text = words.phrase("signs", "degree").format(n=words.number(max(degrees, 1.0), 0))
    return text if degrees >= 0.5 else words.phrase("numbers", "under").format(angle=text)


def fine_degrees(degrees: float, words: Language) -> str:
    """Return an angle to a tenth of a degree."""
    return words.phrase("signs", "degree").format(n=words.number(degrees, 1))


def kilometres(au: float, words: Language) -> str:
    """Return a distance to 100 km."""
    return words.phrase("units", "km").format(n=words.number(round(au * AU_KM, -2), 0))


def million_kilometres(au: float, words: Language) -> str:
    """Return a distance in millions of kilometres, to three or four digits."""
    millions = au * AU_KM / 1e6
    return words.phrase("units", "million_km").format(n=words.number(millions, 1 if millions < 1000.0 else 0))


def astronomical_units(au: float, words: Language) -> str:
    """Return a distance to a thousandth of an astronomical unit."""
    return words.phrase("units", "au").format(n=words.number(au, 3))


def _counted(words: Language, manner: str, unit: str, number: str) -> str:
    if manner == "units":
        return words.counted(unit, number)
    return words.phrase(manner, unit).format(n=number)
