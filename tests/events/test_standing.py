"""Standing: the nearest better events before and after, checked slowly and against published claims."""

from __future__ import annotations

import numpy as np
import pytest
from hypothesis import given
from hypothesis import strategies as st

from tests.reference.published import jd_of_date
from wanderers.ephemeris.bodies import Body
from wanderers.ephemeris.store import TrackStore
from wanderers.events.almanac import almanac
from wanderers.events.catalogue import Query
from wanderers.events.kinds import Kind
from wanderers.events.scene import Choice
from wanderers.events.standing import nearest_better, with_standing


def slowly(group: list[int], jd: list[float], figure: list[float]) -> tuple[list[float], list[float]]:
    """Look at every pair of events."""
    before, after = [], []
    for own, at, value in zip(group, jd, figure, strict=True):
        better = [
            other_jd
            for other, other_jd, other_value in zip(group, jd, figure, strict=True)
            if other == own and other_value < value
        ]
        before.append(max((one for one in better if one < at), default=np.nan))
        after.append(min((one for one in better if one > at), default=np.nan))
    return before, after


@given(
    st.lists(st.tuples(st.integers(0, 2), st.integers(0, 5)), min_size=1, max_size=40),
    st.randoms(use_true_random=False),
)
def test_nearest_better_is_what_a_look_at_all_pairs_finds(
    rows: list[tuple[int, int]], random: object
) -> None:
    jd = [float(day) for day in range(len(rows))]
    random.shuffle(jd)  # type: ignore[attr-defined]
    group, figure = [row[0] for row in rows], [float(row[1]) for row in rows]
    ours = nearest_better(np.array(group), np.array(jd), np.array(figure))
    before, after = slowly(group, jd, figure)
    np.testing.assert_array_equal(ours.before_jd, before)
    np.testing.assert_array_equal(ours.after_jd, after)


def test_an_equal_event_is_not_better() -> None:
    ours = nearest_better(np.zeros(3, dtype=np.int64), np.array([1.0, 2.0, 3.0]), np.array([5.0, 5.0, 4.0]))
    assert np.isnan(ours.before_jd).all()
    np.testing.assert_array_equal(ours.after_jd, [3.0, 3.0, np.nan])


@pytest.mark.long
def test_jupiter_and_saturn_were_not_as_close_from_1623_to_2080(store: TrackStore) -> None:
    # Published widely in 2020 (from memory): closest since 1623 July 16, not closer until 2080 March 15.
    choice = Choice((Body.JUPITER, Body.SATURN), stars_for=())
    span = jd_of_date("2020-12-01"), jd_of_date("2021-01-10")
    query = Query(*span, frozenset({Kind.APPULSE}), choice=choice)
    (row,) = with_standing(store, query, almanac(store, query)).iter_rows(named=True)
    assert row["utc"][:10] == "2020-12-21"
    assert row["better_before_utc"][:10] == "1623-07-16"
    assert row["better_after_utc"][:10] in {"2080-03-14", "2080-03-15"}
    assert row["searched_from_utc"] < "1551" and row["searched_to_utc"] > "2649"
