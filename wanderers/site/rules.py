"""What a night must offer before something counts as watchable."""

from __future__ import annotations

from dataclasses import dataclass, field

from wanderers.site.visibility import Criteria


@dataclass(frozen=True, slots=True)
class Rules:
    """What is asked of a watchable window.

    Attributes:
        min_altitude_deg: least altitude, as seen; the site's horizon counts where it is higher.
        sun_below_deg: highest altitude of the Sun's centre, without refraction.
        criteria: what counts as visible.
    """

    min_altitude_deg: float = 10.0
    sun_below_deg: float = -6.0
    criteria: Criteria = field(default_factory=Criteria)
