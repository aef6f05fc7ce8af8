"""The folder of a campaign: complete, put in place at once, and never at the cost of what was handwritten."""

from __future__ import annotations

import csv
import io
import json
import re
import time
from html.parser import HTMLParser
from pathlib import Path
from typing import Any

import numpy as np
import polars as pl
import pytest

from tests.report.campaign_samples import campaign, contents, hopeless, reported
from wanderers.ephemeris.store import TrackStore
from wanderers.errors import OutputError, UsageProblem
from wanderers.plans.columns import PLAN_COLUMNS
from wanderers.plans.field_stars import stars_in
from wanderers.plans.replan import Status, read_log
from wanderers.report.campaign import folder as folders
from wanderers.report.campaign import log
from wanderers.report.campaign.contents import PX_COLUMNS, CameraChoice
from wanderers.report.campaign.folder import CAMPAIGN, PAGE, write_campaign

CHARTS = {
    f"charts/{stem}{look}.{ending}"
    for stem in ("field", "clock", "light")
    for look in ("", "_red")
    for ending in ("png", "svg", "pdf")
}
FILES = CHARTS | {
    PAGE,
    CAMPAIGN.manifest,
    "plan.csv",
    "plan.parquet",
    "plan.ics",
    "spares.csv",
    "stars.csv",
    "comparison_stars.csv",
    "brightness_log.csv",
    "field_sheet_a4.pdf",
    "field_sheet_letter.pdf",
}
SLOWEST_S = 60.0
"""Guards against a slip of an order of magnitude on a busy machine; alone it takes a tenth of this."""


class Reader(HTMLParser):
    """Gathers addresses, text and alternative texts of a page."""

    def __init__(self) -> None:
        super().__init__()
        self.links: list[str] = []
        self.sources: list[str] = []
        self.alts: list[str] = []
        self.text: list[str] = []

    def handle_starttag(self, tag: str, attrs: list[tuple[str, str | None]]) -> None:
        found = dict(attrs)
        self.links += [found["href"]] if found.get("href") else []  # type: ignore[list-item]
        self.sources += [found["src"]] if found.get("src") else []  # type: ignore[list-item]
        self.alts += [str(found.get("alt"))] if tag == "img" else []

    def handle_data(self, data: str) -> None:
        self.text.append(data)


def read(path: Path) -> Reader:
    reader = Reader()
    reader.feed(path.read_text(encoding="utf-8"))
    return reader


def inside(place: Path) -> set[str]:
    return {path.relative_to(place).as_posix() for path in place.rglob("*") if path.is_file()}


@pytest.fixture(scope="module")
def mars(store: TrackStore, tmp_path_factory: pytest.TempPathFactory) -> Path:
    place = tmp_path_factory.mktemp("campaign") / "mars"
    started = time.process_time()
    assert write_campaign(store, campaign(store, "mars", "hill"), place) == place / PAGE
    assert time.process_time() - started < SLOWEST_S
    return place


def test_the_folder_holds_what_was_promised_and_nothing_else(mars: Path) -> None:
    assert inside(mars) == FILES
    assert [path.name for path in mars.parent.iterdir()] == ["mars"]
    manifest = json.loads((mars / CAMPAIGN.manifest).read_text(encoding="utf-8"))
    assert set(manifest["files"]) == FILES - {CAMPAIGN.manifest}


def test_the_page_needs_nothing_from_outside(mars: Path) -> None:
    text = (mars / PAGE).read_text(encoding="utf-8")
    page = read(mars / PAGE)
    assert not re.search(r"(src|href)=\"(https?:)?//", text) and "@import" not in text
    assert all(source.startswith("data:image/svg+xml,") for source in page.sources) and len(page.sources) == 3
    assert "default-src 'none'" in text
    for link in page.links:
        assert link.startswith("data:") or (
            link[1:] in text if link[0] == "#" else (mars / link).is_file()
        ), link
    assert all(len(alt) > 60 for alt in page.alts)


def test_the_page_tells_the_next_night_first(mars: Path, store: TrackStore) -> None:
    words = " ".join(" ".join(read(mars / PAGE).text).split())
    night = campaign(store, "mars", "hill").plan.row(0, named=True)
    head = words.split("The next night", 1)[1][:700]
    assert head.startswith(f" Night 1, the night of {night['weekday']} 30 to 31 October 2026.")
    assert f"Be ready at {log.words.clock(night['recommended_local'])}: Mars then stands" in head
    assert "Lens 50 mm" in head and "If it is cloudy, " in head
    assert "the chance of getting both turns is" in words and "50 % of nights lost" in words


def test_the_page_names_kernel_checksum_and_zone_data(mars: Path, store: TrackStore) -> None:
    words = " ".join(read(mars / PAGE).text)
    assert store.kernel.sha256 in words and "DE440" in words and re.search(r"IANA 20\d\d[a-z]", words)


def test_tables_read_back_are_the_plan(mars: Path, store: TrackStore) -> None:
    plan = campaign(store, "mars", "hill").plan
    table = pl.read_parquet(mars / "plan.parquet")
    assert table.columns == [*PLAN_COLUMNS, *PX_COLUMNS]
    assert table.select(PLAN_COLUMNS.keys()).equals(plan)
    text = pl.read_csv(mars / "plan.csv", infer_schema_length=None)
    assert text["evening_date"].to_list() == plan["evening_date"].to_list()
    np.testing.assert_allclose(text["ra_j2000_deg"], plan["ra_j2000_deg"], rtol=1e-12)


def test_moves_in_pixels_follow_from_scale_and_degrees(mars: Path, store: TrackStore) -> None:
    table = pl.read_parquet(mars / "plan.parquet").drop_nulls("move_px")
    scale = contents(store, "mars", "hill").framing.scale_arcsec_per_px
    # True in the middle of the picture; 10 degrees off it the tangent plane stretches by 1 / cos^2: 3 %.
    np.testing.assert_allclose(table["move_px"], table["move_deg"] * 3600.0 / scale, rtol=0.06)


def test_a_plan_with_its_status_filled_in_can_be_given_back(mars: Path) -> None:
    rows = list(csv.DictReader(io.StringIO((mars / "plan.csv").read_text(encoding="utf-8"))))
    rows[0]["status"], rows[1]["status"] = "done", "cloudy"
    out = io.StringIO()
    writer = csv.DictWriter(out, fieldnames=list(rows[0]))
    writer.writeheader()
    writer.writerows(rows)
    nights = read_log(out.getvalue())
    assert [night.status for night in nights] == [Status.DONE, Status.LOST]


def test_stars_are_those_of_the_chart_and_lie_in_the_frame(mars: Path, store: TrackStore) -> None:
    table = pl.read_csv(mars / "stars.csv")
    some = contents(store, "mars", "hill")
    assert table["letter"].to_list() == list("ABCDEFGHIJKLMNO"[: table.height]) and 8 <= table.height <= 15
    stars, _ = stars_in(some.frame, float(some.path_jd[0]), 6000, 4000)
    assert set(table["hip"]) <= set(stars.hip.tolist())
    assert table["x_px"].is_between(0, 6000).all() and table["y_px"].is_between(0, 4000).all()


def test_the_log_has_a_line_a_night_and_room_to_fill_in(mars: Path, store: TrackStore) -> None:
    table = pl.read_csv(mars / "brightness_log.csv", infer_schema_length=None)
    plan = campaign(store, "mars", "hill").plan
    assert table["evening_date"].to_list() == plan["evening_date"].to_list()
    assert set(log.TO_FILL_IN) <= set(table.columns)
    assert all(table[name].is_null().all() for name in log.TO_FILL_IN)
    stars = pl.read_csv(mars / "comparison_stars.csv")
    assert set(stars["evening_date"]) <= set(table["evening_date"])
    named = table.drop_nulls("star_1")
    assert named.height > 5
    assert ((named["v_mag_1"] - named["predicted_mag"]).abs() <= 1.01).all()


def test_what_was_written_by_hand_is_kept(store: TrackStore, tmp_path: Path) -> None:
    place = tmp_path / "mars"
    write_campaign(store, campaign(store, "mars", "hill"), place)
    (place / "brightness_log.csv").write_text("my estimates", encoding="utf-8")
    write_campaign(store, reported(store), place)
    assert (place / "kept" / "brightness_log.csv").read_text(encoding="utf-8") == "my estimates"
    (place / "brightness_log.csv").write_text("more of them", encoding="utf-8")
    write_campaign(store, reported(store), place)
    texts = {path.read_text(encoding="utf-8") for path in (place / "kept").iterdir()}
    assert texts == {"my estimates", "more of them"}
    assert "kept/brightness_log.csv" in read(place / PAGE).links
    assert "changes.csv" in inside(place)


def test_a_foreign_file_is_never_replaced(store: TrackStore, tmp_path: Path) -> None:
    place = tmp_path / "mars"
    place.mkdir()
    (place / "thesis.txt").write_text("years of work", encoding="utf-8")
    with pytest.raises(OutputError, match=r"thesis\.txt"):
        write_campaign(store, campaign(store, "mars", "hill"), place)
    assert inside(tmp_path) == {"mars/thesis.txt"}


def test_a_failure_leaves_the_older_folder_and_no_trace(
    store: TrackStore, tmp_path: Path, monkeypatch: pytest.MonkeyPatch
) -> None:
    place = tmp_path / "mars"
    place.mkdir()
    (place / CAMPAIGN.manifest).write_text(json.dumps({"made_by": CAMPAIGN.made_by, "files": ["a"]}))
    (place / "a").write_text("old")

    def broken(*_: Any) -> bytes:
        raise KeyboardInterrupt

    monkeypatch.setattr(folders, "draw_charts", broken)
    with pytest.raises(KeyboardInterrupt):
        write_campaign(store, campaign(store, "mars", "hill"), place)
    assert inside(tmp_path) == {"mars/a", f"mars/{CAMPAIGN.manifest}"}


def test_a_lens_that_does_not_exist_is_refused_before_anything_is_written(
    store: TrackStore, tmp_path: Path
) -> None:
    with pytest.raises(UsageProblem):
        write_campaign(
            store, campaign(store, "mars", "hill"), tmp_path / "x", camera=CameraChoice(lens_mm=0.1)
        )
    assert not list(tmp_path.iterdir())


def test_a_campaign_without_nights_says_why_and_what_would_help(store: TrackStore, tmp_path: Path) -> None:
    told: list[str] = []
    plan = hopeless(store)
    page = write_campaign(store, plan, tmp_path / "none", progress=told.append)
    words = " ".join(" ".join(read(page).text).split())
    assert plan.is_empty and plan.notes[-1] in words and plan.advice[0] in words
    assert inside(tmp_path / "none") == FILES
    assert pl.read_csv(tmp_path / "none" / "plan.csv").height == 0
    assert told[0] == "framing the path" and told[-1] == "printing the field sheet"


def test_the_southern_evening_planet_has_its_caution_and_its_words(store: TrackStore, tmp_path: Path) -> None:
    page = write_campaign(store, campaign(store, "venus", "ridge"), tmp_path / "venus")
    words = " ".join(" ".join(read(page).text).split())
    assert "Near the Sun: never sweep" in words
    assert "no whole loop can be had" in words
    assert "outshines" in words  # no star matches Venus, and the page says so
