"""Run one function over many jobs, in this process or in several, results in the order of the jobs."""

from __future__ import annotations

from collections.abc import Callable, Iterator, Sequence
from concurrent.futures import ProcessPoolExecutor
from multiprocessing import get_context
from typing import TypeVar

Job = TypeVar("Job")
Result = TypeVar("Result")


def execute(function: Callable[[Job], Result], jobs: Sequence[Job], processes: int = 1) -> Iterator[Result]:
    """Yield `function(job)` for each job, in order, as soon as it is there.

    More than one process: `function` must be importable by name and jobs picklable.  Processes are spawned,
    not forked: libraries with threads of their own do not survive a fork.
    """
    if processes <= 1 or len(jobs) <= 1:
        yield from map(function, jobs)
        return
    with ProcessPoolExecutor(min(processes, len(jobs)), mp_context=get_context("spawn")) as pool:
        yield from pool.map(function, jobs)
