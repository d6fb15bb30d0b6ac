"""Run one function over many jobs, in this process or in several, results in the order of the jobs."""

from __future__ import annotations

import os
from collections.abc import Callable, Iterator, Sequence
from concurrent.futures import ProcessPoolExecutor
from multiprocessing import get_context, parent_process
from multiprocessing.process import BaseProcess
from threading import Thread
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
    workers, context = min(processes, len(jobs)), get_context("spawn")
    with ProcessPoolExecutor(workers, mp_context=context, initializer=_end_with_parent) as pool:
        yield from pool.map(function, jobs)


def _end_with_parent() -> None:
    """Let this worker end when the process that started it does: killed, that cannot tell, and a worker waits on."""

    def watch(parent: BaseProcess) -> None:
        parent.join()
        os._exit(1)  # whatever the worker is at: files are written whole or not at all

    parent = parent_process()
    if parent is not None:
        Thread(target=watch, args=(parent,), daemon=True).start()
