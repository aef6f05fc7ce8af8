"""What the files of a campaign are made of."""

from __future__ import annotations

from dataclasses import replace

import pytest

from tests.report.campaign_samples import campaign, contents
from wanderers.ephemeris.bodies import Body
from wanderers.ephemeris.store import TrackStore
from wanderers.plans.rules import default_rules
from wanderers.report.campaign.contents import CameraChoice, gather_campaign
from wanderers.site.visibility import Criteria

MURKY_MAG = 0.6


def test_comparison_stars_are_dimmed_by_the_air_that_was_named(store: TrackStore) -> None:
    rules = replace(default_rules(Body.MARS), criteria=Criteria(extinction_mag=MURKY_MAG))
    murky = gather_campaign(store, campaign(store, "mars", "hill", rules=rules), CameraChoice())
    table = murky.comparisons.table
    assert table.height > 10
    # Bouguer's law: so many magnitudes an air mass.
    per_airmass = table["extinction_difference_mag"] / table["airmass_difference"]
    assert per_airmass.to_list() == pytest.approx([MURKY_MAG] * table.height)
    usual = contents(store, "mars", "hill").comparisons.table
    assert (usual["extinction_difference_mag"] / usual["airmass_difference"]).max() < 0.4  # type: ignore[operator]
