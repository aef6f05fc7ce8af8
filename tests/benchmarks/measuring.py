"""What is measured, and how: time that passed, processor time and memory, here or in a process of its own."""

from __future__ import annotations

import multiprocessing
import os
import resource
import time
from collections.abc import Callable
from concurrent.futures import ProcessPoolExecutor
from dataclasses import dataclass
from typing import Any, TypeVar

Result = TypeVar("Result")


@dataclass(frozen=True, slots=True)
class Spent:
    """Seconds that passed, and processor seconds of all processes."""

    passed_s: float
    processor_s: float

    def __str__(self) -> str:
        return f"{self.passed_s:8.2f} s ({self.processor_s:.2f})"


@dataclass(frozen=True, slots=True)
class Row:
    """One line of the table."""

    work: str
    ours: Spent
    against: str
    theirs: Spent

    def __str__(self) -> str:
        faster = self.theirs.passed_s / self.ours.passed_s
        sparer = self.theirs.processor_s / self.ours.processor_s
        return (
            f"{self.work:<50} {self.ours}  {self.against:<20} {self.theirs}"
            f"  {faster:8.2f} x ({1.0 / faster:.2f})  processor {sparer:8.2f} x ({1.0 / sparer:.2f})"
        )


@dataclass(frozen=True, slots=True)
class Run:
    """What some work took in a process of its own, what came of it, and its peak memory in words."""

    spent: Spent
    result: int
    peaks: str


def timed(work: Callable[[], Result]) -> tuple[Spent, Result]:
    """Return what some work took, and its result."""
    start, start_processor = time.perf_counter(), processor_s()
    result = work()
    return Spent(time.perf_counter() - start, processor_s() - start_processor), result


def processor_s() -> float:
    """Return processor seconds of this process and of those it waited for."""
    times = os.times()
    return times.user + times.system + times.children_user + times.children_system


def alone(work: Callable[..., int], *arguments: Any) -> Run:
    """Do some work in a process of its own, as a user's command does, and measure it there."""
    with ProcessPoolExecutor(1, multiprocessing.get_context("spawn")) as pool:
        return pool.submit(_measured, work, *arguments).result()


def _measured(work: Callable[..., int], *arguments: Any) -> Run:
    spent, result = timed(lambda: work(*arguments))
    return Run(spent, result, _peaks())


def _peaks() -> str:
    """Say the peak of this process so far, and of its largest worker, which shares most of it."""
    own, worker = (
        resource.getrusage(who).ru_maxrss / 1e6 for who in (resource.RUSAGE_SELF, resource.RUSAGE_CHILDREN)
    )
    return f"peak memory {own:.2f} GB, of a worker {worker:.2f} GB, most of it shared"
