"""What the files of a campaign hold: nights in the frame of a camera, stars, the sky over the season."""

from __future__ import annotations

from collections.abc import Iterator
from dataclasses import dataclass, replace
from typing import Any, Final

import numpy as np
import polars as pl

from wanderers.arrays import Bools, Floats
from wanderers.ephemeris.kernels import Kernel
from wanderers.ephemeris.sky import Sky
from wanderers.ephemeris.store import TrackStore
from wanderers.plans.camera import FULL_FRAME, Framing, Sensor, frame_path, tilt_deg
from wanderers.plans.campaign import Campaign
from wanderers.plans.comparison_stars import Comparisons, comparison_stars
from wanderers.plans.field_stars import RegistrationStars, registration_stars
from wanderers.plans.frame import DEFAULT_MARGIN, CameraFrame
from wanderers.plans.path import direction_at
from wanderers.plans.replan import Status
from wanderers.plans.rows import directions
from wanderers.report.campaign.sky_clock import SkyClock, sky_clock

PX_COLUMNS: Final = ("x_px", "y_px", "move_px", "camera_tilt_deg")
"""What the frame adds to a plan: place in the picture (from its left and upper edge), way since the planned
night before, and how far the camera leans to the left at the recommended time."""


@dataclass(frozen=True, slots=True)
class CameraChoice:
    """The camera of a campaign.

    Attributes:
        sensor: its sensor.
        lens_mm: focal length; None for the longest usual one that holds the path.
        margin: the part of each side that stays free.
        position_angle_deg: of the side that is up; None to turn the camera for the longest lens.
    """

    sensor: Sensor = FULL_FRAME
    lens_mm: float | None = None
    margin: float = DEFAULT_MARGIN
    position_angle_deg: float | None = None


@dataclass(frozen=True, slots=True, eq=False)
class CampaignContents:
    """All that is written of a campaign.

    Attributes:
        campaign: the plan.
        kernel: what it was computed from.
        framing: path, sensor and lens, the frame turned as the camera stands at the recommended times.
        path_jd: TT once a day, shape (n,).
        path: where the planet stands then, unit vectors in ICRS axes, shape (3, n).
        plan: the planned nights with ``PX_COLUMNS`` behind.
        spares: the spare nights likewise.
        registration: stars spread over the frame.
        compared: places in ``plan`` of the nights that ``comparisons`` counts from 0.
        comparisons: comparison stars of those nights.
        clock: Sun, Moon and planet over the season by the clock.
    """

    campaign: Campaign
    kernel: Kernel
    framing: Framing
    path_jd: Floats
    path: Floats
    plan: pl.DataFrame
    spares: pl.DataFrame
    registration: RegistrationStars
    compared: tuple[int, ...]
    comparisons: Comparisons
    clock: SkyClock

    @property
    def frame(self) -> CameraFrame:
        """What the camera sees."""
        return self.framing.frame

    @property
    def is_turned_over(self) -> bool:
        """Whether south is nearer to the top of the picture than north."""
        return bool(np.cos(np.radians(self.frame.position_angle_deg)) < 0.0)

    def compared_nights(self) -> Iterator[tuple[dict[str, Any], pl.DataFrame, str]]:
        """Give each night on which the brightness can be estimated: its row, its stars, why it has none."""
        stars = self.comparisons.table
        for number, (place, message) in enumerate(zip(self.compared, self.comparisons.messages, strict=True)):
            yield self.plan.row(place, named=True), stars.filter(pl.col("night") == number), message


def gather_campaign(store: TrackStore, campaign: Campaign, camera: CameraChoice) -> CampaignContents:
    """Compute what the files of a campaign hold.

    Raises:
        FrameError: no frame holds its path.
        UsageProblem: a focal length no lens has.
    """
    season, site = campaign.season, campaign.site
    tracks = store.tracks(float(season.path.jd[0]), float(season.path.jd[-1]))
    jd = np.append(np.arange(season.start_jd, season.end_jd, 1.0), season.end_jd)
    path = direction_at(Sky(tracks), season.body, jd)
    framing = frame_path(
        path,
        camera.sensor,
        lens_mm=camera.lens_mm,
        margin=camera.margin,
        position_angle_deg=camera.position_angle_deg,
    )
    framing = _as_it_stands(campaign, framing, path, camera)
    middle = float(jd[jd.size // 2])
    stars = registration_stars(framing.frame, path, middle, camera.sensor.columns, camera.sensor.rows)
    compared = tuple(np.flatnonzero(_to_estimate(campaign.plan)).tolist())
    at = campaign.plan["recommended_jd_tt"].to_numpy()[list(compared)].astype(np.float64)
    extinction = campaign.rules.criteria.extinction_at(site.elevation_m)
    return CampaignContents(
        campaign=campaign,
        kernel=store.kernel,
        framing=framing,
        path_jd=jd,
        path=path,
        plan=_in_frame(campaign.plan, campaign.plan, framing),
        spares=_in_frame(campaign.spares, campaign.plan, framing),
        registration=stars,
        compared=compared,
        comparisons=comparison_stars(tracks, site, season.body, at, per_airmass_mag=extinction),
        clock=sky_clock(store, campaign),
    )


def to_come(plan: pl.DataFrame) -> pl.DataFrame:
    """Return the planned nights that are neither done nor lost."""
    return plan.filter(pl.col("status") == Status.PLANNED.value)


def _as_it_stands(campaign: Campaign, framing: Framing, path: Floats, camera: CameraChoice) -> Framing:
    """Turn a frame over where the camera, held the right way up, sees it upside down; not one asked for."""
    zenith = campaign.plan["parallactic_angle_deg"].drop_nulls().to_numpy()
    if zenith.size == 0:
        zenith = np.array([0.0 if campaign.site.latitude_deg >= 0.0 else 180.0])
    upright = np.cos(np.radians(tilt_deg(framing.frame.position_angle_deg, zenith)))
    if camera.position_angle_deg is not None or float(np.mean(upright)) >= 0.0:
        return framing
    frame = framing.frame.turned_over()
    places = frame.pixels(path, framing.sensor.columns, framing.sensor.rows)
    return replace(framing, smallest=framing.smallest.turned_over(), frame=frame, path_px=places)


def _to_estimate(plan: pl.DataFrame) -> Bools:
    """Return on which planned nights the brightness can still be estimated, shape (n,)."""
    open_now = (plan["status"] == Status.PLANNED.value) & plan["recommended_jd_tt"].is_not_null()
    return np.asarray(open_now.to_numpy())


def _in_frame(nights: pl.DataFrame, plan: pl.DataFrame, framing: Framing) -> pl.DataFrame:
    """Add ``PX_COLUMNS`` to some nights; the way is counted from the planned night before, if not lost."""
    kept = plan.filter(pl.col("status") != Status.LOST.value)
    here, there = (_pixels(table, framing) for table in (nights, kept))
    days, kept_days = (table["evening_date"].to_numpy().astype("datetime64[D]") for table in (nights, kept))
    before = np.searchsorted(kept_days, days) - 1
    move = np.full(nights.height, np.nan)
    if kept.height:
        way = here - there[np.maximum(before, 0)]
        move = np.where(before >= 0, np.hypot(way[:, 0], way[:, 1]), np.nan)
    lean = tilt_deg(
        framing.frame.position_angle_deg,
        nights["parallactic_angle_deg"].fill_null(np.nan).to_numpy().astype(np.float64),
    )
    values = (here[:, 0], here[:, 1], move, lean)
    return nights.with_columns(
        pl.Series(name, value, dtype=pl.Float64, nan_to_null=True)
        for name, value in zip(PX_COLUMNS, values, strict=True)
    )


def _pixels(nights: pl.DataFrame, framing: Framing) -> Floats:
    """Return the places of nights in the picture, shape (n, 2)."""
    return framing.frame.pixels(directions(nights), framing.sensor.columns, framing.sensor.rows)
