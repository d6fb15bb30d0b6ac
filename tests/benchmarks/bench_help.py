"""What `irsurvey --help` costs against an interpreter that does nothing.

Run with `pytest tests/benchmarks/bench_help.py -s`.  Prints the ratio of medians measured in turn in one run; at most
8 is wanted, but no time decides pass or fail, only that the help is there."""

from __future__ import annotations

import subprocess
import sys
from statistics import median
from time import perf_counter

import pytest

pytestmark = pytest.mark.benchmark

COMMANDS = {
    "nothing": ["-c", "pass"],
    "click": ["-c", "import click"],
    "help": ["-c", "from irsurvey.cli import main; main(['--help'])"],
}


def test_help_against_an_interpreter_that_does_nothing() -> None:
    times: dict[str, list[float]] = {name: [] for name in COMMANDS}
    for _ in range(20):
        for name, command in COMMANDS.items():
            start = perf_counter()
            done = subprocess.run([sys.executable, *command], capture_output=True, text=True, check=True)
            times[name].append(perf_counter() - start)
            assert ("Usage: " in done.stdout) == (name == "help")
    floor = median(times["nothing"])
    print(f"\npython -c pass {1000 * floor:.1f} ms", end="")
    for name in ("click", "help"):
        print(f"; {name} {median(times[name]) / floor:.1f} ×", end="")
    print()
