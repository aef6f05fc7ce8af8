"""What to mind on the nights of a campaign. Local rules come before all of it."""

from __future__ import annotations

import polars as pl

from wanderers.ephemeris.bodies import INNER
from wanderers.report.campaign.contents import CampaignContents
from wanderers.site.reasons import NEAR_SUN_DEG

SUN = (
    "Near the Sun: never sweep with binoculars or a telescope while any of the Sun is up. In the evening "
    "wait until it is fully down, in the morning stop before it rises; cap the finder."
)
SITE = (
    "Have permission for the place; mind footing, cold and traffic; do not work alone; minors go "
    "accompanied. A plan is no promise of weather or safety."
)
LASER = (
    "No laser pointers without the law of the place on your side, and never towards aircraft, vehicles, "
    "people or animals."
)
LOCAL = "Local rules come first."
ALWAYS = (SITE, LASER, LOCAL)
MODEL = (
    "Magnitudes are those of a model and leave out dust storms and the like; times are good to a minute, and "
    "clocks as the zone's rules now stand."
)


def cautions(contents: CampaignContents) -> list[str]:
    """Return the cautions that a campaign's papers carry, the most important first."""
    return [*([SUN] if is_near_sun(contents) else []), *ALWAYS]


def is_near_sun(contents: CampaignContents) -> bool:
    """Return whether a caution about the Sun is due: always for Mercury and Venus."""
    if contents.campaign.season.body in INNER:
        return True
    near = contents.plan.filter(
        pl.col("caution").is_not_null() | (pl.col("elongation_deg") < NEAR_SUN_DEG).fill_null(value=False)
    )
    return not near.is_empty()
