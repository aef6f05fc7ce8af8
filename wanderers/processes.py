"""Work side by side on all cores of this machine.

Where the system can copy a running process, as Linux does, work is done by copies of this one: they begin at
once with everything that is loaded here, and small numpy calls, which hold the interpreter's lock, do not
wait for each other. Elsewhere it is done by threads. Work given to copies must use nothing that keeps threads
of its own, as polars does.
"""

from __future__ import annotations

import multiprocessing
import os
import signal
import sys
import threading
import warnings
from collections.abc import Callable, Iterator, Sequence
from concurrent.futures import Executor, Future, ProcessPoolExecutor, ThreadPoolExecutor
from typing import Any, Final, ParamSpec, TypeVar

Task = TypeVar("Task")
Result = TypeVar("Result")
Arguments = ParamSpec("Arguments")

CAN_COPY: Final = sys.platform == "linux"
TASKS_A_WORKER: Final = 4
"""Into how many pieces each worker's share is cut, so that none ends long after the others."""


class _Copies(ProcessPoolExecutor):
    """A pool of copies of this process, made when the first work is submitted."""

    def submit(
        self, fn: Callable[Arguments, Result], /, *args: Arguments.args, **kwargs: Arguments.kwargs
    ) -> Future[Result]:
        """Submit work; Python 3.12 warns of the threads that a copy lacks, and none of them is needed."""
        with warnings.catch_warnings():
            warnings.filterwarnings("ignore", ".*fork.*", DeprecationWarning)
            return super().submit(fn, *args, **kwargs)


def pool(most: int, initializer: Callable[..., None] | None = None, *shared: Any) -> Executor:
    """Return an executor of as many workers as there are cores, ``most`` at most.

    Args:
        most: how many pieces of work there will be.
        initializer: called once in every worker.
        shared: its arguments; they need not be picklable.
    """
    workers = max(1, min(cores(), most))
    if not _may_copy():
        return ThreadPoolExecutor(workers, initializer=initializer, initargs=shared)
    context = multiprocessing.get_context("fork")
    return _Copies(workers, mp_context=context, initializer=_begin, initargs=(initializer, *shared))


def _begin(initializer: Callable[..., None] | None, *shared: Any) -> None:
    """Start a copy. Interrupted from the keyboard it finishes the task in hand, and does no other.

    Ended at once it could leave half a result in the pipe, on whose other half this process would wait.
    """
    signal.signal(signal.SIGINT, lambda number, frame: _interrupted.set())
    if initializer is not None:
        initializer(*shared)


def side_by_side(work: Callable[[Task], Result], tasks: Sequence[Task]) -> Iterator[Result]:
    """Apply a function to tasks on all cores and yield the results in order.

    Neighbouring tasks go to the same worker, as what they share is then at hand.

    Args:
        work: any function, a closure too.
        tasks: picklable, like the results. A lone one is done here.
    """
    if len(tasks) < 2 or cores() < 2:
        yield from map(work, tasks)
        return
    together = max(1, len(tasks) // (cores() * TASKS_A_WORKER))
    with pool(len(tasks), _share, work) as workers:
        yield from workers.map(_do_shared, tasks, chunksize=together)


def cores() -> int:
    """Return how many cores this process may use."""
    return len(os.sched_getaffinity(0)) if hasattr(os, "sched_getaffinity") else os.cpu_count() or 1


def _may_copy() -> bool:
    """Return whether copies can be made: a worker of another pool may have no children of its own."""
    return CAN_COPY and not multiprocessing.current_process().daemon


_shared = threading.local()
_interrupted = threading.Event()


def _share(work: Callable[[Any], Any]) -> None:
    _shared.work = work


def _do_shared(task: Any) -> Any:
    if _interrupted.is_set():
        raise KeyboardInterrupt
    return _shared.work(task)
