"""Many jobs in one process or several: the same results in the same order, and no worker outlives its parent."""

from __future__ import annotations

import os
import signal
import subprocess
import sys
import time
from pathlib import Path

import pytest

from irsurvey.batch import execute

PARENT = """
import os, time
from pathlib import Path
from irsurvey.batch import execute
from test_execute import note_and_wait
if __name__ == "__main__":
    list(execute(note_and_wait, [{0!r}, {1!r}], 2))
"""


def negative(number: int) -> int:
    return -number


def note_and_wait(path: str) -> None:
    """Leave this process's number in a file and stay busy."""
    Path(path).write_text(str(os.getpid()), "utf-8")
    time.sleep(60)


@pytest.mark.parametrize("processes", [1, 2])
def test_results_come_in_the_order_of_the_jobs(processes: int) -> None:
    assert list(execute(negative, range(5), processes)) == [0, -1, -2, -3, -4]


def test_workers_end_with_the_process_that_started_them(tmp_path: Path) -> None:
    notes = [tmp_path / "first", tmp_path / "second"]
    script = tmp_path / "parent.py"
    script.write_text(PARENT.format(*map(str, notes)), "utf-8")
    environment = os.environ | {"PYTHONPATH": str(Path(__file__).parent)}
    parent = subprocess.Popen([sys.executable, str(script)], env=environment)
    workers = [int(wait_for(note)) for note in notes]
    parent.send_signal(signal.SIGKILL)  # which no process can catch to tell its workers
    parent.wait()
    deadline = time.monotonic() + 10
    while any(map(is_running, workers)) and time.monotonic() < deadline:
        time.sleep(0.05)
    left = [worker for worker in workers if is_running(worker)]
    for worker in left:
        os.kill(worker, signal.SIGKILL)
    assert not left


def wait_for(note: Path) -> str:
    deadline = time.monotonic() + 30
    while time.monotonic() < deadline:
        if note.exists() and (text := note.read_text("utf-8")):
            return text
        time.sleep(0.05)
    raise TimeoutError(note)


def is_running(process: int) -> bool:
    """Whether a process is there and not merely waiting for someone to take note of its end."""
    try:
        state = Path(f"/proc/{process}/stat").read_text("utf-8").rpartition(")")[2].split()[0]
    except FileNotFoundError:
        return False
    return state != "Z"
