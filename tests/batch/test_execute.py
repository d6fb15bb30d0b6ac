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
import signal, sys
from irsurvey.batch import execute
from test_execute import note_and_wait
sys.modules["irsurvey.batch.execute"].usable_processors = lambda: 2  # two workers, whatever this machine has
if __name__ == "__main__":
    signal.signal(signal.SIGINT, signal.default_int_handler)  # what runs in the background may inherit deafness to it
    try:
        list(execute(note_and_wait, [{0!r}, {1!r}, {0!r} + "2", {1!r} + "2"], 2))
    except KeyboardInterrupt:
        sys.exit(130)
"""


def negative(number: int) -> int:
    return -number


def own_number(_: int) -> int:
    """The number of the process, after long enough that another one takes the next job."""
    time.sleep(0.2)
    return os.getpid()


def failing(number: int) -> int:
    if number == 1:
        raise ValueError(number)
    return number


def note_and_wait(path: str) -> None:
    """Leave this process's number in a file and stay busy."""
    Path(path).write_text(str(os.getpid()), "utf-8")
    time.sleep(60)


@pytest.mark.parametrize("processes", [1, 2])
def test_results_come_in_the_order_of_the_jobs(processes: int) -> None:
    assert list(execute(negative, range(5), processes)) == [0, -1, -2, -3, -4]


@pytest.mark.parametrize("usable", [1, 2])
def test_there_are_no_more_workers_than_processors(monkeypatch: pytest.MonkeyPatch, usable: int) -> None:
    monkeypatch.setattr(sys.modules["irsurvey.batch.execute"], "usable_processors", lambda: usable)
    numbers = set(execute(own_number, range(6), 1000))
    assert len(numbers) <= usable
    assert (os.getpid() in numbers) == (usable == 1)  # alone, a worker would only cost its start


def test_the_processors_counted_are_those_this_process_may_use() -> None:
    # The operating system's own word, read by another program (GNU coreutils), which these two variables would change.
    plain = {name: value for name, value in os.environ.items() if not name.startswith("OMP_")}
    said = subprocess.run(["nproc"], capture_output=True, text=True, check=True, env=plain).stdout
    assert sys.modules["irsurvey.batch.execute"].usable_processors() == int(said)


@pytest.mark.parametrize("processes", [1, 2])
def test_what_a_job_raises_is_raised_in_its_turn(processes: int) -> None:
    results = execute(failing, range(4), processes)
    assert next(results) == 0
    with pytest.raises(ValueError, match="1"):
        next(results)


def test_who_wants_no_more_results_waits_for_none(tmp_path: Path) -> None:
    results = execute(note_or_wait, [str(tmp_path / "first"), "wait", "wait"], 2)
    next(results)
    start = time.monotonic()
    results.close()
    assert time.monotonic() - start < 10  # each of the others takes 60 s


@pytest.mark.parametrize("times", [1, 2])
def test_an_interrupt_ends_everything_at_once_and_leaves_no_word(tmp_path: Path, times: int) -> None:
    """Ctrl-C reaches the whole group of processes; the impatient press it twice."""
    parent, workers = begun(tmp_path)
    for _ in range(times):
        os.killpg(parent.pid, signal.SIGINT)
        time.sleep(0.05)
    try:
        _, said = parent.communicate(timeout=20)
    finally:
        parent.kill()
    assert said == ""  # no traceback of a worker, no leaked semaphores
    # A second press while Python is already closing down kills it by the signal itself, which shells report as 130 too.
    assert parent.returncode in {130, -signal.SIGINT if times == 2 else 130}
    assert not left_over(workers)


def test_workers_end_with_the_process_that_started_them(tmp_path: Path) -> None:
    parent, workers = begun(tmp_path)
    parent.send_signal(signal.SIGKILL)  # which no process can catch to tell its workers
    parent.communicate()
    assert not left_over(workers)


def note_or_wait(path: str) -> None:
    """Leave this process's number at once, or keep busy."""
    if path == "wait":
        time.sleep(60)
    else:
        Path(path).write_text(str(os.getpid()), "utf-8")


def begun(tmp_path: Path) -> tuple[subprocess.Popen[str], list[int]]:
    """A process in a group of its own and its two busy workers."""
    notes = [tmp_path / "first", tmp_path / "second"]
    script = tmp_path / "parent.py"
    script.write_text(PARENT.format(*map(str, notes)), "utf-8")
    environment = os.environ | {"PYTHONPATH": str(Path(__file__).parent)}
    parent = subprocess.Popen(
        [sys.executable, str(script)],
        env=environment,
        stderr=subprocess.PIPE,
        text=True,
        start_new_session=True,
    )
    return parent, [int(wait_for(note)) for note in notes]


def left_over(workers: list[int]) -> list[int]:
    """Those still running after ten seconds, which are ended then."""
    deadline = time.monotonic() + 10
    while any(map(is_running, workers)) and time.monotonic() < deadline:
        time.sleep(0.05)
    left = [worker for worker in workers if is_running(worker)]
    for worker in left:
        os.kill(worker, signal.SIGKILL)
    return left


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
