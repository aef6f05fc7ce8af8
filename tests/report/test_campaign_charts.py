"""The charts of a campaign: where nights, stars and light are drawn, and that nothing collides."""

from __future__ import annotations

import datetime as dt
from pathlib import Path
from zoneinfo import ZoneInfo

import numpy as np
import polars as pl
import pytest
from astropy.wcs import WCS
from matplotlib.axes import Axes
from matplotlib.text import Annotation
from PIL import Image

from tests.plans.places import ATOLL, HILL, RIDGE, Watcher
from tests.report.campaign_samples import contents, hopeless, reported
from tests.report.chart_reading import assert_legible, words
from wanderers.ephemeris.store import TrackStore
from wanderers.plans.camera import sensor_named
from wanderers.plans.field_stars import star_names
from wanderers.report.campaign.contents import CameraChoice, CampaignContents, gather_campaign
from wanderers.report.charts import campaign_clock, campaign_field, campaign_light, campaign_nights
from wanderers.report.charts.campaign_nights import RED
from wanderers.report.charts.export import save
from wanderers.report.charts.style import LIGHT

CASES = [("mars", "hill"), ("jupiter", "atoll"), ("saturn", "ridge"), ("venus", "ridge"), ("venus", "hill")]
DRAWN = (
    campaign_field.draw_campaign_field,
    campaign_clock.draw_campaign_clock,
    campaign_light.draw_campaign_light,
)


def dots(ax: Axes, marker: str) -> np.ndarray:
    """Return where a marker is drawn, shape (n, 2)."""
    found = [line for line in ax.lines if line.get_marker() == marker and line.get_linestyle() == "None"]
    return np.concatenate([np.asarray(line.get_xydata(), dtype=np.float64) for line in found])


def has_dot(drawn: np.ndarray, wanted: np.ndarray, tolerance: float) -> bool:
    return bool((np.hypot(*(drawn[:, np.newaxis] - wanted).transpose(2, 0, 1)).min(axis=0) < tolerance).all())


def tangent_plane(some: CampaignContents, ra_deg: np.ndarray, dec_deg: np.ndarray) -> np.ndarray:
    """Return places right and up in the picture, degrees on the tangent plane, by astropy's WCS."""
    frame = some.frame
    wcs = WCS(naxis=2)
    wcs.wcs.ctype = ["RA---TAN", "DEC--TAN"]
    wcs.wcs.crval = [frame.ra_deg, frame.dec_deg]
    wcs.wcs.crpix = [1.0, 1.0]
    east, north = np.moveaxis(wcs.wcs_world2pix(np.stack([ra_deg, dec_deg], axis=1), 0), 1, 0)
    roll = np.radians(frame.position_angle_deg)
    # Upwards lies the roll from north through east; rightwards, looking out from inside the sphere, a
    # quarter turn less than it.
    up = north * np.cos(roll) + east * np.sin(roll)
    right = north * np.sin(roll) - east * np.cos(roll)
    return np.stack([right, up], axis=1)


@pytest.mark.parametrize(("body", "site"), CASES)
@pytest.mark.parametrize("draw", DRAWN)
def test_no_text_leaves_the_figure_or_covers_another(
    store: TrackStore, draw: object, body: str, site: str
) -> None:
    assert callable(draw)
    assert_legible(draw(contents(store, body, site)))


@pytest.mark.parametrize("draw", DRAWN)
def test_a_plan_after_clouds_and_one_without_nights_are_legible_too(store: TrackStore, draw: object) -> None:
    assert callable(draw)
    for plan in (reported(store), hopeless(store)):
        assert_legible(draw(gather_campaign(store, plan, CameraChoice())))


def test_a_lens_far_too_wide_or_too_long_is_drawn_as_well(store: TrackStore) -> None:
    plan = contents(store, "saturn", "hill").campaign
    for camera in (CameraChoice(lens_mm=24.0), CameraChoice(sensor_named("24x36"), lens_mm=400.0)):
        some = gather_campaign(store, plan, camera)
        assert_legible(campaign_field.draw_campaign_field(some))
        held = "holds" if camera.lens_mm == 24.0 else "does not hold"
        assert f"The frame {held} the whole path" in campaign_field.campaign_field_alt_text(some)


@pytest.mark.parametrize(("body", "site"), [("mars", "hill"), ("saturn", "ridge")])
def test_nights_and_registration_stars_stand_where_a_tangent_plane_puts_them(
    store: TrackStore, body: str, site: str
) -> None:
    some = contents(store, body, site)
    ax = campaign_field.draw_campaign_field(some).axes[0]
    for role, marker in (("good", "o"), ("must", "s")):
        nights = some.plan.filter(pl.col("role") == role)
        wanted = tangent_plane(some, nights["ra_j2000_deg"].to_numpy(), nights["dec_j2000_deg"].to_numpy())
        assert has_dot(np.degrees(dots(ax, marker)), wanted, 1e-6)
    stars = some.registration.stars
    wanted = tangent_plane(some, stars.ra_deg, stars.dec_deg)
    # Proper motion since 2000 is in the chart and not in the catalogue's place: under 0.3 arcminutes here.
    assert has_dot(np.degrees(dots(ax, "s")), wanted, 0.3 / 60.0)


def test_the_frame_is_drawn_to_its_size_and_one_scale(store: TrackStore) -> None:
    some = contents(store, "mars", "hill")
    ax = campaign_field.draw_campaign_field(some).axes[0]
    edge = next(patch for patch in ax.patches if patch.get_linewidth() == 1.6)
    box = edge.get_bbox()  # type: ignore[attr-defined]
    # Field of view of a straight-line lens: 2 atan(d / 2f); handbook geometry. 36 x 24 mm at 50 mm.
    assert 2.0 * np.degrees(np.arctan(box.x1)) == pytest.approx(39.6, abs=0.05)
    assert 2.0 * np.degrees(np.arctan(box.y1)) == pytest.approx(27.0, abs=0.05)
    window = ax.get_window_extent()
    across = np.diff(ax.get_xlim())[0] / window.width
    upwards = np.diff(ax.get_ylim())[0] / window.height
    assert across == pytest.approx(upwards, rel=1e-6)


@pytest.mark.parametrize(("body", "site"), [("mars", "hill"), ("mars", "ridge"), ("venus", "hill")])
def test_arrows_point_to_north_and_east(store: TrackStore, body: str, site: str) -> None:
    some = contents(store, body, site)
    figure = campaign_field.draw_campaign_field(some)
    frame = some.frame
    near = np.array([[frame.ra_deg, frame.dec_deg], [frame.ra_deg, frame.dec_deg + 0.01]])
    north = np.diff(tangent_plane(some, *near.T), axis=0)[0]
    east = np.array([-north[1], north[0]])  # a quarter turn to the left, as seen from inside the sphere
    centre = next(note.xyann for note in figure.axes[0].texts if isinstance(note, Annotation))
    letters = {text.get_text(): np.array(text.get_position()) for text in figure.texts}
    for letter, way in (("N", north), ("E", east)):
        drawn = letters[letter] * figure.bbox.size - np.array(centre)
        cosine = drawn @ way / np.hypot(*drawn) / np.hypot(*way)
        assert cosine > 0.9999


@pytest.mark.parametrize(
    ("body", "site", "over"), [("mars", "hill", False), ("mars", "ridge", True), ("saturn", "ridge", True)]
)
def test_the_south_sees_the_field_turned_over(store: TrackStore, body: str, site: str, over: bool) -> None:
    some = contents(store, body, site)
    said = words(campaign_field.draw_campaign_field(some))
    assert some.is_turned_over is over
    assert ("Turned over" in said) is over
    assert ("North down, east to the right" if over else "North up, east to the left") in said


def test_the_camera_leans_as_the_sky_turns(store: TrackStore) -> None:
    # Common practice, no source: a field stands as it culminates; then the parallactic angle is 0 or 180.
    for site in ("hill", "ridge"):
        some = contents(store, "saturn", site)
        upright = some.plan.sort(pl.col("hour_angle_deg").abs()).row(0, named=True)
        assert abs(upright["camera_tilt_deg"]) < 90.0


def test_every_night_has_its_number_and_every_star_its_letter(store: TrackStore) -> None:
    for body, site in CASES:
        some = contents(store, body, site)
        figure = campaign_field.draw_campaign_field(some)
        texts = {text.get_text() for ax in figure.axes for text in ax.texts}
        assert {str(number) for number in some.plan["night"]} <= texts
        names = star_names(some.registration.stars)
        lettered = {f"{letter} {name}" for letter, name in zip("ABCDEFGHIJKLMNO", names, strict=False)}
        assert len(lettered & texts) >= len(lettered) - 1  # in a crowd one may find no room


def test_inner_planets_carry_the_caution_and_lens_and_scale_stand_in_numbers(store: TrackStore) -> None:
    venus = words(campaign_field.draw_campaign_field(contents(store, "venus", "hill")))
    mars = words(campaign_field.draw_campaign_field(contents(store, "mars", "hill")))
    assert "never sweep" in venus and "never sweep" not in mars
    for text in ("36 × 24 mm", "6000 × 4000 px", "50 mm", "39.6° × 27.0°", "24.8″ a pixel"):
        assert text in mars


@pytest.mark.parametrize(("body", "site"), [("mars", "hill"), ("saturn", "ridge"), ("jupiter", "atoll")])
def test_nights_stand_at_their_time_by_the_clock(store: TrackStore, body: str, site: str) -> None:
    some = contents(store, body, site)
    ax = campaign_clock.draw_campaign_clock(some).axes[0]
    drawn = np.concatenate([dots(ax, "o"), dots(ax, "s")])
    zone, changing = ZoneInfo(some.campaign.site.zone), 0
    for row in some.plan.iter_rows(named=True):
        evening = dt.datetime.fromisoformat(row["evening_date"])
        local = dt.datetime.fromisoformat(row["recommended_utc"].replace("Z", "+00:00")).astimezone(zone)
        hour = (local.replace(tzinfo=None) - evening).total_seconds() / 3600.0
        day = evening.toordinal() + 1_721_424.5
        offsets = {(evening + dt.timedelta(hours=at)).replace(tzinfo=zone).utcoffset() for at in (12, 36)}
        changing += len(offsets) - 1
        assert has_dot(drawn, np.array([[day, hour]]), 0.02) or len(offsets) > 1
    assert changing <= 1


def test_light_and_height_by_the_clock_are_those_of_skyfield(store: TrackStore, opened: object) -> None:
    for site, body in ((HILL, "mars"), (ATOLL, "jupiter"), (RIDGE, "saturn")):
        some = contents(store, body, site.name)
        watcher = Watcher(opened, site)
        zone = ZoneInfo(site.zone)
        for evening, step in ((5, 20), (100, 40), (200, 55)):
            noon = dt.datetime.fromisoformat(str(some.clock.days[evening])).replace(hour=12, tzinfo=zone)
            at = noon.astimezone(dt.UTC) + dt.timedelta(minutes=20 * step)
            sun = some.clock.sun_altitude_deg[step, evening]
            assert sun == pytest.approx(
                watcher.altitude_deg("sun", at.isoformat(), refracted=False), abs=0.01
            )
            moon = some.clock.moon_altitude_deg[step, evening]
            assert moon == pytest.approx(
                watcher.altitude_deg("moon", at.isoformat(), refracted=True), abs=0.05
            )
            planet = watcher.altitude_deg(body, at.isoformat(), refracted=False)
            if planet > 5.0:
                # Refraction above 5 degrees stays below 0.17 degrees (Bennett's formula).
                assert some.clock.above_limit_deg[step, evening] == pytest.approx(planet - 20.0, abs=0.17)


@pytest.fixture(scope="module")
def opened(store: TrackStore) -> object:
    from skyfield.api import load_file

    kernel = load_file(str(store.kernel.path))
    yield kernel
    kernel.close()


def test_full_and_new_moons_are_half_a_month_apart(store: TrackStore) -> None:
    ax = campaign_clock.draw_campaign_clock(contents(store, "saturn", "hill")).axes[0]
    marks = [line for line in ax.lines if line.get_transform() == ax.get_xaxis_transform()]
    for line in marks:
        x = np.asarray(line.get_xdata(), dtype=np.float64)
        # Synodic months last 29.27 to 29.83 days (Meeus, Astronomical Algorithms, ch. 49); in whole days.
        assert x.size >= 11 and np.isin(np.diff(x), [29.0, 30.0]).all()
    assert len(marks) == 2


def test_dates_run_in_months_and_magnitudes_downward(store: TrackStore) -> None:
    figure = campaign_light.draw_campaign_light(contents(store, "mars", "hill"))
    upper, lower = figure.axes
    assert upper.get_ylim()[0] > upper.get_ylim()[1] and lower.get_ylim()[0] < lower.get_ylim()[1]
    said = words(figure)
    assert "evening date" in said and "Nov 2026" in said.replace("\n", " ") and "UTC" not in said


def test_what_became_of_nights_is_told_by_shape(store: TrackStore) -> None:
    some = gather_campaign(store, reported(store), CameraChoice())
    nights = campaign_nights.nights_of(some.plan)
    assert {"done", "lost", "good", "must"} <= set(nights.sorts)
    ax = campaign_clock.draw_campaign_clock(some).axes[0]
    assert len(dots(ax, "x")) == 2
    key = {line.get_label(): line for line in campaign_nights.handles(nights.sorts, LIGHT)}
    assert key["done"].get_marker() is not key["planned night"].get_marker()
    drawn = [line for line in ax.lines if line.get_marker() is key["done"].get_marker()]
    assert sum(line.get_xydata().shape[0] for line in drawn) == nights.sort.count("done")
    said = words(campaign_clock.draw_campaign_clock(some))
    assert "lost" in said and "done" in said


@pytest.mark.parametrize("draw", DRAWN)
def test_the_field_look_holds_nothing_but_red(store: TrackStore, tmp_path: Path, draw: object) -> None:
    assert callable(draw)
    figure = draw(contents(store, "saturn", "ridge"), style=RED)
    paths = save(figure, "red", tmp_path, formats=("png", "svg"), style=RED)
    with Image.open(paths["png"]) as image:
        rgb = np.asarray(image.convert("RGB")).astype(int)
    assert rgb[..., 1:].max() <= 8 and rgb[..., 0].max() > 200
    assert np.mean(rgb[..., 0] < 96) > 0.75  # dark ground, no large bright areas
    assert "#ffffff" not in paths["svg"].read_text(encoding="utf-8")


def test_red_text_stands_out_by_the_web_guidelines() -> None:
    # Relative luminance and contrast: WCAG 2.1, W3C Recommendation 2018.
    def contrast(colour: str) -> float:
        value = int(colour[1:3], 16) / 255.0
        assert colour[3:] == "0000"
        linear = value / 12.92 if value <= 0.03928 else ((value + 0.055) / 1.055) ** 2.4
        return (0.2126 * linear + 0.05) / 0.05

    assert min(contrast(RED.ink), contrast(RED.quiet_ink)) >= 4.5
    assert min(contrast(colour) for colour in RED.colours.values()) >= 3.0


def test_alt_texts_state_the_finding(store: TrackStore) -> None:
    some = contents(store, "mars", "hill")
    first, last = (some.plan["recommended_local"][place][11:16] for place in (0, -1))
    assert f"from {first} on the first planned night to {last}" in campaign_clock.campaign_clock_alt_text(
        some
    )
    assert "31 planned nights" in campaign_field.campaign_field_alt_text(some)
    # Opposition of Mars on 19 February 2027: published almanacs; from memory.
    assert "brightest on 19 February 2027" in campaign_light.campaign_light_alt_text(some)
