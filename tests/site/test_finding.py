"""From a text to a site: own sites first, then cities, then numbers."""

from __future__ import annotations

from pathlib import Path

import pytest

from tests.site.places import HILL
from wanderers.errors import UnknownNameError
from wanderers.site.finding import find_site
from wanderers.site.places import Site, SiteError
from wanderers.site.site_files import FILE_NAME, as_toml


@pytest.fixture
def paths(tmp_path: Path) -> list[Path]:
    (tmp_path / FILE_NAME).write_text(as_toml(HILL) + as_toml(Site("Berlin", 1.0, 2.0)), encoding="utf-8")
    return [tmp_path / FILE_NAME]


def test_own_sites_come_before_cities(paths: list[Path]) -> None:
    assert find_site("HILL", None, paths).site == HILL
    assert find_site("berlin", None, paths).site.latitude_deg == 1.0


def test_a_zone_given_replaces_the_sites_own(paths: list[Path]) -> None:
    assert find_site("hill", "utc", paths).site.zone == "UTC"
    assert find_site("Hamburg", "america/new_york", paths).site.zone == "America/New_York"


def test_a_city_brings_its_zone_and_says_what_is_assumed(paths: list[Path]) -> None:
    found = find_site("Hamburg", None, paths)
    assert (found.site.name, found.site.zone, found.site.elevation_m) == ("Hamburg", "Europe/Berlin", 0.0)
    assert "Hamburg, DE" in found.notice and "sea level" in found.notice


def test_coordinates_with_a_zone_need_no_notice() -> None:
    found = find_site("-35.3,149.1,780", "Australia/Sydney", [])
    assert found.site == Site("-35.3,149.1,780", -35.3, 149.1, 780.0, "Australia/Sydney")
    assert found.notice == ""


def test_coordinates_without_a_zone_take_that_of_the_nearest_town_and_say_so() -> None:
    found = find_site("-35.3,149.1", None, [])
    assert found.site.zone == "Australia/Sydney" and "Canberra" in found.notice


def test_coordinates_far_from_any_town_take_the_ships_clock_and_say_so() -> None:
    found = find_site("-50,-120", None, [])
    assert found.site.zone == "Etc/GMT+8" and "longitude" in found.notice


@pytest.mark.parametrize("text", ["95,10", "10,400", "10,20,99999", "10"])
def test_impossible_coordinates_are_refused(text: str) -> None:
    with pytest.raises(SiteError, match="write LATITUDE,LONGITUDE"):
        find_site(text, "UTC", [])


def test_a_misspelt_own_site_is_offered(paths: list[Path]) -> None:
    with pytest.raises(SiteError, match="of your own sites: hill"):
        find_site("hilll", None, paths)


def test_a_wrong_zone_is_refused_before_anything_is_looked_up(paths: list[Path]) -> None:
    with pytest.raises(UnknownNameError, match="unknown zone"):
        find_site("nowhere at all", "Europe/Nowhere", paths)
