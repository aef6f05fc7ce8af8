"""What a campaign asks of a night."""

from __future__ import annotations

from dataclasses import dataclass, field
from typing import Final

import numpy as np

from wanderers.arrays import Floats
from wanderers.ephemeris.bodies import INNER, Body
from wanderers.errors import UsageProblem
from wanderers.site.hours import WEEKDAY_NAMES
from wanderers.site.rules import Rules
from wanderers.site.visibility import Criteria

EVERY_DAY: Final = tuple(range(7))
LOOP_ALTITUDE_DEG: Final = 20.0
LOOP_SUN_DEG: Final = -12.0
INNER_ALTITUDE_DEG: Final = 8.0
INNER_SUN_DEG: Final = -6.0
"""Least height and greatest light for a frame of a loop with its stars; Mercury and Venus never stand high in
a dark sky. Common practice, no source."""


@dataclass(frozen=True, slots=True)
class CampaignRules:
    """What a night must offer to be usable.

    Attributes:
        min_altitude_deg: least altitude, as seen.
        sun_below_deg: highest altitude of the Sun's centre, without refraction.
        moon_bright_deg: least separation from a Moon lit by more than ``moon_half``, while it is up.
        moon_faint_deg: likewise from a Moon lit less. 30 and 10 degrees: common practice, no source.
        moon_half: illuminated part of the disc.
        weekdays: of the evening date, Monday 0.
        min_window_minutes: shortest window worth setting up for. Common practice, no source.
        criteria: what counts as visible; asked only where twilight is allowed, for a camera records in a
            dark sky what the eye misses.
    """

    min_altitude_deg: float = LOOP_ALTITUDE_DEG
    sun_below_deg: float = LOOP_SUN_DEG
    moon_bright_deg: float = 30.0
    moon_faint_deg: float = 10.0
    moon_half: float = 0.5
    weekdays: tuple[int, ...] = EVERY_DAY
    min_window_minutes: float = 20.0
    criteria: Criteria = field(default_factory=Criteria)

    def __post_init__(self) -> None:
        """Refuse rules that nothing can keep.

        Raises:
            UsageProblem: an altitude or a separation out of range, or no weekday.
        """
        if not 0.0 <= self.min_altitude_deg < 90.0:
            raise UsageProblem(
                f"a least altitude of {self.min_altitude_deg:g} is not from 0 up to 90 degrees"
            )
        if not -90.0 <= self.sun_below_deg <= 0.0:
            raise UsageProblem(f"a Sun at {self.sun_below_deg:g} is not within -90 to 0 degrees")
        if not all(0.0 <= limit <= 180.0 for limit in (self.moon_bright_deg, self.moon_faint_deg)):
            raise UsageProblem("the distance to keep from the Moon must be within 0 to 180 degrees")
        if not self.weekdays or not set(self.weekdays) <= set(EVERY_DAY):
            raise UsageProblem(f"choose weekdays from {', '.join(WEEKDAY_NAMES)}")

    @property
    def watch(self) -> Rules:
        """The part of the rules that opens and closes windows."""
        return Rules(self.min_altitude_deg, self.sun_below_deg, self.criteria)

    @property
    def weekdays_asked(self) -> tuple[int, ...]:
        """Weekdays of the evenings that come into question, rising; none where every evening does."""
        asked = tuple(sorted(set(self.weekdays)))
        return () if asked == EVERY_DAY else asked

    def moon_limit_deg(self, lit: Floats) -> Floats:
        """Return the separation to keep from a Moon of which that part is lit, shape (n,)."""
        return np.where(lit > self.moon_half, self.moon_bright_deg, self.moon_faint_deg)

    @property
    def in_twilight(self) -> bool:
        """Whether the eye's limits count."""
        return self.sun_below_deg > LOOP_SUN_DEG


def default_rules(body: Body) -> CampaignRules:
    """Return the usual rules for a body."""
    if body in INNER:
        return CampaignRules(min_altitude_deg=INNER_ALTITUDE_DEG, sun_below_deg=INNER_SUN_DEG)
    return CampaignRules()
