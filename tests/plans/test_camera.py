"""Sensors and lenses against handbook tables, the FITS projection and the turning Earth."""

from __future__ import annotations

import astropy.units as u
import erfa
import numpy as np
import pytest
from astropy.coordinates import SkyCoord
from hypothesis import given, settings
from hypothesis import strategies as st

from tests.plans.test_frame import in_projection, paths, tan_projection
from wanderers.arrays import Floats
from wanderers.ephemeris.vectors import unit_vectors
from wanderers.errors import UnknownNameError, UsageProblem
from wanderers.plans import camera
from wanderers.plans.camera import FULL_FRAME, SENSORS, Sensor
from wanderers.plans.frame import CameraFrame

# Photographers' handbooks, full frame 36 x 24 mm, to the degree as they print it; common practice, no source.
HANDBOOK_FIELDS = {35: (54, 38), 50: (40, 27), 85: (24, 16), 135: (15, 10), 200: (10, 7), 400: (5, 3.4)}


@pytest.mark.parametrize("lens", HANDBOOK_FIELDS)
def test_fields_of_view_are_those_of_the_handbook(lens: int) -> None:
    width, height = camera.field_of_view_deg(FULL_FRAME, lens)
    printed_width, printed_height = HANDBOOK_FIELDS[lens]
    assert width == pytest.approx(printed_width, abs=0.5)
    assert height == pytest.approx(printed_height, abs=0.05 if lens == 400 else 0.5)


def test_trade_sizes_are_the_usual_ones() -> None:
    # Common practice, no source: sides in millimetres.
    sides = {name: (sensor.width_mm, sensor.height_mm) for name, sensor in SENSORS.items()}
    assert sides == {
        "full frame": (36.0, 24.0),
        "APS-C 1.5x": (23.6, 15.7),
        "APS-C 1.6x": (22.3, 14.9),
        "four thirds": (17.3, 13.0),
        "one inch": (13.2, 8.8),
    }
    # The factors by which the trade calls them: 1.5, 1.6, 2 and 2.7.
    factors = [sensor.crop_factor for sensor in SENSORS.values()]
    assert factors == pytest.approx([1.0, 1.5, 1.6, 2.0, 2.7], abs=0.035)


@pytest.mark.parametrize("sensor", SENSORS.values(), ids=str)
@pytest.mark.parametrize("lens", [14.0, 50.0, 600.0])
def test_field_and_scale_are_those_of_the_fits_projection(sensor: Sensor, lens: float) -> None:
    width, height = camera.field_of_view_deg(sensor, lens)
    frame = CameraFrame(70.0, 22.0, 30.0, width, height)
    wcs = tan_projection(frame, sensor.columns, sensor.rows)
    # The plane's scale is the pixel over the focal length, in radians.
    step = np.degrees(sensor.width_mm / sensor.columns / lens)
    assert np.hypot(*wcs.wcs.cd[:, 0]) == pytest.approx(step, rel=1e-12)
    middle = (np.array([sensor.columns, sensor.rows]) + 1.0) / 2.0
    ends = [
        [0.5, middle[1]],
        [sensor.columns + 0.5, middle[1]],
        [middle[0], 0.5],
        [middle[0], sensor.rows + 0.5],
    ]
    places = SkyCoord(*wcs.wcs_pix2world(np.array(ends), 1).T, unit="deg")
    assert places[0].separation(places[1]).deg == pytest.approx(width, abs=1e-9)
    assert places[2].separation(places[3]).deg == pytest.approx(height, abs=1e-9)
    near = SkyCoord(*wcs.wcs_pix2world(np.array([middle, middle + np.array([1.0, 0.0])]), 1).T, unit="deg")
    scale = camera.scale_arcsec_per_px(sensor, lens)
    assert near[0].separation(near[1]).arcsec == pytest.approx(scale, rel=1e-6)


def test_the_scale_follows_the_handbook_formula() -> None:
    # 206.265 times pixel in micrometres over focal length in millimetres; common practice, no source.
    sensor = Sensor("", 24.0, 16.0, 6000, 4000)
    assert camera.scale_arcsec_per_px(sensor, 200.0) == pytest.approx(206.265 * 4.0 / 200.0, rel=1e-5)


@settings(max_examples=30)
@given(paths(), st.sampled_from(list(SENSORS.values())), st.floats(0.0, 0.3))
def test_the_longest_lens_just_holds_the_path(path: Floats, sensor: Sensor, margin: float) -> None:
    framing = camera.frame_path(path, sensor, margin=margin)
    exact = camera.frame_path(path, sensor, lens_mm=framing.longest_mm, margin=margin)
    assert exact.fits and np.min(exact.room) == pytest.approx(margin, abs=1e-7)
    longer = camera.frame_path(path, sensor, lens_mm=framing.longest_mm * 1.001, margin=margin)
    assert not longer.fits
    assert camera.field_of_view_deg(sensor, framing.longest_mm) == pytest.approx(
        (framing.smallest.width_deg, framing.smallest.height_deg), rel=1e-9
    )
    if framing.usual_mm is not None:
        assert framing.fits and framing.lens_mm == framing.usual_mm <= framing.longest_mm


@settings(max_examples=30)
@given(paths(), st.sampled_from([24.0, 50.0, 135.0, 400.0]))
def test_path_and_room_are_those_of_the_fits_projection(path: Floats, lens: float) -> None:
    framing = camera.frame_path(path, lens_mm=lens)
    places = in_projection(tan_projection(framing.frame), path)
    np.testing.assert_allclose(framing.path_px, places, atol=1e-4)
    edge = np.min(np.minimum(places, [6000.0, 4000.0] - places) / [6000.0, 4000.0], axis=1)
    np.testing.assert_allclose(framing.room, edge, atol=1e-7)
    assert framing.holds_path == bool(np.all(framing.room >= 0.0))
    np.testing.assert_allclose(
        framing.move_px[1:], np.linalg.norm(np.diff(places, axis=0), axis=1), atol=1e-4
    )


# Boxes of the threefold path, and the lens an experienced photographer takes on full frame; the boxes are
# measured, the lenses common practice without source.
USUAL_LENSES = {
    "Mars, wide": ((20.0, 5.5), 50.0, 85.0),
    "Mars, narrow": ((10.0, 3.0), 100.0, 135.0),
    "Jupiter": ((10.0, 0.6), 135.0, 135.0),
    "Saturn": ((7.0, 0.6), 200.0, 200.0),
    "Uranus": ((4.0, 0.1), 400.0, 400.0),
    "Neptune": ((2.8, 0.1), 400.0, 600.0),
}


@pytest.mark.parametrize("planet", USUAL_LENSES)
def test_the_lens_for_a_loop_is_the_one_photographers_take(planet: str) -> None:
    (width, height), shortest, longest = USUAL_LENSES[planet]
    t = np.linspace(0.0, 2.0 * np.pi, 100)
    path = unit_vectors(
        60.0 + width / 2.0 * np.cos(t) / np.cos(np.radians(20.0)), 20.0 + height / 2.0 * np.sin(t)
    )
    lens = camera.frame_path(path).usual_mm
    assert lens is not None and shortest <= lens <= longest


def test_the_path_in_the_frame_tells_whether_a_lens_holds_the_last_night() -> None:
    path = unit_vectors(np.linspace(50.0, 70.0, 21), np.full(21, 20.0))
    framing = camera.frame_path(path, lens_mm=135.0)
    assert not framing.fits and not framing.holds_path
    assert framing.room[0] < 0.0 < framing.room[10]
    assert framing.usual_mm == 85.0 and camera.frame_path(path).fits


def test_a_lens_shorter_than_all_usual_ones_is_used_as_it_is() -> None:
    path = unit_vectors(np.linspace(0.0, 110.0, 40), np.zeros(40))
    framing = camera.frame_path(path, SENSORS["one inch"])
    assert framing.usual_mm is None and framing.lens_mm == framing.longest_mm < 14.0 and framing.fits


def test_a_single_place_takes_the_longest_usual_lens() -> None:
    framing = camera.frame_path(unit_vectors(np.array([10.0]), np.array([5.0])))
    assert framing.longest_mm == np.inf and framing.lens_mm == 800.0
    assert framing.path_px == pytest.approx(np.array([[3000.0, 2000.0]]))


def test_a_fixed_roll_is_kept() -> None:
    path = unit_vectors(np.linspace(50.0, 60.0, 11), np.linspace(10.0, 14.0, 11))
    level = camera.frame_path(path, position_angle_deg=0.0)
    assert level.frame.position_angle_deg == 0.0
    assert level.longest_mm < camera.frame_path(path).longest_mm


def test_the_sky_turns_as_the_earth_does() -> None:
    # Handbooks print 15.041 arcsec a second (Explanatory Supplement, 3rd ed. 2013, section 3.3).
    assert round(camera.SIDEREAL_RATE_ARCSEC_PER_S, 3) == 15.041
    # SOFA's Earth rotation angle over an hour.
    start, end = (erfa.era00(2_461_000.5, hours / 24.0) for hours in (3.0, 4.0))
    turned = np.degrees(end - start) * 3_600.0
    assert turned / 3_600.0 == pytest.approx(camera.SIDEREAL_RATE_ARCSEC_PER_S, rel=1e-7)


def test_the_trail_limit_is_the_handbook_one() -> None:
    # 13.7 times pixel in micrometres over focal length times cos dec, so 0.5 s at 100 mm and 4 micrometres:
    # geometry.
    sensor = Sensor("", 24.0, 16.0, 6000, 4000)
    limits = camera.trail_limit_s(sensor, 100.0, np.array([0.0, 23.0, -60.0]))
    np.testing.assert_allclose(
        limits, 13.7 * 4.0 / (100.0 * np.cos(np.radians([0.0, 23.0, 60.0]))), rtol=2e-3
    )
    assert float(camera.trail_limit_s(sensor, 100.0, 0.0)) == pytest.approx(0.5, abs=0.06)
    assert camera.trail_limit_s(sensor, 100.0, 90.0) == np.inf


@pytest.mark.parametrize("dec", [0.0, 24.0, -50.0, 80.0])
def test_a_star_trails_one_pixel_in_the_limit(dec: float) -> None:
    width, height = camera.field_of_view_deg(FULL_FRAME, 85.0)
    seconds = float(camera.trail_limit_s(FULL_FRAME, 85.0, dec))
    turned = np.degrees(erfa.era00(2_461_000.5, seconds / 86_400.0) - erfa.era00(2_461_000.5, 0.0))
    wcs = tan_projection(CameraFrame(100.0, dec, 40.0, width, height))
    path = in_projection(wcs, unit_vectors(np.array([100.0, 100.0 + turned]), np.array([dec, dec])))
    assert np.hypot(*(path[1] - path[0])) == pytest.approx(1.0, rel=1e-4)


def test_the_500_rule_is_generous() -> None:
    # Common practice, no source: 500 over the focal length as on full frame.
    assert camera.rule_500_s(FULL_FRAME, 50.0) == pytest.approx(10.0)
    assert camera.rule_500_s(SENSORS["four thirds"], 50.0) == pytest.approx(5.0, rel=1e-3)
    for sensor in SENSORS.values():
        assert camera.rule_500_s(sensor, 50.0) > 3.0 * float(camera.trail_limit_s(sensor, 50.0, 25.0))


def test_discs_in_pixels_are_what_the_plane_shows() -> None:
    # A 45 arcsec Jupiter at 135 mm on 6 micrometres: 9.167 arcsec a pixel, so 4.9 pixels.
    assert camera.disc_px(FULL_FRAME, 135.0, np.array([45.0]))[0] == pytest.approx(45.0 / 9.1673, rel=1e-4)


@pytest.mark.parametrize(
    ("angle", "parallactic", "side"), [(20.0, 0.0, 1), (350.0, 10.0, -1), (10.0, 200.0, 1)]
)
def test_a_positive_tilt_turns_the_upper_side_to_the_left(
    angle: float, parallactic: float, side: int
) -> None:
    middle = SkyCoord(80.0, 20.0, unit="deg")
    toward_zenith = middle.directional_offset_by(parallactic * u.deg, 1.0 * u.deg)
    frame = CameraFrame(80.0, 20.0, angle, 20.0, 20.0)
    x, y = frame.on_plane(unit_vectors(np.array([toward_zenith.ra.deg]), np.array([toward_zenith.dec.deg])))[
        0
    ]
    tilt = camera.tilt_deg(angle, np.array([parallactic]))[0]
    assert np.degrees(np.arctan2(x, y)) == pytest.approx(tilt, abs=1e-6)
    assert np.sign(tilt) == side or abs(tilt) > 90.0


@pytest.mark.parametrize(
    ("text", "name"),
    [
        ("Full Frame", "full frame"),
        ("full-frame", "full frame"),
        ("aps-c_1.5x", "APS-C 1.5x"),
        ("APSC 1.6x", "APS-C 1.6x"),
        ("FOUR THIRDS", "four thirds"),
        ("one inch", "one inch"),
    ],
)
def test_trade_names_are_understood_in_any_spelling(text: str, name: str) -> None:
    assert camera.sensor_named(text) is SENSORS[name]


def test_a_sensor_is_given_by_its_sides_and_pixels() -> None:
    sensor = camera.with_pixels(camera.sensor_named("22.2x14.8"), "5472x3648")
    assert (sensor.width_mm, sensor.height_mm, sensor.columns, sensor.rows) == (22.2, 14.8, 5472, 3648)
    assert not sensor.pixels_assumed and camera.sensor_named("22.2 x 14.8 mm").pixels_assumed
    assert sensor.pixel_um == pytest.approx(4.057, abs=1e-3)


@pytest.mark.parametrize("text", ["0x24", "36x400", "36x0.5"])
def test_sides_no_sensor_has_are_refused(text: str) -> None:
    with pytest.raises(UsageProblem, match="WxH"):
        camera.sensor_named(text)


def test_an_unknown_sensor_names_the_nearest() -> None:
    with pytest.raises(UnknownNameError, match="full frame"):
        camera.sensor_named("ful frame")


@pytest.mark.parametrize("text", ["6000", "6000x", "4000x6000", "0x0", "axb"])
def test_pixels_that_cannot_be_are_refused(text: str) -> None:
    with pytest.raises(UsageProblem, match=r"COLUMNSxROWS|not square"):
        camera.with_pixels(FULL_FRAME, text)


@pytest.mark.parametrize("lens", [0.0, -50.0, 1e6, float("nan")])
def test_a_lens_that_cannot_be_is_refused(lens: float) -> None:
    with pytest.raises(UsageProblem, match="focal length"):
        camera.frame_path(unit_vectors(np.array([1.0, 2.0]), np.zeros(2)), lens_mm=lens)
