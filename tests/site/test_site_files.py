"""The user's sites.toml: read, added to, never damaged."""

from __future__ import annotations

import tomllib
from pathlib import Path

import platformdirs
import pytest
from hypothesis import given
from hypothesis import strategies as st

from tests.site.places import HILL
from wanderers.errors import OutputError
from wanderers.site.places import Site, SiteError, parse_horizon
from wanderers.site.site_files import (
    FILE_NAME,
    SiteFileError,
    add_site,
    as_toml,
    read_entries,
    site_files,
    site_in_files,
)

TERRACE = Site("terrace", -35.3, 149.1, 780.0, "Australia/Sydney", parse_horizon("0:2,90:5.5,270:1"))
TEXT = """\
[terrace]
latitude_deg = -35.3
longitude_deg = 149.1
elevation_m = 780
zone = "Australia/Sydney"
horizon = [[270, 1], [0, 2.0], [90, 5.5]]
"""


@pytest.fixture
def file(tmp_path: Path) -> Path:
    path = tmp_path / FILE_NAME
    path.write_text(TEXT, encoding="utf-8")
    return path


def test_a_site_is_read_with_its_horizon(file: Path) -> None:
    assert site_in_files("Terrace", [file]) == TERRACE


def test_words_without_units_and_a_table_of_sites_are_understood(tmp_path: Path) -> None:
    path = tmp_path / FILE_NAME
    path.write_text(
        '[sites."old mill"]\nlatitude = 52\nlongitude = 11.5\nelevation = 80\nzone = "europe/berlin"\n',
        encoding="utf-8",
    )
    assert site_in_files("old mill", [path]) == Site("old mill", 52.0, 11.5, 80.0, "Europe/Berlin")


def test_the_first_file_hides_sites_of_the_second(file: Path, tmp_path: Path) -> None:
    other = tmp_path / "other.toml"
    other.write_text(as_toml(Site("TERRACE", 1.0, 2.0)) + as_toml(HILL), encoding="utf-8")
    found = {entry.name: entry.path for entry in read_entries([file, other])}
    assert found == {"terrace": file, "hill": other}


def test_files_are_looked_for_in_the_working_then_the_configuration_folder(
    tmp_path: Path, monkeypatch: pytest.MonkeyPatch
) -> None:
    monkeypatch.chdir(tmp_path)
    assert site_files() == (tmp_path / FILE_NAME, platformdirs.user_config_path("wanderers") / FILE_NAME)


def test_missing_files_hold_no_sites(tmp_path: Path) -> None:
    assert read_entries([tmp_path / FILE_NAME]) == []
    assert site_in_files("terrace", [tmp_path / FILE_NAME]) is None


@pytest.mark.parametrize(
    ("line", "problem"),
    [
        ("latitude_deg = 95", "beyond 90 degrees"),
        ('zone = "Europe/Berlinn"', "Europe/Berlin"),
        ('latitude_deg = "52 N"', "latitude_deg must be a number"),
        ("latitude_deg = true", "latitude_deg must be a number"),
        ("colour = 3", "'colour' is not known"),
        ("horizon = 5", "horizon must be a list"),
        ("horizon = [[1, 2, 3]]", "horizon must be a list"),
        ("horizon = [[400, 2]]", "azimuths from 0"),
    ],
)
def test_a_wrong_site_is_said_to_be_wrong_and_the_others_still_count(
    tmp_path: Path, line: str, problem: str
) -> None:
    path = tmp_path / FILE_NAME
    kept = {"latitude_deg": "52.0", "longitude_deg": "11.0", "zone": '"Europe/Berlin"'}
    key, value = (part.strip() for part in line.split("=", 1))
    body = "\n".join(f"{name} = {text}" for name, text in (kept | {key: value}).items())
    path.write_text(f"[wrong]\n{body}\n\n{TEXT}", encoding="utf-8")
    with pytest.raises(SiteError, match=problem):
        site_in_files("wrong", [path])
    assert site_in_files("terrace", [path]) == TERRACE


@pytest.mark.parametrize("missing", ["latitude_deg", "longitude_deg", "zone"])
def test_what_is_missing_is_named(tmp_path: Path, missing: str) -> None:
    path = tmp_path / FILE_NAME
    path.write_text("\n".join(line for line in TEXT.splitlines() if missing not in line), encoding="utf-8")
    with pytest.raises(SiteError, match=f"{missing} is missing"):
        site_in_files("terrace", [path])


def test_a_number_in_the_place_of_a_site_is_refused(tmp_path: Path) -> None:
    path = tmp_path / FILE_NAME
    path.write_text("terrace = 3\n", encoding="utf-8")
    (entry,) = read_entries([path])
    assert entry.site is None and "it is no table" in entry.problem


@pytest.mark.parametrize("content", [b"[terrace\n", b"\xff\xfe"])
def test_a_file_that_is_no_toml_is_named(tmp_path: Path, content: bytes) -> None:
    path = tmp_path / FILE_NAME
    path.write_bytes(content)
    with pytest.raises(SiteFileError, match="no TOML file"):
        read_entries([path])


def test_adding_keeps_what_the_user_wrote(file: Path) -> None:
    before = TEXT.rstrip("\n") + "  # my terrace"
    file.write_text(before, encoding="utf-8")
    add_site(file, HILL)
    assert file.read_text(encoding="utf-8").startswith(before + "\n\n[hill]\n")
    assert site_in_files("hill", [file]) == HILL
    assert site_in_files("terrace", [file]) == TERRACE


def test_adding_makes_folders_and_refuses_a_name_twice(tmp_path: Path) -> None:
    path = tmp_path / "made" / FILE_NAME
    add_site(path, HILL)
    content = path.read_bytes()
    with pytest.raises(SiteError, match="already"):
        add_site(path, Site("HILL", 1.0, 2.0))
    assert path.read_bytes() == content


def test_a_place_that_cannot_be_written_is_reported(tmp_path: Path) -> None:
    (tmp_path / "file").write_text("", encoding="utf-8")
    with pytest.raises((OutputError, SiteFileError)):
        add_site(tmp_path / "file" / FILE_NAME, HILL)


@given(
    name=st.text(min_size=1).filter(lambda text: text.strip() and text.isprintable()),
    latitude=st.floats(-90.0, 90.0),
    longitude=st.floats(-180.0, 360.0),
    elevation=st.floats(-500.0, 9_000.0),
    heights=st.dictionaries(st.floats(0.0, 359.9), st.floats(-10.0, 89.9), max_size=5),
)
def test_what_is_written_is_read_again(
    name: str, latitude: float, longitude: float, elevation: float, heights: dict[float, float]
) -> None:
    horizon = parse_horizon(",".join(f"{azimuth!r}:{height!r}" for azimuth, height in heights.items()))
    site = Site(name, latitude, longitude, elevation, "UTC", horizon)
    (key, table), *others = tomllib.loads(as_toml(site)).items()
    assert not others
    assert (key, table["latitude_deg"], table["longitude_deg"]) == (
        name,
        site.latitude_deg,
        site.longitude_deg,
    )
    assert table["elevation_m"] == elevation
    assert tuple(map(tuple, table.get("horizon", []))) == horizon.points
