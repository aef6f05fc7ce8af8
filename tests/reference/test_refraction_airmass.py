"""Refraction and air mass against their published examples and tables; sources in the data file."""

from __future__ import annotations

from collections.abc import Callable

import numpy as np
import pytest

from tests.reference.published import rows
from wanderers.arrays import Floats
from wanderers.site.airmass import airmass
from wanderers.site.refraction import refraction_deg, refraction_of_apparent_deg

QUANTITIES: dict[str, Callable[[Floats], Floats]] = {
    "apparent_altitude_arcmin": lambda altitude: (altitude + refraction_deg(altitude)) * 60.0,
    "refraction_of_true_arcmin": lambda altitude: refraction_deg(altitude) * 60.0,
    "refraction_of_apparent_arcsec": lambda altitude: refraction_of_apparent_deg(altitude) * 3_600.0,
    "airmass": airmass,
}


@pytest.mark.parametrize("row", rows("refraction_airmass"), ids=lambda row: row["id"])
def test_published_value_comes_out(row: dict[str, str]) -> None:
    found = QUANTITIES[row["quantity"]](np.array([float(row["altitude_deg"])]))[0]
    assert found == pytest.approx(float(row["published"]), abs=float(row["tolerance"])), row[
        "tolerance_reason"
    ]
