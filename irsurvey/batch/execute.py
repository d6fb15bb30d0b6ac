"""Run one function over many jobs, in this process or in several, results in the order of the jobs."""

from __future__ import annotations

import os
import signal
from collections import deque
from collections.abc import Callable, Iterator, Sequence
from concurrent.futures import ProcessPoolExecutor
from contextlib import contextmanager
from multiprocessing import active_children, get_context, parent_process
from multiprocessing.process import BaseProcess
from threading import Thread, current_thread, main_thread
from typing import TypeVar

Job = TypeVar("Job")
Result = TypeVar("Result")


def execute(function: Callable[[Job], Result], jobs: Sequence[Job], processes: int = 1) -> Iterator[Result]:
    """Yield `function(job)` for each job, in order, as soon as it is there.

    More than one process: `function` must be importable by name and jobs picklable.  Processes are spawned,
    not forked: libraries with threads of their own do not survive a fork.  There are no more of them than jobs and
    than processors to run on: more would only share them, and hold more frames at once.  When what asks for the
    results is interrupted or wants no more of them, they end at once.
    """
    workers = min(processes, len(jobs), usable_processors())
    if workers <= 1:
        yield from map(function, jobs)
        return
    others = active_children()
    with ProcessPoolExecutor(workers, mp_context=get_context("spawn"), initializer=_begin) as pool:
        try:
            with _deaf_to_interrupts():
                waiting = deque(pool.submit(function, job) for job in jobs)
            while waiting:
                yield waiting.popleft().result()
        except BaseException:
            with _deaf_to_interrupts():  # a second one may not stop the clearing up: locks would be left behind
                for worker in active_children():
                    if worker not in others:
                        worker.terminate()  # files are written whole or not at all
                pool.shutdown()  # jobs that wait fail with their workers: cancelled ones would be failed a second time
            raise


def usable_processors() -> int:
    """How many processors this process may run on."""
    if hasattr(os, "sched_getaffinity"):
        return len(os.sched_getaffinity(0))
    return os.cpu_count() or 1


def _begin() -> None:
    """Leave interrupts to the process that started this worker, and end when it does.

    Killed, it cannot tell its workers, and a worker waits on for jobs.
    """

    def watch(parent: BaseProcess) -> None:
        parent.join()
        os._exit(1)  # whatever the worker is at: files are written whole or not at all

    signal.signal(signal.SIGINT, signal.SIG_IGN)
    parent = parent_process()
    if parent is not None:
        Thread(target=watch, args=(parent,), daemon=True).start()


@contextmanager
def _deaf_to_interrupts() -> Iterator[None]:
    """Let no interrupt (Ctrl-C) in; processes started meanwhile inherit it.  Only the main thread is interrupted."""
    if current_thread() is not main_thread():
        yield
        return
    before = signal.signal(signal.SIGINT, signal.SIG_IGN)
    try:
        yield
    finally:
        signal.signal(signal.SIGINT, before)
