"""Sentences that the text alternatives share."""

from __future__ import annotations

from collections.abc import Sequence

import numpy as np

from wanderers.report.charts import timeaxis
from wanderers.report.charts.marks import Season


def listed(parts: Sequence[str]) -> str:
    """Return parts as prose lists them: ``a, b and c``."""
    return " and ".join([", ".join(parts[:-1]), parts[-1]] if len(parts) > 1 else parts)


def season_sentence(season: Season) -> str:
    """Return when a planet runs backwards, how far, and what lies in the middle."""
    text = (
        f"{season.body.label} runs backwards from {timeaxis.long_day_text(season.turns_back)} to "
        f"{timeaxis.long_day_text(season.turns_on)}, by {season.arc_deg:.1f} degrees of longitude in "
        f"{season.retrograde_days:.0f} days"
    )
    middle = season.instants["middle"]
    if np.isnan(middle):
        return f"{text}."
    return f"{text}, with {season.middle_word} on {timeaxis.long_day_text(middle)}."


def separation_text(separation_deg: float) -> str:
    """Return a separation as it is read on a chart: in degrees, arcminutes or arcseconds, whichever suits."""
    minutes = separation_deg * 60.0
    if round(minutes) >= 60:
        return f"{separation_deg:.1f}°"
    return f"{minutes:.0f}′" if minutes >= 1.0 else f"{minutes * 60.0:.0f}″"


def separation_words(separation_deg: float) -> str:
    """Return a separation as it is read aloud."""
    return (
        separation_text(separation_deg)
        .replace("°", " degrees")
        .replace("′", " arcminutes")
        .replace("″", " arcseconds")
    )
