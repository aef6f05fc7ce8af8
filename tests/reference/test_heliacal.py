"""The arcus visionis in use here against historical values, which were found with the bare eye."""

from __future__ import annotations

import numpy as np
import pytest

from tests.reference.published import rows
from wanderers.site.visibility import Criteria, arcus_visionis_deg

ROWS = rows("heliacal")
SPREAD_DEG = 4.0
"""How far Ptolemy's and Schoch's own values for one planet lie apart: Mercury 10 against 9.5 to 13, Mars 11.5
against 14.5, Saturn 11 against 13. The rule of magnitude must not stray further from any of them."""


@pytest.mark.parametrize(
    "row", [row for row in ROWS if row["measure"] == "arcus_visionis"], ids=lambda row: row["id"]
)
def test_rule_of_magnitude_stays_within_the_spread_of_historical_values(row: dict[str, str]) -> None:
    rule = arcus_visionis_deg(np.array([float(row["magnitude"])]), Criteria())[0]
    assert rule == pytest.approx(float(row["published_deg"]), abs=SPREAD_DEG)


def test_rule_puts_the_planets_in_the_order_of_ptolemy() -> None:
    # Almagest XIII.7 (from memory): Venus 5, Mercury and Jupiter 10, Saturn 11, Mars 11.5.
    ptolemy = {row["body"]: row for row in ROWS if row["id"] <= "P-HE-05"}
    given = sorted(ptolemy, key=lambda body: float(ptolemy[body]["published_deg"]))
    rule = {
        body: arcus_visionis_deg(np.array([float(row["magnitude"])]), Criteria())[0]
        for body, row in ptolemy.items()
    }
    assert given[0] == min(rule, key=rule.__getitem__) == "venus"
    assert given[-1] == max(rule, key=rule.__getitem__) == "mars"


def test_rule_puts_the_planets_in_the_order_of_bhaskara() -> None:
    # Mahabhaskariya vi.44: degrees of time from the Sun, 4 minutes of oblique ascension each. Another
    # measure, so only the order is compared: Venus, Jupiter, Mercury, Saturn, Mars.
    limits = [row for row in ROWS if row["measure"] == "degrees_of_time"]
    limits.sort(key=lambda row: float(row["published_deg"]))
    rule = arcus_visionis_deg(np.array([float(row["magnitude"]) for row in limits]), Criteria())
    assert len(limits) == 5
    assert (np.diff(rule) > 0.0).all()
