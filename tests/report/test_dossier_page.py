"""The dossier's page: self-contained, whole, linked from the report, legible in a real browser."""

from __future__ import annotations

import datetime as dt
import re
from html.parser import HTMLParser
from pathlib import Path
from typing import Any
from zoneinfo import ZoneInfo

import polars as pl
import pytest

from tests.report.conftest import Open
from tests.report.report_samples import MARS_SEASON, made_up
from tests.report.season_samples import two_years
from wanderers.report.contents import Contents
from wanderers.report.dossier.page import dossier_of
from wanderers.report.dossier.pages import dossier_jobs, stems, write_dossiers
from wanderers.report.dossier.sources import address as dossier_address
from wanderers.report.dossier.sources import season_rows
from wanderers.report.pictures import drawn_into, jobs
from wanderers.report.planets import planet_sections
from wanderers.site.zones import zone_named

VOID = {"meta", "link", "img", "input", "br", "hr"}


class Page(HTMLParser):
    """Collects what a page refers to, and checks that its elements are closed in order."""

    def __init__(self) -> None:
        super().__init__(convert_charrefs=True)
        self.open: list[str] = []
        self.ids: list[str] = []
        self.links: list[str] = []
        self.sources: list[str] = []
        self.alternatives: list[str] = []
        self.words: list[str] = []

    def handle_starttag(self, tag: str, attrs: list[tuple[str, str | None]]) -> None:
        held = dict(attrs)
        if tag not in VOID:
            self.open.append(tag)
        if held.get("id"):
            self.ids.append(str(held["id"]))
        if tag == "a":
            self.links.append(str(held["href"]))
        if tag == "img":
            self.sources.append(str(held["src"]))
            self.alternatives.append(str(held["alt"]))

    def handle_endtag(self, tag: str) -> None:
        assert self.open.pop() == tag

    def handle_data(self, data: str) -> None:
        if self.open and self.open[-1] not in {"style", "script"}:
            self.words.append(data)


def parsed(path: Path) -> Page:
    page = Page()
    page.feed(path.read_text(encoding="utf-8"))
    page.close()
    assert page.open == []
    return page


@pytest.fixture(scope="module")
def contents(cache_folder: Path) -> Contents:
    return two_years(cache_folder)


@pytest.fixture(scope="module")
def mars(contents: Contents) -> dict[str, Any]:
    return contents.seasons.filter(pl.col("body") == "mars").row(0, named=True)


@pytest.fixture(scope="module")
def folder(contents: Contents, mars: dict[str, Any], tmp_path_factory: pytest.TempPathFactory) -> Path:
    """A report folder with every dossier, the pictures of Mars alone."""
    made = tmp_path_factory.mktemp("report")
    (made / "pictures").mkdir()
    wanted = {*stems(mars).values()}
    every = [*jobs(contents), *dossier_jobs(contents)]
    pictures = [drawn_into(made / "pictures", job) for job in every if job.picture.stem in wanted]
    assert len(pictures) == len(wanted) == 3
    write_dossiers(contents, pictures, made, zone_named("America/New_York"))
    return made


@pytest.fixture(scope="module")
def page(folder: Path, mars: dict[str, Any]) -> Page:
    return parsed(folder / dossier_address(mars["season_id"]))


def test_every_season_has_a_page_and_every_table_its_file(folder: Path, contents: Contents) -> None:
    pages = {path.stem for path in (folder / "seasons").glob("*.html")}
    assert pages == set(contents.seasons["season_id"])
    tables = {path.stem for path in (folder / "seasons").glob("*.csv")}
    assert tables == {"marks", "stars", "meetings", "standing"}


def test_pages_hold_all_they_need(page: Page, folder: Path, mars: dict[str, Any]) -> None:
    assert len(page.sources) == 3
    assert all(source.startswith("data:image/svg+xml,") for source in page.sources)
    assert all(len(words) > 80 for words in page.alternatives)
    text = (folder / dossier_address(mars["season_id"])).read_text(encoding="utf-8")
    assert not re.search(r"(src|href)=\"(https?:)?//", text)
    assert "default-src 'none'" in text
    assert len(text) < 600_000


def test_every_link_leads_somewhere(page: Page, folder: Path) -> None:
    assert len(page.ids) == len(set(page.ids))
    for link in page.links:
        if link.startswith("#"):
            assert link[1:] in page.ids
        elif not link.startswith("../index.html"):
            assert (folder / "seasons" / link).resolve().exists()
    assert any(link == "../index.html#mars" for link in page.links)


def test_pages_without_pictures_are_whole(folder: Path, contents: Contents) -> None:
    for season_id in contents.seasons["season_id"]:
        assert parsed(folder / dossier_address(season_id)).ids


def test_local_times_are_those_of_the_zone(contents: Contents, mars: dict[str, Any]) -> None:
    rows = season_rows(contents.study, mars)
    page = dossier_of(rows, {}, contents.kernel, zone_named("Asia/Kathmandu"))
    for moment in page.moments:
        utc = dt.datetime.strptime(moment.utc + "+0000", "%Y-%m-%d %H:%M%z")
        # The standard library's own reading of the same database.
        local = utc.astimezone(ZoneInfo("Asia/Kathmandu"))
        assert moment.local == f"{local:%Y-%m-%d %H:%M} +05:45"
    assert all(not moment.local for moment in dossier_of(rows, {}, contents.kernel).moments)


def test_stations_stand_still_and_marks_are_numbered(contents: Contents, mars: dict[str, Any]) -> None:
    moments = dossier_of(season_rows(contents.study, mars), {}, contents.kernel).moments
    assert [moment.number for moment in moments if moment.number] == list("12345")
    assert [moment.speed for moment in moments if moment.name.startswith("Turns")] == ["0°", "0°"]
    assert {moment.name for moment in moments if not moment.number} == {
        "Least distance",
        "Greatest brightness",
    }


def test_inner_planets_carry_the_caution(folder: Path, contents: Contents) -> None:
    for season_id in contents.seasons["season_id"]:
        said = " ".join(parsed(folder / dossier_address(season_id)).words)
        assert ("no optics while any part of the Sun" in said) or not season_id.startswith(
            ("mercury", "venus")
        )


def test_the_report_links_each_dossier_and_none_where_there_is_none(contents: Contents) -> None:
    linked = [season.dossier for section in planet_sections(contents, ()) for season in section.seasons]
    assert set(linked) == {f"seasons/{season_id}.html" for season_id in contents.seasons["season_id"]}
    assert write_dossiers(made_up(seasons=[MARS_SEASON]), (), Path("nowhere")) == ()


@pytest.mark.filterwarnings("ignore::ResourceWarning")  # the driver's own sockets
@pytest.mark.parametrize("width", [1440, 768, 390])
def test_nothing_is_wider_than_the_window(
    open_file: Open, folder: Path, mars: dict[str, Any], width: int
) -> None:
    shown = open_file(folder / dossier_address(mars["season_id"]), "", width)
    assert shown.execute_script("return document.documentElement.scrollWidth") <= width


@pytest.mark.filterwarnings("ignore::ResourceWarning")
def test_the_look_is_kept_in_the_address_and_carried_back(
    open_file: Open, folder: Path, mars: dict[str, Any]
) -> None:
    shown = open_file(folder / dossier_address(mars["season_id"]), "#look=night")
    assert shown.execute_script("return document.documentElement.dataset.look") == "night"
    back = shown.find_element("css selector", "a[data-at]").get_attribute("href")
    assert back.endswith("index.html#at=mars&look=night")
    shown.execute_script("document.querySelector('input[value=\"dark\"]').click()")
    assert shown.current_url.endswith("#look=dark")
    assert shown.execute_script("return document.documentElement.dataset.look") == "dark"
