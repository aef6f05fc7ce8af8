"""The list of bodies, its order, and the figures that go with each."""

from __future__ import annotations

from itertools import pairwise

import pytest
from hypothesis import given
from hypothesis import strategies as st

from wanderers.ephemeris.bodies import (
    BODIES,
    EQUATORIAL_RADIUS_KM,
    INNER,
    NAIF_CHAINS,
    NAKED_EYE_PLANETS,
    OUTER,
    PLANETS,
    Body,
    body_named,
)
from wanderers.errors import UnknownNameError

NAMES = "sun moon mercury venus mars jupiter saturn uranus neptune pluto".split()

# NAIF integer codes: NAIF Integer ID codes, required reading of JPL's toolkit. Mars to Pluto: the barycentres
# of their systems, which is what planetary kernels hold.
CODES = dict(zip(NAMES, (10, 301, 199, 299, 4, 5, 6, 7, 8, 9), strict=True))

# Equatorial radii, km: Archinal et al. 2018 (IAU working group, report of 2015), Tables 4 and 5; the Sun: IAU
# 2015 Resolution B3. From memory.
RADII_KM = {
    "sun": 695_700.0,
    "moon": 1_737.4,
    "mercury": 2_440.53,
    "venus": 6_051.8,
    "mars": 3_396.19,
    "jupiter": 71_492.0,
    "saturn": 60_268.0,
    "uranus": 25_559.0,
    "neptune": 24_764.0,
    "pluto": 1_188.3,
}


def test_bodies_come_in_the_order_in_which_pairs_are_written() -> None:
    assert [body.value for body in BODIES] == NAMES
    assert [body.order for body in BODIES] == list(range(10))


def test_groups_are_told_by_who_goes_round_inside_the_earths_orbit() -> None:
    assert [body.value for body in INNER] == ["mercury", "venus"]
    assert set(INNER) | set(OUTER) == set(PLANETS)
    assert set(NAKED_EYE_PLANETS) == {Body(name) for name in NAMES[2:7]}


@pytest.mark.parametrize("name", NAMES)
def test_chain_ends_at_the_bodys_code_and_hangs_together(name: str) -> None:
    chain = NAIF_CHAINS[Body(name)]
    assert chain[0][0] == 0
    assert chain[-1][1] == CODES[name]
    assert all(before[1] == after[0] for before, after in pairwise(chain))


@pytest.mark.parametrize("name", NAMES)
def test_radius_is_the_working_groups(name: str) -> None:
    assert EQUATORIAL_RADIUS_KM[Body(name)] == RADII_KM[name]


@pytest.mark.parametrize("given_name", ["mars", "Mars", " MARS ", "mArS\n"])
def test_case_and_blanks_do_not_matter(given_name: str) -> None:
    assert body_named(given_name) is Body.MARS


@pytest.mark.parametrize(("given_name", "nearest"), [("marz", "mars"), ("Jupitre", "jupiter"), ("sol", "")])
def test_an_unknown_name_is_answered_with_the_nearest(given_name: str, nearest: str) -> None:
    with pytest.raises(UnknownNameError) as caught:
        body_named(given_name)
    assert given_name in str(caught.value)
    assert nearest in str(caught.value)
    assert caught.value.given == given_name
    assert isinstance(caught.value, LookupError)


@given(st.text(max_size=20))
def test_any_text_is_a_body_or_an_error_that_lists_bodies(text: str) -> None:
    if text.strip().lower() in NAMES:
        assert body_named(text).value == text.strip().lower()
        return
    with pytest.raises(UnknownNameError) as caught:
        body_named(text)
    assert any(name in str(caught.value) for name in NAMES)


def test_labels_begin_with_a_capital() -> None:
    assert [body.label for body in BODIES] == [name.capitalize() for name in NAMES]
