"""Apparitions in words: the criterion, what is out of the ordinary, and cautions."""

from __future__ import annotations

from collections.abc import Mapping
from typing import Any, Final

from wanderers.ephemeris.bodies import Body
from wanderers.site.cycles_of_sight import BOTH
from wanderers.site.lineup_nights import Aid
from wanderers.site.reasons import NEAR_SUN_DEG
from wanderers.site.sight_moments import sun_limits_deg
from wanderers.site.visibility import Criteria

WORTH_SAYING_DAYS: Final = 10
"""Evenings without sight, inside an apparition, from which they are mentioned."""
LATE_DEG: Final = 45.0
"""Elongation of a first or last sight, of a planet beyond the Earth, from which it is not the Sun's glare."""
SIGHT_WORDS: Final = {"first": "at first sight", "last": "at last sight", "best": "at its best"}


def criterion(body: Body, criteria: Criteria, aid: Aid) -> str:
    """Say by what first and last sights are found."""
    early, usual, late = (f"{limit:.3g}" for limit in sun_limits_deg(body, aid))
    sun = f"the Sun at {usual} or lower" if early != late else "the Sun down"
    varied = f"the Sun at {early} or {late}, " if early != late else ""
    arcus = f"arcus visionis {criteria.arcus_base_deg:g} + {criteria.arcus_deg_per_mag:g} m"
    return (
        f"likely: threshold of the eye (Hecht, Schaefer) on the sky (Krisciunas and Schaefer) and {arcus}, "
        f"{sun}, looking where it must be; earliest and latest: {varied}clear or hazy air, {arcus} alone, "
        "not knowing where to look"
    )


def remark(
    row: Mapping[str, Any], gap: tuple[str, str, int] | None, *, begins: bool, ends: bool
) -> str | None:
    """Say what is out of the ordinary, None if nothing."""
    parts = []
    if row.get("best_evening") is None:
        clear = row["first_sight_earliest"] or row["last_sight_latest"]
        parts.append("at most in very clear air" if clear else "cannot be seen from here")
    elif row["first_sight_haze_days"] is None and row["last_sight_haze_days"] is None and (begins or ends):
        parts.append("in haze not at all")
    if row.get("best_evening") is not None and not row["best_at_civil_hour"]:
        parts.append("only at an uncivil hour")
    elif row.get("best_evening") is not None and row["weeks_nights"] == 0:
        parts.append("never as high as asked for at a civil hour")
    if begins and (row.get("first_sight_elongation_deg") or 0.0) > LATE_DEG and row["kind"] == BOTH:
        parts.append("first sight waits for darker nights, or until it climbs high enough")
    if ends and (row.get("last_sight_elongation_deg") or 0.0) > LATE_DEG and row["kind"] == BOTH:
        parts.append("last sight comes early: the nights grow light, or it stays too low")
    if gap is not None and gap[2] >= WORTH_SAYING_DAYS:
        parts.append(f"not seen from {gap[0]} to {gap[1]}")
    if not begins:
        parts.append("begins before the kernel")
    if not ends:
        parts.append("ends after the kernel")
    return "; ".join(parts) or None


def caution(sights: Mapping[str, tuple[float, str, str | None]]) -> str | None:
    """Return the caution about optics where the planet then stands near the Sun, with sunset or sunrise.

    Args:
        sights: of each moment in SIGHT_WORDS the elongation, the local date, and sunset or sunrise in words.
    """
    near = {
        name: words for name, (elongation_deg, _, words) in sights.items() if elongation_deg < NEAR_SUN_DEG
    }
    if not near:
        return None
    times = ", ".join(words for words in near.values() if words is not None)
    return (
        f"Within {NEAR_SUN_DEG:g} degrees of the Sun {', '.join(SIGHT_WORDS[name] for name in near)}: no "
        f"binoculars or telescope while any of it is up{f' ({times})' if times else ''}"
    )
