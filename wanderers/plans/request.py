"""What is asked of a campaign, and how its nights should therefore lie."""

from __future__ import annotations

from dataclasses import dataclass
from datetime import date, timedelta
from typing import Final

import numpy as np
import polars as pl

from wanderers.arrays import Floats
from wanderers.ephemeris.bodies import Body
from wanderers.errors import UsageProblem
from wanderers.plans.replan import LoggedNight
from wanderers.plans.rules import CampaignRules
from wanderers.plans.season import LEAD_DAYS, NEXT, TAIL_DAYS, CampaignSeason, date_of

HALF_A_DAY: Final = 0.5
DAYS_A_FRAME: Final = 7.0
"""One frame every 5 to 9 days is what published composites of loops show."""
BEND_STEPS: Final = 1.5
"""How many steps a full turn about counts for, beyond its length. No source: a choice."""
NEAR_STEPS: Final = 0.5
NEAREST_DEG: Final = 0.1
FARTHEST_DEG: Final = 0.5
"""A night within half a step of a moment serves it, but never one more than a Moon's width away, nor is less
than a tenth of a degree asked. No source: a choice."""
DEFAULT_CLOUDY: Final = 0.5
DEFAULT_SPARES: Final = 3


@dataclass(frozen=True, slots=True)
class CampaignRequest:
    """What is asked of a campaign.

    Attributes:
        body: the planet.
        now: the date from which the season ``next`` counts, and before which nothing new is planned for it.
        season: ``next``, a year or a season_id.
        lead_days: days before the first pass.
        tail_days: days after the third pass.
        rules: what a night must offer; None for the body's usual rules.
        nights: how many to plan.
        every_deg: or how far apart along the path. With neither, one night in seven.
        cloudy: share of nights lost to clouds, 0 up to 1.
        spares: nights that stand in for each must-night.
        log: nights that have passed.
        skip: evenings that cannot be used.
        today: first evening that can still be used; None for the one after the last logged. Planned nights
            before it that were not logged are lost.
    """

    body: Body
    now: date
    season: str = NEXT
    lead_days: float = LEAD_DAYS
    tail_days: float = TAIL_DAYS
    rules: CampaignRules | None = None
    nights: int | None = None
    every_deg: float | None = None
    cloudy: float = DEFAULT_CLOUDY
    spares: int = DEFAULT_SPARES
    log: tuple[LoggedNight, ...] = ()
    skip: tuple[date, ...] = ()
    today: date | None = None

    def __post_init__(self) -> None:
        """Refuse what no plan can follow.

        Raises:
            UsageProblem: both nights and a step, or a number out of range.
        """
        if self.nights is not None and self.every_deg is not None:
            raise UsageProblem("give a number of nights or a step along the path, not both")
        if self.nights is not None and self.nights < 1:
            raise UsageProblem(f"{self.nights} nights are no campaign: give 1 or more")
        if self.every_deg is not None and not self.every_deg > 0.0:
            raise UsageProblem(f"a step of {self.every_deg:g} degrees along the path must be above 0")
        if not 0.0 <= self.cloudy < 1.0:
            raise UsageProblem(f"a share of {self.cloudy:g} nights lost is not from 0 up to 1, as 0.6")
        if self.spares < 0:
            raise UsageProblem(f"{self.spares} spare nights: give 0 or more")

    @property
    def first_open(self) -> date | None:
        """First evening that can still be planned; None for all."""
        if self.today is not None:
            return self.today
        if self.log:
            return max(night.evening for night in self.log) + timedelta(days=1)
        return self.now if self.season == NEXT else None

    @property
    def reports(self) -> bool:
        """Whether what happened is known, so that what was planned and not reported is lost."""
        return bool(self.log) or self.today is not None


@dataclass(frozen=True, slots=True)
class Aim:
    """How a campaign's nights should lie along the path.

    Attributes:
        count: nights wanted.
        length_deg: of the path from beginning to end.
        step_deg: the even step along the path.
        bend_deg: path that a degree of turning counts for.
        near_deg: how far from a moment, along the path, a night still serves it.
    """

    count: int
    length_deg: float
    step_deg: float
    bend_deg: float
    near_deg: float


def evening_span(season: CampaignSeason) -> tuple[np.datetime64, np.datetime64]:
    """Return the first evening date of a campaign, and the date after the last."""
    return np.datetime64(date_of(season.start_jd)), np.datetime64(date_of(season.end_jd)) + 1


def aim_of(season: CampaignSeason, request: CampaignRequest, nights: pl.DataFrame) -> Aim:
    """Return how many nights are wanted and how they should lie.

    A number asked for is taken as it is. A step, along the path or in time, gives as many nights as are met
    going along the usable ones by no less than that step: stretches without any ask for none.
    """
    length = season.path.reached_deg(season.end_jd) - season.path.reached_deg(season.start_jd)
    usable = nights.filter(pl.col("usable"))
    if request.nights is not None:
        count, step = request.nights, length / (request.nights + 1)
    elif request.every_deg is not None:
        count, step = paces(usable["path_deg"].to_numpy(), request.every_deg), request.every_deg
    else:
        count = paces(usable["nominal_jd"].to_numpy(), DAYS_A_FRAME - HALF_A_DAY)
        step = length * DAYS_A_FRAME / (season.end_jd - season.start_jd)
    near = min(max(NEAR_STEPS * step, NEAREST_DEG), FARTHEST_DEG)
    return Aim(count, length, step, BEND_STEPS * step / 180.0, near)


def paces(position: Floats, step: float) -> int:
    """Return how many of the positions, rising, are met going on by no less than a step each time."""
    count, at = 0, 0
    while at < position.size:
        count += 1
        at = int(np.searchsorted(position, position[at] + step, side="left"))
    return count
