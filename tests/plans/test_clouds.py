"""Chances under clouds against scipy's binomial law and against every outcome counted one by one."""

from __future__ import annotations

from itertools import product

import numpy as np
import pytest
from hypothesis import given
from hypothesis import strategies as st
from scipy.stats import binom

from wanderers.plans.clouds import chance_of_all, chance_of_any, expected_count, expected_longest_hole

SHARES = st.floats(0.0, 0.99)


@given(SHARES, st.integers(0, 12))
def test_the_chance_of_any_is_that_of_the_binomial_law(cloudy: float, tries: int) -> None:
    found = chance_of_any(cloudy, np.array([tries]))
    assert found == pytest.approx(binom.sf(0, tries, 1.0 - cloudy), abs=1e-12)


@given(SHARES, st.integers(0, 40))
def test_expected_nights_are_those_of_the_binomial_law(cloudy: float, count: int) -> None:
    clear = np.full(count, 1.0 - cloudy)
    assert expected_count(clear) == pytest.approx(float(binom.mean(count, 1.0 - cloudy)) if count else 0.0)


def test_two_nights_of_three_lost() -> None:
    assert chance_of_any(2.0 / 3.0, np.array([3])) == pytest.approx(19.0 / 27.0)


@given(SHARES, st.lists(st.frozensets(st.sampled_from("abcdefg"), max_size=4), max_size=4))
def test_the_chance_of_all_counts_every_outcome(cloudy: float, groups: list[frozenset[str]]) -> None:
    nights = sorted(frozenset().union(*groups))
    total = 0.0
    for outcome in product((True, False), repeat=len(nights)):
        clear = {night for night, is_clear in zip(nights, outcome, strict=True) if is_clear}
        if all(group & clear for group in groups):
            total += (1.0 - cloudy) ** len(clear) * cloudy ** (len(nights) - len(clear))
    assert chance_of_all(cloudy, groups) == pytest.approx(total, abs=1e-9)


def test_groups_apart_multiply() -> None:
    both = chance_of_all(0.6, [frozenset("abc"), frozenset("de")])
    assert both == pytest.approx(binom.sf(0, 3, 0.4) * binom.sf(0, 2, 0.4))


@given(
    st.lists(st.tuples(st.floats(0.0, 10.0), st.floats(0.0, 1.0)), max_size=7),
)
def test_the_expected_longest_hole_counts_every_outcome(nights: list[tuple[float, float]]) -> None:
    nights = sorted(nights)
    position = np.array([place for place, _ in nights], dtype=np.float64)
    clear = np.array([chance for _, chance in nights], dtype=np.float64)
    expected = 0.0
    for outcome in product((True, False), repeat=len(nights)):
        kept = np.array(outcome, dtype=np.bool_)
        hole = np.max(np.diff(np.concatenate([[0.0], position[kept], [10.0]])))
        expected += float(hole * np.prod(np.where(kept, clear, 1.0 - clear)))
    assert expected_longest_hole(position, clear, 0.0, 10.0) == pytest.approx(expected, abs=1e-9)


def test_the_expected_longest_hole_agrees_with_throws_of_dice() -> None:
    position, clear = np.linspace(1.0, 39.0, 30), np.full(30, 0.4)
    throws = np.random.default_rng(11).random((20_000, 30)) < 0.4
    holes = [np.max(np.diff(np.concatenate([[0.0], position[kept], [40.0]]))) for kept in throws]
    spread = np.std(holes) / np.sqrt(len(holes))
    assert abs(expected_longest_hole(position, clear, 0.0, 40.0) - np.mean(holes)) < 4.0 * spread
