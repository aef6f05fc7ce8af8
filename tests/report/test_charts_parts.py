"""The parts that all charts are made of: time axes, lines, labels, the sky behind a path, the look."""

from __future__ import annotations

import matplotlib
import numpy as np
import pytest
from matplotlib.colors import to_rgb

from wanderers.ephemeris import constellations
from wanderers.ephemeris.bodies import PLANETS, Body
from wanderers.ephemeris.dates import parse_date
from wanderers.ephemeris.stars import field_stars
from wanderers.report.charts import curves, field, labels, starfield, timeaxis, wording
from wanderers.report.charts.labels import Ground, Label
from wanderers.report.charts.style import DASHES, LIGHT, NIGHT, Style, in_force, new_figure

J2000_JD = 2_451_545.0
ROOM = Ground((0.0, 0.0, 400.0, 300.0), np.zeros((0, 2)))


def ticks_of(first: str, last: str, most: float) -> list[str]:
    low, high = parse_date(first), parse_date(last)
    division = timeaxis.division_for(low, high, most)
    return timeaxis.tick_texts(timeaxis.ticks(low, high, division), division)


# --- time axes


def test_months_are_ticked_and_the_year_stands_where_it_begins() -> None:
    assert ticks_of("2027-11-15", "2028-03-10", 6) == ["Dec\n2027", "Jan\n2028", "Feb", "Mar"]


def test_tens_of_days_skip_the_31st() -> None:
    assert ticks_of("2027-01-05", "2027-02-15", 6) == ["11 Jan\n2027", "21 Jan", "1 Feb", "11 Feb"]


def test_years_before_the_common_era_are_ticked() -> None:
    assert ticks_of("-0501", "-0498", 4) == [
        "\N{MINUS SIGN}501",
        "\N{MINUS SIGN}500",
        "\N{MINUS SIGN}499",
        "\N{MINUS SIGN}498",
    ]


def test_no_more_ticks_than_asked_for() -> None:
    for days in (3, 40, 400, 4_000, 40_000, 400_000):
        division = timeaxis.division_for(J2000_JD, J2000_JD + days, 12)
        assert 1 <= timeaxis.ticks(J2000_JD, J2000_JD + days, division).size <= 14


def test_a_tick_stands_at_the_first_instant_of_its_day() -> None:
    division = timeaxis.division_for(J2000_JD, J2000_JD + 100.0, 4)
    assert timeaxis.ticks(J2000_JD, J2000_JD + 100.0, division)[0] == parse_date("2000-02-01")


def test_old_dates_say_which_calendar_they_are_in() -> None:
    assert "Gregorian" in timeaxis.axis_text(parse_date("1582-10-14"))
    assert "Gregorian" not in timeaxis.axis_text(parse_date("1582-10-15"))
    assert "UTC" in timeaxis.axis_text(parse_date("2027"))


def test_dates_in_words() -> None:
    at = parse_date("2027-03-04T23:59")
    assert timeaxis.day_text(at) == "4 Mar 2027"
    assert timeaxis.long_day_text(at) == "4 March 2027"
    assert timeaxis.month_span_text(at, parse_date("2027-06-01")) == "March to June 2027"
    assert timeaxis.month_span_text(at, parse_date("2028-06-01")) == "March 2027 to June 2028"
    assert timeaxis.month_span_text(at, at) == "March 2027"


def test_the_axis_is_utc_not_tt() -> None:
    # TT - UTC = 64.184 s at 2000-01-01 (32 s of leap seconds: IERS Bulletin C; 32.184 s: IAU 1991 A4).
    assert (J2000_JD - timeaxis.utc_days(J2000_JD)) * 86_400.0 == pytest.approx(64.184, abs=1e-3)


# --- lines


def test_a_line_leaves_one_edge_of_the_circle_and_enters_at_the_other() -> None:
    x, y = curves.wrapped_line(np.arange(4.0), np.array([340.0, 350.0, 10.0, 20.0]), 0.0)
    np.testing.assert_allclose(x, [0.0, 1.0, 1.5, np.nan, 1.5, 2.0, 3.0])
    np.testing.assert_allclose(y, [340.0, 350.0, 360.0, np.nan, 0.0, 10.0, 20.0])


def test_a_line_going_back_over_the_cut_leaves_below() -> None:
    _, y = curves.wrapped_line(np.arange(2.0), np.array([205.0, 195.0]), 200.0)
    np.testing.assert_allclose(y, [205.0, 200.0, np.nan, 560.0, 555.0])


def test_the_circle_is_cut_far_from_what_should_stay_whole() -> None:
    assert curves.quietest_cut(np.array([350.0, 10.0])) == 180.0
    assert curves.quietest_cut(np.zeros(0)) == 0.0


def test_a_cropped_line_reaches_the_edges() -> None:
    line = curves.Line(np.arange(5.0), 10.0 * np.arange(5.0), np.zeros(5, dtype=bool))
    cropped = line.cropped(0.5, 2.25)
    np.testing.assert_allclose(cropped.time, [0.5, 1.0, 2.0, 2.25])
    np.testing.assert_allclose(cropped.longitude_deg, [5.0, 10.0, 20.0, 22.5])


def test_a_longitude_is_put_on_the_turn_of_the_line() -> None:
    line = curves.Line(np.array([0.0, 100.0]), np.array([700.0, 740.0]), np.zeros(2, dtype=bool))
    assert line.near(2.0, 50.0) == pytest.approx(722.0)


# --- labels


def label(anchor: tuple[float, float], text: str = "a", size: tuple[float, float] = (60.0, 20.0)) -> Label:
    return Label(text, anchor, *labels.around(anchor, size, (90.0,), 1.0), size)


def boxes_of(wanted: list[Label], ground: Ground) -> np.ndarray:
    chosen = labels.place(wanted, ground, 1.0)
    return np.array(
        [
            labels.boxes_around(one.centres[[at]], one.size)[0]
            for one, at in zip(wanted, chosen, strict=True)
            if at is not None
        ]
    )


def overlapping(boxes: np.ndarray) -> int:
    count = 0
    for number, one in enumerate(boxes):
        for other in boxes[:number]:
            apart = one[0] >= other[2] or other[0] >= one[2] or one[1] >= other[3] or other[1] >= one[3]
            count += not apart
    return count


def test_a_lone_label_stands_on_its_preferred_side() -> None:
    box = boxes_of([label((200.0, 150.0))], ROOM)[0]
    assert box[1] > 150.0
    assert 0.5 * (box[0] + box[2]) == pytest.approx(200.0)


def test_labels_of_one_place_do_not_overlap() -> None:
    boxes = boxes_of([label((200.0, 150.0)) for _ in range(6)], ROOM)
    assert len(boxes) == 6
    assert overlapping(boxes) == 0


def test_a_label_with_no_room_is_left_out() -> None:
    narrow = Ground((0.0, 0.0, 50.0, 300.0), np.zeros((0, 2)))
    assert labels.place([label((25.0, 150.0))], narrow, 1.0) == [None]


def test_a_label_avoids_lines_and_boxes() -> None:
    line = np.stack([np.full(100, 200.0), np.linspace(155.0, 300.0, 100)], axis=1)
    below = labels.boxes_around(np.array([[200.0, 100.0]]), (300.0, 80.0))
    box = boxes_of([label((200.0, 150.0))], Ground((0.0, 0.0, 400.0, 300.0), line, below))[0]
    assert box[2] < 200.0 or box[0] > 200.0
    assert overlapping(np.vstack([box, below])) == 0


def test_spread_heights_keep_their_order_and_distance_and_move_no_more_than_needed() -> None:
    wanted = np.array([50.0, 10.0, 52.0, 51.0])
    heights = labels.spread(wanted, 5.0, 0.0, 100.0)
    np.testing.assert_allclose(heights, [46.0, 10.0, 56.0, 51.0])


def test_spread_heights_stay_within_their_limits() -> None:
    heights = labels.spread(np.full(5, 99.0), 5.0, 0.0, 100.0)
    assert heights.max() == pytest.approx(100.0)
    np.testing.assert_allclose(np.diff(heights), 5.0)


def test_dense_dots_are_close_together_and_never_in_a_gap() -> None:
    line = np.array([[0.0, 0.0], [30.0, 0.0], [np.nan, np.nan], [100.0, 0.0], [110.0, 0.0]])
    dots = labels.dense(line, 4.0)[:, 0]
    assert np.sum((dots > 30.0) & (dots < 100.0)) == 0
    assert np.diff(dots[dots <= 30.0]).max() <= 4.0


# --- the sky behind a path


def test_regulus_stands_where_the_catalogues_have_it() -> None:
    # Hipparcos: 10h 08m 22.3s, +11 degrees 58' 02" (ICRS, J2000.0; from memory).
    sky = field.SkyField(152.0, 12.0, 3.0, 2.0)
    catalogue, flat = field.stars_in(sky, J2000_JD)
    ra, dec = sky.on_axes(flat)[catalogue.name.index("Regulus")]
    assert ra == pytest.approx(15.0 * (10 + 8 / 60 + 22.3 / 3600), abs=1e-3)
    assert dec == pytest.approx(11 + 58 / 60 + 2 / 3600, abs=1e-3)


def test_stars_come_brightest_first_and_within_the_field() -> None:
    sky = field.SkyField(359.0, -5.0, 6.0, 4.0)
    catalogue, flat = field.stars_in(sky, J2000_JD)
    assert len(catalogue) > 10
    assert np.all(np.diff(catalogue.v_mag) >= 0.0)
    assert np.all(np.abs(flat) <= (6.0, 4.0))


def test_the_ecliptic_passes_thirteen_constellations_at_known_longitudes() -> None:
    # Where the IAU boundaries cut the ecliptic of J2000, from Aries on; widely printed (from memory). What is
    # given here is the first tenth of a degree behind each.
    known = [28.687, 53.417, 90.140, 117.988, 138.038, 173.851, 217.810, 241.047, 247.638, 266.238]
    known += [299.656, 327.488, 351.650]
    begins, names = field.ecliptic_constellations(J2000_JD)
    assert names[0] == "Aries" and names[8] == "Ophiuchus" and names[-1] == "Pisces"
    np.testing.assert_allclose(begins, np.array(known) + 0.05, atol=0.06)


def test_constellations_move_along_the_ecliptic_of_date() -> None:
    # General precession: 50.29 arcseconds a year (IAU 2006), 5.59 degrees in 400 years.
    now, _ = field.ecliptic_constellations(J2000_JD)
    then, _ = field.ecliptic_constellations(J2000_JD - 400.0 * 365.25)
    moved = np.sort((now - 5.59) % 360.0) - then
    assert np.median(np.abs(moved)) < 0.15


def test_a_boundary_divides_constellations() -> None:
    sky = field.SkyField(150.0, 8.0, 12.0, 7.0)
    line = field.boundaries_in(sky)
    middle = 0.5 * (line[1:] + line[:-1])
    middle = middle[np.isfinite(middle).all(axis=1) & sky.holds(np.nan_to_num(middle, nan=99.0))]
    around = np.array([[0.05, 0.05], [0.05, -0.05], [-0.05, 0.05], [-0.05, -0.05]])
    over = field.constellations_over(sky, (middle[:, np.newaxis] + around).reshape(-1, 2)).reshape(-1, 4)
    assert middle.shape[0] > 20
    assert np.all(over.min(axis=1) != over.max(axis=1))


def test_a_field_holds_its_path_with_a_margin_across_zero_hours() -> None:
    ra, dec = np.array([357.0, 359.0, 2.0, 5.0]), np.array([-2.0, 0.0, 1.0, 2.0])
    sky = field.field_around(ra, dec, margin=0.15, least_width_deg=1.0, shapes=(1.0, 3.0))
    flat = sky.flat(ra, dec)
    room = np.array([sky.half_width_deg, sky.half_height_deg]) - np.abs(flat).max(axis=0)
    assert np.all(room >= 0.15 * np.ptp(flat[:, 0]) - 1e-9)
    assert np.ptp(flat[:, 0]) == pytest.approx(8.0, abs=0.02)


def test_flat_places_come_back_as_they_were() -> None:
    sky = field.SkyField(10.0, 40.0, 5.0, 5.0)
    np.testing.assert_allclose(sky.on_axes(sky.flat(np.array([12.0]), np.array([41.0]))), [[12.0, 41.0]])
    assert sky.flat(np.array([11.0]), np.array([40.0]))[0, 0] == pytest.approx(np.cos(np.radians(40.0)))


def test_stars_are_called_by_name_else_by_greek_letter() -> None:
    stars = field_stars()
    assert starfield.star_name(stars, stars.name.index("Sirius")) == "Sirius"
    assert starfield.star_name(stars, stars.bayer.index("eta Leo")) == "η Leo"
    nameless = next(i for i in range(len(stars)) if not stars.name[i] and not stars.bayer[i])
    assert starfield.star_name(stars, nameless) == ""


def test_the_names_of_constellations_are_those_of_their_own_ground() -> None:
    sky = field.SkyField(152.0, 12.0, 10.0, 6.0)
    figure = new_figure(6.0, LIGHT)
    ax = figure.add_axes((0.0, 0.0, 1.0, 1.0))
    ax.set_xlim(152.0 + 10.0 / sky.squeeze, 152.0 - 10.0 / sky.squeeze)
    ax.set_ylim(6.0, 18.0)
    wanted = starfield.constellation_labels(ax, sky, np.zeros((1, 2)), LIGHT)
    assert "L E O" in [one.text for one in wanted]
    leo = constellations.ABBREVIATIONS.index("Leo")
    for one in wanted:
        if one.text == "L E O":
            places = ax.transData.inverted().transform(one.centres[np.isfinite(one.costs)])
            over = field.constellations_over(sky, sky.flat(places[:, 0], places[:, 1]))
            assert np.all(over == leo)


# --- words and look


@pytest.mark.parametrize(
    ("degrees", "text"), [(5.26, "5.3°"), (1.0, "1.0°"), (0.996, "1.0°"), (0.5, "30′"), (0.01, "36″")]
)
def test_separations_are_told_in_the_unit_that_suits(degrees: float, text: str) -> None:
    assert wording.separation_text(degrees) == text


def contrast(first: str, second: str) -> float:
    """WCAG 2.1, definitions of contrast ratio and relative luminance."""
    shades = []
    for colour in (first, second):
        parts = np.array(to_rgb(colour))
        linear = np.where(parts <= 0.03928, parts / 12.92, ((parts + 0.055) / 1.055) ** 2.4)
        shades.append(float(linear @ [0.2126, 0.7152, 0.0722]))
    return (max(shades) + 0.05) / (min(shades) + 0.05)


@pytest.mark.parametrize("style", [LIGHT, NIGHT])
def test_lines_and_text_stand_out_from_the_paper(style: Style) -> None:
    assert all(contrast(style.colours[body], style.paper) >= 3.0 for body in (Body.SUN, *PLANETS))
    assert all(contrast(style.name_colour(body), style.paper) >= 4.5 for body in (Body.SUN, *PLANETS))
    assert min(contrast(ink, style.paper) for ink in (style.ink, style.quiet_ink)) >= 4.5
    assert contrast(style.ink, style.back_fill) >= 4.5


def test_no_two_planets_share_a_dash() -> None:
    assert len({DASHES[body] for body in (Body.SUN, *PLANETS)}) == 1 + len(PLANETS)


def test_the_settings_of_the_caller_are_left_alone() -> None:
    before = dict(matplotlib.rcParams)
    with in_force(NIGHT):
        assert matplotlib.rcParams["axes.facecolor"] == NIGHT.paper
    assert dict(matplotlib.rcParams) == before
