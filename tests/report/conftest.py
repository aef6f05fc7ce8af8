"""A real browser, reports for it to open, and a season for the charts."""

from __future__ import annotations

import shutil
from collections.abc import Callable, Iterator
from dataclasses import replace
from pathlib import Path
from typing import Any

import polars as pl
import pytest
from matplotlib.figure import Figure

from tests.ephemeris.kernel_files import DE421
from tests.report.chart_reading import path_track
from tests.report.report_samples import HALF_A_YEAR
from tests.report.test_charts_model import seasons
from tests.site.places import HILL
from wanderers.ephemeris.bodies import PLANETS, Body
from wanderers.ephemeris.kernels import inspect_kernel
from wanderers.ephemeris.store import TrackStore
from wanderers.report.charts import draw_path
from wanderers.report.contents import gather
from wanderers.report.folder import PAGE, write_report

CHROMIUM, DRIVER = shutil.which("chromium"), shutil.which("chromedriver")
SWITCHES = (
    "headless no-sandbox disable-gpu disable-quic no-first-run disable-background-networking "
    "disable-component-update disable-sync"
).split()

Open = Callable[..., Any]


@pytest.fixture(scope="session")
def chromium(tmp_path_factory: pytest.TempPathFactory) -> Iterator[Any]:
    """Debian's Chromium without a window; tests that want it are skipped where it is missing."""
    webdriver = pytest.importorskip("selenium.webdriver", reason="needs selenium to drive a browser")
    if CHROMIUM is None or DRIVER is None:
        pytest.skip("needs chromium and its driver")
    options = webdriver.ChromeOptions()
    options.binary_location = CHROMIUM
    for switch in (*SWITCHES, f"user-data-dir={tmp_path_factory.mktemp('profile')}"):
        options.add_argument(f"--{switch}")
    options.set_capability("goog:loggingPrefs", {"browser": "ALL", "performance": "ALL"})
    driver = webdriver.Chrome(options=options, service=webdriver.ChromeService(DRIVER))
    yield driver
    driver.quit()


@pytest.fixture
def open_file(chromium: Any) -> Iterator[Open]:
    """A function that opens a page from disk at a size; nothing may have been complained of at the end."""

    def open_page(path: Path, address: str = "", width: int = 1440, height: int = 900) -> Any:
        chromium.get("about:blank")
        size = {"width": width, "height": height, "deviceScaleFactor": 1, "mobile": width < 500}
        chromium.execute_cdp_cmd("Emulation.setDeviceMetricsOverride", size)
        chromium.execute_cdp_cmd("Emulation.setEmulatedMedia", {"media": ""})
        chromium.get(f"{path.as_uri()}{address}")
        return chromium

    yield open_page
    said = [entry for entry in chromium.get_log("browser") if entry["level"] in ("SEVERE", "WARNING")]
    assert said == []


@pytest.fixture(scope="session")
def half_year_report(tmp_path_factory: pytest.TempPathFactory, cache_folder: Path) -> Path:
    """The report folder of the first half of 2027, on JPL's DE421."""
    return written(tmp_path_factory.mktemp("reports") / "half_a_year", cache_folder)


@pytest.fixture
def page(open_file: Open, half_year_report: Path) -> Any:
    """That report's page, opened at its timeline."""
    return open_file(half_year_report / PAGE, "#at=timeline")


@pytest.fixture(scope="session")
def site_report(tmp_path_factory: pytest.TempPathFactory, cache_folder: Path) -> Path:
    """Some planets in the same months, as seen from a site in Central Europe."""
    bodies = (Body.SUN, Body.MERCURY, Body.VENUS, Body.MARS, Body.SATURN)
    return written(tmp_path_factory.mktemp("reports") / "from_a_site", cache_folder, site=HILL, bodies=bodies)


def written(folder: Path, cache_folder: Path, **more: Any) -> Path:
    """Write the report of the first half of 2027, with what else is asked for, and return its folder."""
    store = TrackStore(inspect_kernel(DE421, cache_folder), cache_folder)
    write_report(gather(store, replace(HALF_A_YEAR, **more)), folder)
    return folder


@pytest.fixture(scope="session")
def all_seasons() -> pl.DataFrame:
    """The seasons of every planet of the charts' model."""
    return pl.concat([seasons(body) for body in PLANETS])


@pytest.fixture(scope="session")
def mars_season() -> pl.DataFrame:
    """The first of its seasons of Mars."""
    return seasons(Body.MARS)[:1]


@pytest.fixture(scope="session")
def mars_path(mars_season: pl.DataFrame) -> Figure:
    """Its path among the stars, drawn."""
    return draw_path(path_track(mars_season), mars_season)
