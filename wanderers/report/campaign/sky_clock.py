"""Sun, Moon and planet over every evening of a campaign, by the clock."""

from __future__ import annotations

from dataclasses import dataclass
from typing import Final

import numpy as np

from wanderers.arrays import Floats
from wanderers.constants import SECONDS_PER_DAY
from wanderers.ephemeris.appearance import lit_part
from wanderers.ephemeris.sky import Sky
from wanderers.ephemeris.store import TrackStore
from wanderers.ephemeris.timescales import jd_utc_from_tt
from wanderers.plans.campaign import Campaign
from wanderers.plans.request import evening_span
from wanderers.site.evenings import evenings
from wanderers.site.look import heaven, view_body
from wanderers.site.zones import UNIX_EPOCH_JD, Days

STEPS: Final = 72
"""Parts of an evening: 20 minutes. Between them altitudes are nearly straight."""
HOURS: Final = 24.0


@dataclass(frozen=True, slots=True, eq=False)
class SkyClock:
    """The sky over n evenings at m clock times.

    Attributes:
        days: evening dates, shape (n,).
        noon_jd: TT at which each evening begins, shape (n,).
        hour: by the clock, counted from the beginning of the evening's date (23 is 11 in the evening, 26 is
            2 in the morning of the next date), rising, shape (m,).
        sun_altitude_deg: without refraction, shape (m, n).
        moon_altitude_deg: as seen; NaN where the kernel has no Moon.
        moon_illuminated: at the middle of each evening, shape (n,).
        above_limit_deg: by how much the planet stands above the least altitude asked for, or above the
            site's horizon where that is higher, shape (m, n).
    """

    days: Days
    noon_jd: Floats
    hour: Floats
    sun_altitude_deg: Floats
    moon_altitude_deg: Floats
    moon_illuminated: Floats
    above_limit_deg: Floats

    @property
    def day_jd(self) -> Floats:
        """Place of each evening on a time axis: its date as a Julian Day number, shape (n,)."""
        return _day_jd(self.days)

    def hour_of(self, day_jd: Floats, jd_tt: Floats) -> Floats:
        """Return the clock time of instants in evenings given by ``day_jd``, shape (k,), as ``hour``."""
        noon = np.interp(day_jd, self.day_jd, self.noon_jd)
        return np.asarray(self.hour[0] + HOURS * (jd_tt - noon))


def _day_jd(days: Days) -> Floats:
    """Return calendar dates as Julian Day numbers, shape (n,)."""
    return np.asarray(UNIX_EPOCH_JD + days.astype("datetime64[D]").astype(np.int64))


def sky_clock(store: TrackStore, campaign: Campaign) -> SkyClock:
    """Sample the sky over the evenings of a campaign."""
    site, body = campaign.site, campaign.season.body
    some = evenings(site, *evening_span(campaign.season))
    start = some.start_jd
    jd = start + np.linspace(0.0, 1.0, STEPS + 1)[:, np.newaxis]
    sky = Sky(store.tracks(float(jd.min()), float(jd.max())))
    over = heaven(sky, site, jd.ravel())
    seen = view_body(sky, over, body.order)
    hills = site.horizon.altitude_deg(seen.place.azimuth_deg)
    limit = np.maximum(hills, campaign.rules.min_altitude_deg)
    noon_utc = jd_utc_from_tt(start)
    clock = noon_utc + some.zone.offset_s(noon_utc) / SECONDS_PER_DAY
    begins = round(float(np.median(HOURS * (clock - _day_jd(some.days)))), 4)
    return SkyClock(
        days=some.days,
        noon_jd=start,
        hour=begins + np.linspace(0.0, HOURS, STEPS + 1),
        sun_altitude_deg=over.sun_altitude_deg.reshape(jd.shape),
        moon_altitude_deg=over.moon_altitude_deg.reshape(jd.shape),
        moon_illuminated=lit_part(over.moon_phase_angle_deg).reshape(jd.shape)[STEPS // 2],
        above_limit_deg=(seen.altitude_deg - limit).reshape(jd.shape),
    )
