"""Criteria files of the survey's own, beside its survey file."""

from __future__ import annotations

from pathlib import Path

from irsurvey.errors import Fault, SurveyError
from irsurvey.survey import places
from irsurvey.survey.known import Known
from irsurvey.survey.schema import Document

_ENDING = ".toml"


def is_file(name: str) -> bool:
    """Whether a name among the criteria is that of a file."""
    return name.lower().endswith(_ENDING)


def own_criteria(document: Document, folder: Path, known: Known, faults: list[Fault]) -> tuple[tuple[str, str], ...]:
    """(name as written, with forward slashes; text) of each file once; adds to `faults`."""
    found: dict[str, str] = {}
    for number, written in enumerate(document.survey.criteria, 1):
        if not is_file(written):
            continue
        where = f"survey.criteria[#{number}]"
        try:
            name = places.inside(folder, written, where)
            found[name] = _text(folder / name, f"{where}[{name}]", known)
        except SurveyError as error:
            faults += error.faults
    return tuple(found.items())


def names(document: Document) -> tuple[str, ...]:
    """Names of criteria as stated, each once, those of files with forward slashes as in `own_criteria`."""
    stated = document.survey.criteria
    return tuple(dict.fromkeys(places.plain(name) if is_file(name) else name for name in stated))


def _text(path: Path, where: str, known: Known) -> str:
    try:
        text = path.read_bytes().decode("utf-8-sig")
    except OSError as error:
        fault = Fault(where, "a readable file of a criterion", error.strerror or str(error), "check its name")
        raise SurveyError(fault) from error
    except UnicodeDecodeError as error:
        raise SurveyError(Fault(where, "text in UTF-8", "another encoding", "save the file as UTF-8")) from error
    if known.criterion_faults is None:
        raise SurveyError(Fault(where, "the name of a criterion", "a file, which cannot be judged here"))
    wrong = known.criterion_faults(text)
    if wrong:
        raise SurveyError(*(_at(fault, where) for fault in wrong))
    return text


def _at(fault: Fault, where: str) -> Fault:
    key = fault.where.removeprefix(":").strip()
    return Fault(f"{where}: {key}" if key else where, fault.expected, fault.got, fault.remedy)
