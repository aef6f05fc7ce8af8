"""Sensors and lenses: which lens holds the path, at what scale, and for how long it may stay open.

All formulas are geometry of a straight-line (rectilinear) lens focused at infinity; the focal length that is
engraved on a lens may be off by a few per cent.
"""

from __future__ import annotations

import re
from dataclasses import dataclass, replace
from typing import Final

import numpy as np

from wanderers.arrays import Floats
from wanderers.constants import ARCSEC_PER_DEG
from wanderers.ephemeris.vectors import wrapped_deg
from wanderers.errors import UnknownNameError, UsageProblem
from wanderers.plans.frame import DEFAULT_MARGIN, SLACK, CameraFrame, smallest_frame

SIDEREAL_RATE_ARCSEC_PER_S: Final = 15.041067
"""How fast the stars on the equator pass: 360 degrees in 86164.0989 s, a turn of the Earth against the fixed
stars. IERS Conventions (2010), equation 5.15. Handbooks print 15.041."""

ARCSEC_PER_RAD: Final = float(np.degrees(1.0)) * ARCSEC_PER_DEG

FULL_DIAGONAL_MM: Final = float(np.hypot(36.0, 24.0))

RULE_500_S_MM: Final = 500.0
"""Seconds times millimetres, full frame. Common practice, no source."""

USUAL_FOCAL_LENGTHS_MM: Final = (14, 20, 24, 28, 35, 50, 85, 100, 135, 200, 300, 400, 500, 600, 800)
"""Common practice, no source."""

SQUARE_WITHIN: Final = 0.03
"""How far a pixel may be from square: rounded sizes of sensors leave 1 per cent."""

MAX_LENS_MM: Final = 20_000.0


@dataclass(frozen=True, slots=True)
class Sensor:
    """A camera's sensor, held level.

    Attributes:
        name: trade size, or the sides in millimetres.
        width_mm: left to right.
        height_mm: bottom to top.
        columns: pixels left to right.
        rows: pixels bottom to top.
        pixels_assumed: whether the pixels are those usual for the size and not the user's own.
    """

    name: str
    width_mm: float
    height_mm: float
    columns: int
    rows: int
    pixels_assumed: bool = True

    @property
    def aspect(self) -> float:
        """Width over height."""
        return self.width_mm / self.height_mm

    @property
    def pixel_um(self) -> float:
        """Side of a pixel in micrometres, from the width."""
        return self.width_mm * 1_000.0 / self.columns

    @property
    def crop_factor(self) -> float:
        """How much shorter the diagonal is than that of 36 x 24 mm."""
        return FULL_DIAGONAL_MM / float(np.hypot(self.width_mm, self.height_mm))


SENSORS: Final = {
    sensor.name: sensor
    for sensor in (
        Sensor("full frame", 36.0, 24.0, 6000, 4000),
        Sensor("APS-C 1.5x", 23.6, 15.7, 6000, 4000),
        Sensor("APS-C 1.6x", 22.3, 14.9, 6000, 4000),
        Sensor("four thirds", 17.3, 13.0, 5184, 3888),
        Sensor("one inch", 13.2, 8.8, 5472, 3648),
    )
}
"""Trade sizes with the pixels most common on them, 20 to 24 million. Common practice, no source."""

FULL_FRAME: Final = SENSORS["full frame"]
USUAL_PIXEL_UM: Final = 4.0
"""Where a sensor is given in millimetres alone. Common practice, no source."""


@dataclass(frozen=True, slots=True, eq=False)
class Framing:
    """A path in the frame of one camera and lens, n nights.

    Attributes:
        sensor: the sensor.
        smallest: the frame that just holds the path with its margin.
        longest_mm: focal length that gives it; infinite for a path that is a single place.
        usual_mm: the nearest usual focal length not above; None where even the shortest is too long.
        lens_mm: the focal length in use: the one asked for, else the usual one, else the longest.
        frame: what that lens shows, with the same middle and roll.
        margin: the part of each side meant to stay free.
        room: what stays free beside each night's place, as a part of the side, shape (n,); negative outside.
        path_px: each night's place, x from the left edge, y down from the upper, shape (n, 2).
    """

    sensor: Sensor
    smallest: CameraFrame
    longest_mm: float
    usual_mm: float | None
    lens_mm: float
    frame: CameraFrame
    margin: float
    room: Floats
    path_px: Floats

    @property
    def fits(self) -> bool:
        """Whether every night lies in the frame with its margin."""
        return bool(np.all(self.room >= self.margin - SLACK))

    @property
    def holds_path(self) -> bool:
        """Whether every night lies in the frame at all."""
        return bool(np.all(self.room >= 0.0))

    @property
    def scale_arcsec_per_px(self) -> float:
        """Scale in the middle of the picture."""
        return scale_arcsec_per_px(self.sensor, self.lens_mm)

    @property
    def move_px(self) -> Floats:
        """How far each night's place lies from that of the one before, shape (n,); the first is 0."""
        steps = np.diff(self.path_px, axis=0, prepend=self.path_px[:1])
        return np.asarray(np.hypot(steps[:, 0], steps[:, 1]))


def sensor_named(text: str) -> Sensor:
    """Return the sensor of a trade size, in any case and with - or _ for a space, or of WxH millimetres.

    Raises:
        UnknownNameError: with the nearest trade sizes.
        UsageProblem: sides no sensor has.
    """
    sides = re.fullmatch(r"\s*(\d+(?:\.\d*)?)\s*[x×*]\s*(\d+(?:\.\d*)?)\s*(?:mm)?\s*", text.lower())
    if sides is None:
        return _trade_size(text)
    width, height = float(sides[1]), float(sides[2])
    if not (1.0 <= width <= 300.0 and 1.0 <= height <= 300.0):
        raise UsageProblem(f"sensor '{text}' is outside 1 to 300 mm: give its sides as WxH, as 36x24")
    columns, rows = (round(side * 1_000.0 / USUAL_PIXEL_UM) for side in (width, height))
    return Sensor(f"{width:g} x {height:g} mm", width, height, columns, rows)


def _trade_size(text: str) -> Sensor:
    plain = {_plain(name): sensor for name, sensor in SENSORS.items()}
    if _plain(text) not in plain:
        names = [name.lower() for name in SENSORS]
        raise UnknownNameError("sensor", text, [*names, "WxH in mm, as 36x24"])
    return plain[_plain(text)]


def _plain(name: str) -> str:
    return re.sub(r"[\s_-]+", "", name.lower())


def with_pixels(sensor: Sensor, text: str) -> Sensor:
    """Return a sensor with the pixels given as COLUMNSxROWS.

    Raises:
        UsageProblem: it is not of that form, or the pixels are not square on that sensor.
    """
    match = re.fullmatch(r"\s*(\d+)\s*[x×*]\s*(\d+)\s*(?:px)?\s*", text.lower())
    columns, rows = (int(match[1]), int(match[2])) if match else (0, 0)
    if not (1 <= columns <= 100_000 and 1 <= rows <= 100_000):
        raise UsageProblem(f"pixels '{text}' are no picture size: give COLUMNSxROWS, as 6000x4000")
    stretch = (sensor.width_mm / columns) / (sensor.height_mm / rows)
    if abs(np.log(stretch)) > SQUARE_WITHIN:
        raise UsageProblem(
            f"{columns} x {rows} pixels are not square on a sensor of {sensor.width_mm:g} x "
            f"{sensor.height_mm:g} mm: give both in the same order, width first"
        )
    return replace(sensor, columns=columns, rows=rows, pixels_assumed=False)


def field_of_view_deg(sensor: Sensor, focal_length_mm: float) -> tuple[float, float]:
    """Return the angles of view across and upwards: 2 atan(d / 2f). Geometry."""
    width, height = (
        float(np.degrees(2.0 * np.arctan(side / (2.0 * focal_length_mm))))
        for side in (sensor.width_mm, sensor.height_mm)
    )
    return width, height


def scale_arcsec_per_px(sensor: Sensor, focal_length_mm: float) -> float:
    """Return the scale in the middle of the picture; towards the edge a pixel covers less sky."""
    return ARCSEC_PER_RAD * sensor.pixel_um / 1_000.0 / focal_length_mm


def longest_lens_mm(frame: CameraFrame, sensor: Sensor) -> float:
    """Return the focal length whose field just holds a frame; infinite for a frame without size."""
    across, upwards = 2.0 * frame.half_sizes
    if max(across, upwards) <= 0.0:
        return float("inf")
    with np.errstate(divide="ignore"):
        return float(min(np.divide(sensor.width_mm, across), np.divide(sensor.height_mm, upwards)))


def usual_lens_mm(longest_mm: float) -> float | None:
    """Return the longest usual focal length not above a given one; None where all are longer."""
    shorter = [length for length in USUAL_FOCAL_LENGTHS_MM if length <= longest_mm * (1.0 + 1e-9)]
    return float(max(shorter)) if shorter else None


def lens_frame(middle: CameraFrame, sensor: Sensor, focal_length_mm: float) -> CameraFrame:
    """Return what a lens shows when it points and is turned like another frame."""
    width, height = field_of_view_deg(sensor, focal_length_mm)
    return replace(middle, width_deg=width, height_deg=height)


def frame_path(
    path: Floats,
    sensor: Sensor = FULL_FRAME,
    *,
    lens_mm: float | None = None,
    margin: float = DEFAULT_MARGIN,
    position_angle_deg: float | None = None,
) -> Framing:
    """Frame a path among the stars for one sensor.

    Args:
        path: unit vectors in ICRS axes, one a night, shape (3, n).
        sensor: the sensor.
        lens_mm: focal length to use; None for the longest usual one that holds the path with its margin.
        margin: the part of each side that stays free at either end of it.
        position_angle_deg: of the side that is up; None to turn the camera for the longest lens.

    Raises:
        FrameError: as :func:`wanderers.plans.frame.smallest_frame` does.
        UsageProblem: a focal length no lens has.
    """
    if lens_mm is not None and not 1.0 <= lens_mm <= MAX_LENS_MM:
        raise UsageProblem(f"no lens has {lens_mm:g} mm: give its focal length, 1 to {MAX_LENS_MM:.0f} mm")
    smallest = smallest_frame(
        path, aspect=sensor.aspect, margin=margin, position_angle_deg=position_angle_deg
    )
    longest = longest_lens_mm(smallest, sensor)
    usual = usual_lens_mm(longest)
    lens = lens_mm or usual or longest
    frame = lens_frame(smallest, sensor, lens)
    pixels = frame.pixels(path, sensor.columns, sensor.rows)
    return Framing(sensor, smallest, longest, usual, lens, frame, margin, frame.room(path), pixels)


def rule_500_s(sensor: Sensor, focal_length_mm: float) -> float:
    """Return the untracked exposure of the 500 rule, generous: stars trail by several pixels.

    Common practice, no source: 500 s over the focal length in mm that gives the same picture on full frame.
    """
    return RULE_500_S_MM / (focal_length_mm * sensor.crop_factor)


def trail_limit_s(
    sensor: Sensor, focal_length_mm: float, dec_deg: Floats | float, trail_px: float = 1.0
) -> Floats:
    """Return how long an untracked exposure may last until stars trail, in the shape of the declination.

    t = trail * pixel / (f * rate * cos dec), exact in the middle of the picture; near the edges of a wide
    field trails are longer, by 1 / cos^2 of the angle from the middle at most.

    Args:
        sensor: the sensor.
        focal_length_mm: the lens.
        dec_deg: declination; at a pole the limit is infinite.
        trail_px: the trail that is allowed, pixels.
    """
    rate = SIDEREAL_RATE_ARCSEC_PER_S / scale_arcsec_per_px(sensor, focal_length_mm)
    cosine = np.cos(np.radians(np.asarray(dec_deg, dtype=np.float64)))
    with np.errstate(divide="ignore"):
        return np.asarray(np.where(np.abs(cosine) < 1e-12, np.inf, trail_px / (rate * np.abs(cosine))))


def disc_px(sensor: Sensor, focal_length_mm: float, diameter_arcsec: Floats) -> Floats:
    """Return the diameters of discs in pixels; below about 2 the lens's own blur decides what is seen."""
    return np.asarray(diameter_arcsec / scale_arcsec_per_px(sensor, focal_length_mm))


def tilt_deg(position_angle_deg: float, parallactic_angle_deg: Floats) -> Floats:
    """Return how far the camera leans from upright, shape (n,), in (-180, 180].

    Positive when the upper side is turned to the left as seen from behind the camera. The parallactic angle
    is the position angle of the zenith, so this is the difference of two position angles.
    """
    return wrapped_deg(position_angle_deg - parallactic_angle_deg)
