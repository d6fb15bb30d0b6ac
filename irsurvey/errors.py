"""Everything irsurvey raises on purpose: data in the error, wording in `__str__`, exit code on the class."""

from __future__ import annotations

from dataclasses import dataclass
from typing import ClassVar


@dataclass(frozen=True, slots=True)
class Fault:
    """One thing that is wrong: where, what was expected, what was got, and what to do about it."""

    where: str
    expected: str
    got: str
    remedy: str = ""

    def __str__(self) -> str:
        remedy = f"; {self.remedy}" if self.remedy else ""
        return f"{self.where}: expected {self.expected}, got {self.got}{remedy}"


class IrsurveyError(Exception):
    """Root of all errors a user can meet; `faults` says what is wrong, `exit_code` how the command ends."""

    exit_code: ClassVar[int] = 2

    def __init__(self, *faults: Fault) -> None:
        super().__init__(*faults)  # the faults are the args, so that the error survives pickling
        self.faults = faults

    def __str__(self) -> str:
        return "\n".join(str(fault) for fault in self.faults)


class SurveyError(IrsurveyError):
    """The survey file, or another input table of a command, is wrong; nothing was run."""


class UsageError(IrsurveyError):
    """The command was asked for something that does not exist or cannot be done."""


class OutputError(IrsurveyError):
    """The output folder belongs to something else or cannot be written."""


class FrameError(IrsurveyError):
    """One frame cannot be read or analysed; all others go on."""

    exit_code = 1
