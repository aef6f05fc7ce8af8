"""Work done side by side: in order, whatever it is, and with its errors."""

from __future__ import annotations

import os
from collections.abc import Callable

import pytest

from wanderers import processes
from wanderers.processes import side_by_side


@pytest.fixture(params=["copies", "threads", "one core"])
def machine(request: pytest.FixtureRequest, monkeypatch: pytest.MonkeyPatch) -> str:
    monkeypatch.setattr(processes, "CAN_COPY", processes.CAN_COPY and request.param == "copies")
    monkeypatch.setattr(processes, "cores", lambda: 1 if request.param == "one core" else 3)
    return str(request.param)


def adder(number: int) -> Callable[[int], int]:
    """A closure: no executor could be sent it."""
    return lambda task: task + number


@pytest.mark.parametrize("count", [0, 1, 2, 3, 40])
def test_results_come_in_order(machine: str, count: int) -> None:
    assert list(side_by_side(adder(7), range(count))) == [task + 7 for task in range(count)]


def test_an_error_comes_through(machine: str) -> None:
    def fails(task: int) -> int:
        if task == 3:
            raise LookupError("no third")
        return task

    with pytest.raises(LookupError, match="no third"):
        list(side_by_side(fails, range(6)))


@pytest.mark.skipif(not processes.CAN_COPY, reason="this system cannot copy a running process")
def test_copies_are_other_processes_and_a_lone_task_is_not(monkeypatch: pytest.MonkeyPatch) -> None:
    monkeypatch.setattr(processes, "cores", lambda: 2)
    assert os.getpid() not in set(side_by_side(lambda task: os.getpid(), range(8)))
    assert list(side_by_side(lambda task: os.getpid(), [0])) == [os.getpid()]


def test_two_pieces_of_work_at_once_keep_apart(machine: str) -> None:
    one, two = side_by_side(adder(1), range(9)), side_by_side(adder(2), range(9))
    assert list(zip(one, two, strict=True)) == [(task + 1, task + 2) for task in range(9)]
