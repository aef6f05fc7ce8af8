"""The field sheet: two pages, black on white, everything on them, nothing on anything else."""

from __future__ import annotations

import re
import shutil
import subprocess
from dataclasses import replace
from pathlib import Path

import numpy as np
import pytest
from PIL import Image

from tests.report.campaign_samples import contents, hopeless, reported
from wanderers.ephemeris.store import TrackStore
from wanderers.report.campaign import words
from wanderers.report.campaign.contents import CameraChoice, CampaignContents, gather_campaign, to_come
from wanderers.report.campaign.leaf import MARGIN, Leaf
from wanderers.report.campaign.sheet import field_sheet, sheet_pages
from wanderers.report.wall.layout import Paper

CASES = [("mars", "hill"), ("saturn", "atoll"), ("jupiter", "ridge"), ("venus", "ridge")]

poppler = pytest.mark.skipif(shutil.which("pdftotext") is None, reason="needs poppler-utils")


def run(*words: str) -> str:
    return subprocess.run(words, capture_output=True, text=True, check=True).stdout


def assert_tidy(leaf: Leaf) -> None:
    """Assert that every line lies within the margins and none on another."""
    for number, (text, box) in enumerate(leaf.printed):
        assert box.left >= MARGIN - 1.0 and box.right <= leaf.width - MARGIN + 1.0, text
        assert box.bottom >= MARGIN - 4.0 and box.top <= leaf.height - MARGIN + 1.0, text
        for other, beside in leaf.printed[:number]:
            wide = min(box.right, beside.right) - max(box.left, beside.left)
            high = min(box.top, beside.top) - max(box.bottom, beside.bottom)
            assert wide <= 0.5 or high <= 0.5, f"{text!r} covers {other!r}"


def printed(some: CampaignContents) -> str:
    return "\n".join(text for leaf in sheet_pages(some, Paper.A4) for text, _ in leaf.printed)


@pytest.mark.parametrize("paper", list(Paper))
@pytest.mark.parametrize(("body", "site"), CASES)
def test_nothing_leaves_the_page_or_covers_anything(
    store: TrackStore, body: str, site: str, paper: Paper
) -> None:
    for leaf in sheet_pages(contents(store, body, site), paper):
        assert_tidy(leaf)


def test_type_is_never_smaller_than_eleven_points(store: TrackStore) -> None:
    # Read in dim red light: common practice, no source.
    for leaf in sheet_pages(contents(store, "saturn", "hill"), Paper.A4):
        for ax in leaf.figure.axes:
            assert all(text.get_fontsize() >= 11.0 for text in ax.texts)


def test_every_night_to_come_is_a_row_with_a_box(store: TrackStore) -> None:
    for body, site in CASES:
        some = contents(store, body, site)
        text = printed(some)
        for night in some.plan.iter_rows(named=True):
            assert words.window(night) in text and words.place(night) in text
            day = words.short_day(night["evening_date"]).replace("\N{NO-BREAK SPACE}", " ")
            assert f"{night['weekday'][:3]} {day}" in text


def test_nights_that_are_over_are_not_listed(store: TrackStore) -> None:
    some = gather_campaign(store, reported(store), CameraChoice())
    leaves = sheet_pages(some, Paper.A4)
    rows = [text for leaf in leaves for text, _ in leaf.printed if re.fullmatch(r"\d\d:\d\d–\d\d:\d\d", text)]
    assert len(rows) == to_come(some.plan).height == some.plan.height - 9
    assert "planned as of 2026-12" in printed(some)


def test_too_many_nights_say_where_the_rest_is(store: TrackStore) -> None:
    some = contents(store, "saturn", "hill")
    plan = some.plan
    for _ in range(2):
        plan = plan.vstack(plan)
    many = replace(some, plan=plan)
    first, second = sheet_pages(many, Paper.LETTER)
    assert_tidy(first)
    assert_tidy(second)
    assert re.search(r"\d+ more from .* on: see the plan", printed(many))


def test_the_sheet_has_go_and_no_go_a_log_and_the_cautions(store: TrackStore) -> None:
    venus, mars = printed(contents(store, "venus", "ridge")), printed(contents(store, "mars", "hill"))
    for text in ("go", "no-go", "Brightness estimates", "Local rules come first.", "Gate opens"):
        assert text in mars.splitlines() or text in mars
    assert "Near the Sun: never sweep" in venus and "Near the Sun" not in mars
    assert "sets 1" in venus and "rises 0" in venus  # the Sun's times stand in the same line
    assert "laser" in mars and "laser" in venus


def test_an_empty_plan_says_why(store: TrackStore) -> None:
    some = gather_campaign(store, hopeless(store), CameraChoice())
    assert "No night can be used" in printed(some)
    for leaf in sheet_pages(some, Paper.LETTER):
        assert_tidy(leaf)


def test_the_same_campaign_gives_the_same_bytes(store: TrackStore) -> None:
    some = contents(store, "mars", "hill")
    assert field_sheet(some, Paper.A4) == field_sheet(some, Paper.A4)


@poppler
def test_two_upright_pages_of_the_paper_with_embedded_fonts(store: TrackStore, tmp_path: Path) -> None:
    path = tmp_path / "sheet.pdf"
    # ISO 216: A4 is 210 x 297 mm; ANSI Y14.1 size A is 8.5 x 11 in; a point is 1/72 in.
    for paper, size in ((Paper.A4, (595.28, 841.89)), (Paper.LETTER, (612.0, 792.0))):
        path.write_bytes(field_sheet(contents(store, "saturn", "atoll"), paper))
        about = run("pdfinfo", str(path))
        assert re.search(r"Pages:\s+2\n", about)
        found = re.search(r"Page size:\s+([\d.]+) x ([\d.]+) pts", about)
        assert found is not None
        assert (float(found[1]), float(found[2])) == pytest.approx(size, abs=0.1)
        fonts = run("pdffonts", str(path)).splitlines()[2:]
        assert fonts and all(re.search(r"\s(yes)\s+(yes)\s+(yes)\s", font) for font in fonts)


@poppler
def test_a_reader_finds_the_words_and_no_colour(store: TrackStore, tmp_path: Path) -> None:
    some = contents(store, "mars", "hill")
    path = tmp_path / "sheet.pdf"
    path.write_bytes(field_sheet(some, Paper.A4))
    text = run("pdftotext", "-layout", str(path), "-")
    for night in some.plan.iter_rows(named=True):
        row = rf"{words.clock(night['recommended_local'])}\+?\s+{words.window(night)}\s+{words.place(night)}"
        assert re.search(row, text), night["evening_date"]
    subprocess.run(["pdftoppm", "-r", "60", "-png", str(path), str(tmp_path / "page")], check=True)
    for page in sorted(tmp_path.glob("page*.png")):
        with Image.open(page) as image:
            rgb = np.asarray(image.convert("RGB")).astype(int)
        assert np.ptp(rgb, axis=2).max() <= 2
        assert np.mean(rgb[..., 0] > 200) > 0.8  # no large dark areas
