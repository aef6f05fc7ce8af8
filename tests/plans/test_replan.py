"""Mending a plan: what was done stays, what was lost is made good next to its place."""

from __future__ import annotations

from datetime import date

import numpy as np
import pytest
from hypothesis import given
from hypothesis import strategies as st

from wanderers.plans.choice import Problem, burden, choose
from wanderers.plans.replan import LogError, LoggedNight, Status, mend, read_log

NONE = np.zeros(0, dtype=np.int64)


def line(count: int = 40) -> Problem:
    return Problem(
        position=np.arange(count, dtype=np.float64),
        start=-1.0,
        end=float(count),
        step=4.0,
        cost=np.full(count, 0.1),
        mark=np.array([13.0]),
        weight=np.array([20.0]),
    )


@given(st.sets(st.integers(0, 39), max_size=20), st.integers(3, 10), st.integers(0, 9))
def test_a_skipped_night_changes_only_its_own_hole(unusable: set[int], count: int, which: int) -> None:
    some = line()
    usable = np.array([night not in unusable for night in range(40)])
    places = np.flatnonzero(usable)
    old = places[choose(some.only(places), count).nights]
    gone = old[[which % old.size]]
    new = mend(some, old, lost=gone, done=NONE, open_to_choice=usable)
    assert new.dropped.tolist() == gone.tolist()
    assert set(old.tolist()) - set(gone.tolist()) <= set(new.nights.tolist())
    assert new.added.size <= 1 and gone[0] not in new.nights
    kept = np.setdiff1d(old, gone)
    left = max((night for night in kept.tolist() if night < gone[0]), default=-1)
    right = min((night for night in kept.tolist() if night > gone[0]), default=40)
    assert all(left < night < right and usable[night] for night in new.added.tolist())
    # No other night of the hole, nor none, would be better.
    options = [kept, *(np.union1d(kept, [n]) for n in range(left + 1, right) if usable[n] and n != gone[0])]
    assert burden(some, new.nights) == pytest.approx(min(burden(some, option) for option in options))


def test_skipping_what_was_not_planned_changes_nothing() -> None:
    some, everything = line(), np.ones(40, dtype=np.bool_)
    old = choose(some, 8).nights
    other = np.setdiff1d(np.arange(40), old)[[5]]
    new = mend(some, old, lost=other, done=NONE, open_to_choice=everything)
    assert new.nights.tolist() == old.tolist() and new.added.size == new.dropped.size == 0


def test_done_nights_stay_and_make_lost_ones_good() -> None:
    some, everything = line(), np.ones(40, dtype=np.bool_)
    old = choose(some, 8).nights
    everything[: old[2] + 2] = False
    new = mend(
        some, old, lost=old[[2]], done=np.array([old[0], old[1], old[2] + 1]), open_to_choice=everything
    )
    assert {int(old[0]), int(old[1]), int(old[2] + 1)} <= set(new.nights.tolist())
    assert new.added.size == 0 and set(old[3:].tolist()) <= set(new.nights.tolist())


def test_a_run_of_lost_nights_is_filled_with_no_more_than_were_lost() -> None:
    some, later = line(), np.ones(40, dtype=np.bool_)
    old = choose(some, 8).nights
    later[: old[4]] = False
    new = mend(some, old, lost=old[1:4], done=old[:1], open_to_choice=later)
    assert new.added.size <= 3
    assert (new.added >= old[4]).all() or new.added.size == 0
    assert set(old[4:].tolist()) <= set(new.nights.tolist())


def test_a_log_is_read_with_and_without_status() -> None:
    assert read_log("evening_date\n2027-01-09\n2027-01-05\n") == (
        LoggedNight(date(2027, 1, 5)),
        LoggedNight(date(2027, 1, 9)),
    )
    text = (
        "\N{ZERO WIDTH NO-BREAK SPACE}night,evening_date,status\n1,2027-01-05,Done\n2,2027-01-06,cloudy\n"
        "3,2027-01-07,planned\n4,2027-01-08,\n5,,\n"
    )
    assert [(night.evening.day, night.status) for night in read_log(text)] == [
        (5, Status.DONE),
        (6, Status.LOST),
        (8, Status.DONE),
    ]


@pytest.mark.parametrize(
    ("text", "said"),
    [
        ("", "no column evening_date"),
        ("date\n2027-01-05\n", "no column evening_date"),
        ("evening_date\n2027-02-30\n", "line 2: '2027-02-30' is no date"),
        ("evening_date,status\n2027-02-03,foggy\n", "status 'foggy' is not known"),
        ("evening_date\n2027-02-03\n2027-02-03\n", "stands there twice"),
    ],
)
def test_a_log_that_cannot_be_read_is_refused_with_its_line(text: str, said: str) -> None:
    with pytest.raises(LogError, match=said):
        read_log(text)
