"""Options of a campaign: what a night must offer, how many, and the camera."""

from __future__ import annotations

import datetime as dt
import functools
from collections.abc import Callable
from dataclasses import replace
from typing import Any, Final, TypeVar

import click

from wanderers.cli.site_options import BLACKNESS, HOW_BLACK, HOW_CLEAR, LOSS
from wanderers.cli.view_options import Weekdays
from wanderers.ephemeris.bodies import Body
from wanderers.plans.camera import FULL_FRAME, SENSORS, sensor_named, with_pixels
from wanderers.plans.frame import DEFAULT_MARGIN
from wanderers.plans.request import DEFAULT_CLOUDY, DEFAULT_SPARES, CampaignRequest
from wanderers.plans.rules import EVERY_DAY, CampaignRules, default_rules
from wanderers.report.campaign.contents import CameraChoice
from wanderers.site.visibility import Criteria

Command = TypeVar("Command", bound=Callable[..., Any])

FAR: Final[dict[str, Any]] = {
    "type": click.FloatRange(0.0, 180.0),
    "show_default": True,
    "metavar": "DEG",
}
MODEL: Final = CampaignRules()
HOW_MANY: Final = "How many nights to plan. [default: one in seven of the usable ones]"
HOW_FAR_APART: Final = "Or how far apart along the path."
HOW_CLOUDY: Final = f"Share of nights lost to clouds. [default: {DEFAULT_CLOUDY:g}]"
HOW_MANY_SPARES: Final = (
    f"Nights that stand in for each night that must not be missed. [default: {DEFAULT_SPARES}]"
)
WHICH_DAYS: Final = "Evenings of these weekdays only, as fri,sat."
HOW_HIGH: Final = "Least altitude. [default: 20; Mercury and Venus 8]"
HOW_DARK: Final = "Highest altitude of the Sun. [default: -12; Mercury and Venus -6]"
BRIGHT_MOON: Final = "Distance to keep from a Moon more than half lit."
FAINT_MOON: Final = "Distance to keep from a Moon less lit."
WHICH_SENSOR: Final = f"Sensor: {', '.join(SENSORS)}, or WIDTHxHEIGHT in mm. [default: {FULL_FRAME.name}]"
SHARE: Final = click.FloatRange(0.0, 1.0, max_open=True)
PART: Final = click.FloatRange(0.0, 0.45)
HOW_MANY_PIXELS: Final = "Pixels of the sensor, as 6000x4000."
WHICH_LENS: Final = "Focal length. [default: the longest usual one that holds the path]"
HOW_MUCH_ROOM: Final = f"Part of each side that stays free. [default: {DEFAULT_MARGIN:g}]"
WHICH_ROLL: Final = "Position angle of the camera's upper side. [default: turned for the longest lens]"


def rules_options(command: Command) -> Command:
    """Add what a night must offer; the command receives ``body`` and ``rules``."""

    @click.option("--weekdays", type=Weekdays(), metavar="DAYS", help=WHICH_DAYS)
    @click.option("--min-altitude", type=click.FloatRange(0.0, 89.0), metavar="DEG", help=HOW_HIGH)
    @click.option("--sun-below", type=click.FloatRange(-90.0, 0.0), metavar="DEG", help=HOW_DARK)
    @click.option("--moon-distance", default=MODEL.moon_bright_deg, **FAR, help=BRIGHT_MOON)
    @click.option("--thin-moon-distance", default=MODEL.moon_faint_deg, **FAR, help=FAINT_MOON)
    @click.option("--extinction", type=LOSS, metavar="MAG", help=HOW_CLEAR)
    @click.option(
        "--dark-sky", type=BLACKNESS, default=21.0, show_default=True, metavar="MAG", help=HOW_BLACK
    )
    @functools.wraps(command)
    def wrapped(
        *args: Any,
        body: Body,
        weekdays: frozenset[int] | None,
        min_altitude: float | None,
        sun_below: float | None,
        moon_distance: float,
        thin_moon_distance: float,
        extinction: float | None,
        dark_sky: float,
        **kwargs: Any,
    ) -> Any:
        usual = default_rules(body)
        rules = replace(
            usual,
            min_altitude_deg=usual.min_altitude_deg if min_altitude is None else min_altitude,
            sun_below_deg=usual.sun_below_deg if sun_below is None else sun_below,
            moon_bright_deg=moon_distance,
            moon_faint_deg=thin_moon_distance,
            weekdays=tuple(sorted(weekdays)) if weekdays else EVERY_DAY,
            criteria=Criteria(extinction_mag=extinction, dark_zenith_mag=dark_sky),
        )
        return command(*args, body=body, rules=rules, **kwargs)

    return wrapped  # type: ignore[return-value]


def night_options(command: Command) -> Command:
    """Add how many nights are wanted, and against which clouds; the command receives ``request``."""

    @click.option("--nights", type=click.IntRange(1), metavar="N", help=HOW_MANY)
    @click.option("--every", type=click.FloatRange(0.0, min_open=True), metavar="DEG", help=HOW_FAR_APART)
    @click.option("--cloudy", type=SHARE, default=DEFAULT_CLOUDY, metavar="SHARE", help=HOW_CLOUDY)
    @click.option("--spares", type=click.IntRange(0), default=DEFAULT_SPARES, help=HOW_MANY_SPARES)
    @rules_options
    @functools.wraps(command)
    def wrapped(
        *args: Any,
        body: Body,
        rules: CampaignRules,
        nights: int | None,
        every: float | None,
        cloudy: float,
        spares: int,
        **kwargs: Any,
    ) -> Any:
        request = CampaignRequest(
            body, dt.date.today(), rules=rules, nights=nights, every_deg=every, cloudy=cloudy, spares=spares
        )
        return command(*args, body=body, request=request, **kwargs)

    return wrapped  # type: ignore[return-value]


def camera_options(command: Command) -> Command:
    """Add the camera; the command receives ``camera``."""

    @click.option("--sensor", default=FULL_FRAME.name, metavar="NAME|WxH", help=WHICH_SENSOR)
    @click.option("--pixels", "pixels_text", metavar="WxH", help=HOW_MANY_PIXELS)
    @click.option("--lens", type=click.FloatRange(0.0, min_open=True), metavar="MM", help=WHICH_LENS)
    @click.option("--margin", type=PART, default=DEFAULT_MARGIN, help=HOW_MUCH_ROOM)
    @click.option("--roll", type=click.FloatRange(-360.0, 360.0), metavar="DEG", help=WHICH_ROLL)
    @functools.wraps(command)
    def wrapped(
        *args: Any,
        sensor: str,
        pixels_text: str | None,
        lens: float | None,
        margin: float,
        roll: float | None,
        **kwargs: Any,
    ) -> Any:
        chosen = sensor_named(sensor)
        if pixels_text is not None:
            chosen = with_pixels(chosen, pixels_text)
        return command(*args, camera=CameraChoice(chosen, lens, margin, roll), **kwargs)

    return wrapped  # type: ignore[return-value]
