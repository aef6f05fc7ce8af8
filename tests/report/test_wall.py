"""The printable year as a reader of PDF sees it: poppler's programs, nothing of this package."""

from __future__ import annotations

import datetime as dt
import functools
import itertools
import shutil
from dataclasses import replace
from pathlib import Path
from typing import Any

import numpy as np
import polars as pl
import pytest
from PIL import Image

from tests.report.calendar_samples import CHECKSUM, ONE_OF_EVERY_KIND, event
from tests.report.report_samples import with_instants
from tests.report.wall_samples import (
    HILL,
    MARS,
    NOT_SEEN,
    Page,
    Word,
    drawn,
    from_site,
    geocentric,
    looked_at,
    moon_phase,
    pair,
    poppler,
    read,
    text_of,
)
from wanderers import __version__
from wanderers.errors import DateError, UnknownNameError, UsageProblem
from wanderers.report.charts.style import LIGHT, in_force
from wanderers.report.wall.layout import Paper, Sheet
from wanderers.report.wall.moon import draw_moon
from wanderers.site.zones import zone_data_version

pytestmark = pytest.mark.skipif(shutil.which("pdftotext") is None, reason="needs Debian's poppler-utils")

WEEKDAYS = ("Monday", "Tuesday", "Wednesday", "Thursday", "Friday", "Saturday", "Sunday")
BUSY = [
    pair(f"2027-01-18T{hour:02d}:10:00.000Z", "moon", name, 3.0 + 0.1 * hour)
    for hour, name in enumerate(
        ("mars", "jupiter", "saturn", "venus", "mercury", "Regulus", "Spica", "Pollux", "Antares"), start=9
    )
]


QUARTER: dict[str, Any] = {"first_day": dt.date(2027, 1, 1), "end_day": dt.date(2027, 4, 1)}


@functools.cache
def a_quarter(kind: str = "hill", paper: str = "a4") -> bytes:
    """Return three months with many kinds of events, a crowded day and phases, for a site or for none."""
    phases = [moon_phase("2027-01-15T20:34:00.000Z", "first_quarter")]
    rows = [*ONE_OF_EVERY_KIND.iter_rows(named=True), *BUSY, *phases]
    if kind == "none":
        return drawn(
            with_instants(pl.DataFrame(rows, schema=ONE_OF_EVERY_KIND.schema)), MARS, paper=paper, **QUARTER
        )
    seen = [(row, looked_at(f"{row['utc'][:11]}18:45:00.000+01:00", seen_separation_deg=1.2)) for row in rows]
    return drawn(from_site(*seen), MARS, site=HILL, zone=HILL.zone, paper=paper, **QUARTER)


def test_the_same_tables_give_the_same_bytes_and_no_time_of_making(tmp_path: Path) -> None:
    content = a_quarter("hill")
    assert content == a_quarter.__wrapped__("hill")
    (tmp_path / "a.pdf").write_bytes(content)
    assert "Date" not in poppler("pdfinfo", tmp_path / "a.pdf")


# ISO 216: A4 is 210 x 297 mm. ANSI/ASME Y14.1: size A is 8.5 x 11 inches. Both from memory.
@pytest.mark.parametrize(("paper", "inches"), [("a4", (297 / 25.4, 210 / 25.4)), ("letter", (11.0, 8.5))])
def test_a_landscape_page_a_month_and_one_a_year(
    paper: str, inches: tuple[float, float], tmp_path: Path
) -> None:
    pages = read(a_quarter("none", paper), tmp_path)
    assert len(pages) == 4
    for page in pages:
        assert (page.width, page.height) == pytest.approx(tuple(72.0 * side for side in inches), abs=0.02)
    assert [page.words[0].text for page in pages[:3]] == ["January", "February", "March"]
    assert "2027 at a glance" in pages[3].text


def test_all_is_vector_and_every_font_is_embedded(tmp_path: Path) -> None:
    path = tmp_path / "a.pdf"
    path.write_bytes(a_quarter())
    assert len(poppler("pdfimages", "-list", path).splitlines()) <= 2  # two lines of heading
    fonts = poppler("pdffonts", path).splitlines()[2:]
    assert fonts
    for font in fonts:
        kind, embedded, to_unicode = font.split()[1], font.split()[-5], font.split()[-3]
        assert (kind, embedded, to_unicode) == ("CID", "yes", "yes")


@pytest.mark.parametrize("kind", ["none", "hill"])
@pytest.mark.parametrize("paper", list(Paper))
def test_no_word_leaves_the_paper_or_overlaps_another(kind: str, paper: Paper, tmp_path: Path) -> None:
    pages = read(a_quarter(kind, paper), tmp_path)
    assert len(pages) == 4
    for page in pages:
        for word in page.words:
            assert 20.0 < word.left < word.right < page.width - 20.0, word
            assert 20.0 < word.top < word.bottom < page.height - 20.0, word
        for one, other in itertools.combinations(page.words, 2):
            assert not _overlap(one, other), (one, other)


def _overlap(one: Word, other: Word) -> bool:
    """Return whether two words cover each other; a fifth of their height is air above and below letters."""
    air = 0.2 * min(one.bottom - one.top, other.bottom - other.top)
    beside = one.right <= other.left + 0.3 or other.right <= one.left + 0.3
    return not (beside or one.bottom - air <= other.top or other.bottom - air <= one.top)


def test_what_stands_in_a_box_keeps_within_its_column(tmp_path: Path) -> None:
    (page,) = read(drawn(geocentric(*BUSY, *ONE_OF_EVERY_KIND.iter_rows(named=True))), tmp_path)
    edges = _edges(page)
    grid_ends = next(word.top for word in page.words if word.text == "Lost" or word.text == "13:42")
    inside = [word for word in page.words if word.left > edges[0] and 70.0 < word.top < grid_ends - 5.0]
    assert len(inside) > 80
    for word in inside:
        assert not any(word.left < edge < word.right for edge in edges), word


def _edges(page: Page) -> list[float]:
    """Return where boxes meet: half way between the middles of the names of the days."""
    middles = [next(word.middle for word in page.words if word.text == name) for name in WEEKDAYS]
    half = 0.5 * (middles[1] - middles[0])
    return [middles[0] - half, *(middle + half for middle in middles)]


def test_what_finds_no_room_is_counted_and_the_count_is_right(tmp_path: Path) -> None:
    later = [
        pair(f"2027-01-18T{hour}:10:00.000Z", "moon", name, 4.9)
        for hour, name in ((18, "Aldebaran"), (20, "Pleiades"))
    ]
    crowd = [*BUSY, *later]
    text = text_of(drawn(geocentric(*crowd)), tmp_path)
    printed = sum(text.count(f"{row['utc'][11:16]}") for row in crowd)
    left_out = int(text.split(" more in the table")[0].rsplit("+", 1)[1])
    assert left_out > 0
    assert printed == len(crowd) - left_out
    assert "Mars 3.9°" in text or "Moon and Mars 3.9° apart" in text  # planets go before stars
    assert "the table: wanderers almanac" in text


def test_the_page_says_whose_times_and_places_they_are(tmp_path: Path) -> None:
    for page in read(a_quarter("none"), tmp_path):
        assert "Geocentric: seen from the Earth's centre; times in UTC" in page.text
        assert f"All times are UTC (zone UTC, zone data {zone_data_version()}), not local time." in page.text
        assert f"DE999 (SHA-256 {CHECKSUM[:12]}) by wanderers {__version__}" in page.text
    march = read(a_quarter("hill"), tmp_path)[2].text
    assert "The sky of Lantern Hill" in march
    assert "52.13° N, 11.62° E; local time of Europe/Berlin" in march
    # In the European Union clocks go forward on the last Sunday of March: Directive 2000/84/EC.
    assert "UTC+01:00 and UTC+02:00" in march
    assert "Clocks go forward 1 h" in march
    assert f"zone data {zone_data_version()}" in march
    assert "eocentric" not in march


def test_optics_are_warned_of_where_an_entry_is_near_the_sun_and_only_there(tmp_path: Path) -> None:
    far = pair("2027-01-12T18:00:00.000Z", "venus", "jupiter", 0.4, elongation_deg=40.0)
    near = pair("2027-01-12T18:00:00.000Z", "venus", "jupiter", 0.4, elongation_deg=19.0)
    assert "CAUTION" not in text_of(drawn(geocentric(far)), tmp_path)
    warned = text_of(drawn(geocentric(near)), tmp_path)
    assert "apart ⚠" in warned or "0.4° ⚠" in warned
    assert "⚠ CAUTION: close to the Sun in the sky. Never sweep" in warned
    transit = event("transit", "2027-01-12T08:54:00.000Z", body="mercury", detail="mercury",
                    separation_deg=0.1, elongation_deg=0.1)  # fmt: skip
    told = text_of(drawn(geocentric(transit)), tmp_path)
    assert "filter made for solar use over the front of every instrument" in told
    # Only the lost one is near the Sun: the foot names it, so the page warns.
    lost = pair("2027-01-12T18:00:00.000Z", "venus", "jupiter", 0.4, elongation_deg=5.0)
    hidden = text_of(drawn(geocentric(lost)), tmp_path)
    assert "Lost in the glare, less than 10° from the Sun: 12 Venus, Jupiter 0.4° ⚠." in hidden
    assert "CAUTION" in hidden


def test_from_a_site_the_time_to_look_decides_the_day(tmp_path: Path) -> None:
    meeting = pair("2027-01-12T23:30:00.000Z", "venus", "saturn", 0.4)
    seen = looked_at(
        "2027-01-13T18:45:20.000+01:00", seen_separation_deg=0.52, seen_placement="to the upper right"
    )
    lost = event("opposition", "2027-01-20T10:00:00.000Z", frame="ecliptic", elongation_deg=170.0)
    fact = event("season_point", "2027-01-21T23:45:00.000Z", body="sun", detail="equinox_march")
    view = from_site((meeting, seen), (lost, NOT_SEEN), (fact, NOT_SEEN))
    content = drawn(view, site=HILL, zone=HILL.zone)
    (page,) = read(content, tmp_path)
    text = text_of(content, tmp_path)
    assert "18:45 Saturn 0.5° upper right of Venus, 12° up in the WSW" in text
    assert _day_of(page, "18:45") == 13
    assert "Not to be seen from here: 20 Mars at opposition." in text
    # 23:45 UTC is 00:45 in Berlin, on the next date (Central European Time is UTC+1: tz database).
    assert "00:45 March equinox" in text
    assert _day_of(page, "00:45") == 22


def test_an_instant_on_another_date_than_its_best_moment_is_dated(tmp_path: Path) -> None:
    station = event("station", "2027-01-10T12:59:03.120Z", detail="retrograde", frame="ecliptic",
                    elongation_deg=129.5)  # fmt: skip
    view = from_site((station, looked_at("2027-01-11T02:10:00.000+01:00")))
    text = text_of(drawn(view, site=HILL, zone=HILL.zone), tmp_path)
    assert "02:10 Mars turns retrograde in longitude on 10 Jan, 12° up in the WSW" in text
    assert "after midnight: the first hours of that date" in text


def _day_of(page: Page, clock: str) -> int:
    """Return in which box of January 2027 a time stands."""
    word = next(w for w in page.words if w.text == clock and w.top > 70.0)
    column = sum(edge < word.left for edge in _edges(page)) - 1
    numbers = [w for w in page.words if w.text.isdigit() and w.bottom - w.top > 13.0]
    number = max(
        (w for w in numbers if w.top < word.top and abs(w.left - word.left) < 60.0), key=lambda w: w.top
    )
    assert dt.date(2027, 1, int(number.text)).weekday() == column
    return int(number.text)


def test_weeks_begin_on_monday_and_bear_their_numbers(tmp_path: Path) -> None:
    (page,) = read(drawn(geocentric()), tmp_path)
    left = _edges(page)[0]
    # ISO 8601:2004, 3.2.2: week 01 holds the year's first Thursday. 2027 begins on a Friday, so with week 53.
    assert [w.text for w in page.words if w.right < left and w.text.isdigit()] == ["53", "1", "2", "3", "4"]
    assert [name for name in page.text.split() if name in WEEKDAYS] == list(WEEKDAYS)


def test_a_retrograde_stretch_is_named_in_every_week_it_touches(tmp_path: Path) -> None:
    pages = read(
        drawn(geocentric(), MARS, first_day=dt.date(2027, 1, 1), end_day=dt.date(2027, 6, 1)), tmp_path
    )
    # From the afternoon of Sunday 10 January to 1 April: the ends of the season that the table holds.
    bars = [sum(word.text == "retrograde" for word in page.words) for page in pages[:5]]
    assert bars == [3, 4, 5, 1, 0]
    beside = [word for word in pages[0].words if word.text == "Mars"]
    assert len(beside) == 4  # the first evening has room for the name alone
    glance = pages[5].text
    assert "10 Jan" in glance
    assert "1 Apr" in glance


def test_a_span_within_months_leaves_the_other_days_empty(tmp_path: Path) -> None:
    phases = [moon_phase("2027-01-07T20:24:00.000Z", "new"), moon_phase("2027-01-22T12:17:00.000Z", "full")]
    short = {"first_day": dt.date(2027, 1, 10), "end_day": dt.date(2027, 1, 25)}
    pages = read(drawn(geocentric(*phases), MARS, **short), tmp_path)
    assert len(pages) == 1
    assert "12:17" in pages[0].text
    assert "20:24" not in pages[0].text
    assert "31" in pages[0].text.split()


@pytest.mark.parametrize(("southern", "lit"), [(False, "right"), (True, "left")])
def test_the_waxing_moon_is_lit_on_the_right_in_the_north_and_on_the_left_in_the_south(
    southern: bool, lit: str, tmp_path: Path
) -> None:
    # Common practice, no source: whoever faces the Moon south of the tropics sees it turned by half a turn.
    for phase, side in ((1, lit), (3, "left" if lit == "right" else "right")):
        brightness = _halves(phase, southern=southern, folder=tmp_path)
        assert brightness[side] > 240.0
        assert brightness["left" if side == "right" else "right"] < 80.0
    assert max(_halves(0, southern=southern, folder=tmp_path).values()) < 80.0
    assert min(_halves(2, southern=southern, folder=tmp_path).values()) > 240.0


def _halves(phase: int, *, southern: bool, folder: Path) -> dict[str, float]:
    """Return the mean brightness of the halves of a disc, rendered by poppler."""
    with in_force(LIGHT):
        sheet = Sheet(Paper.A4)
        draw_moon(sheet, 400.0, 300.0, 150.0, phase, southern=southern)
        sheet.figure.savefig(folder / "moon.pdf")
    poppler("pdftoppm", "-r", "72", "-gray", "-singlefile", folder / "moon.pdf", folder / "moon")
    with Image.open(folder / "moon.pgm") as image:
        dots = np.asarray(image, dtype=float)
    row = dots[295 - 50 : 295 + 50]
    return {"left": float(row[:, 290:390].mean()), "right": float(row[:, 410:510].mean())}


def test_names_that_need_care_are_printed_as_they_are(tmp_path: Path) -> None:
    site = replace(HILL, name="Théâtre $x^2$ der Sterne \N{CJK UNIFIED IDEOGRAPH-661F} " + "Sternwarte " * 12)
    view = from_site((pair("2027-01-12T18:00:00.000Z", "venus", "saturn", 0.4), NOT_SEEN))
    (page,) = read(drawn(view, site=site, zone=site.zone), tmp_path)
    assert "Théâtre $x^2$ der Sterne □ Sternwarte" in page.text
    assert page.text.count("Sternwarte") == 12
    title = next(word for word in page.words if word.text == "2027")
    assert not any(_overlap(title, word) for word in page.words if word is not title)


def test_a_place_without_a_name_is_called_by_where_it_lies(tmp_path: Path) -> None:
    site = replace(HILL, name="52.13,11.62", latitude_deg=-52.13)
    view = from_site((pair("2027-01-12T18:00:00.000Z", "venus", "saturn", 0.4), NOT_SEEN))
    text = text_of(drawn(view, site=site, zone=site.zone), tmp_path)
    assert "The sky of 52.13° S, 11.62° E" in text
    assert "52.13,11.62" not in text


def test_what_cannot_be_drawn_is_refused() -> None:
    with pytest.raises(DateError, match="is not after"):
        drawn(geocentric(), end_day=dt.date(2027, 1, 1))
    with pytest.raises(UsageProblem, match="at most 120 months"):
        drawn(geocentric(), end_day=dt.date(2037, 2, 1))
    with pytest.raises(UsageProblem, match="a4 or letter"):
        drawn(geocentric(), paper="a5")
    with pytest.raises(UnknownNameError):
        drawn(geocentric(), zone="Europe/Nowhere")
