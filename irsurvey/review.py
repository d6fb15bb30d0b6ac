"""A reviewer's decisions put into a report that was written: what `irsurvey review apply` wraps."""

from __future__ import annotations

import re
from dataclasses import dataclass
from pathlib import Path

from irsurvey.assess.criteria import criteria
from irsurvey.errors import Fault, OutputError
from irsurvey.model import Report, Review, ReviewStatus
from irsurvey.report import WRITERS
from irsurvey.report.kept import kept
from irsurvey.report.marked_csv import is_marked
from irsurvey.report.reading import read_report
from irsurvey.report.review import decisions
from irsurvey.report.review.standing import ASKED_AGAIN, GONE, OPEN, identity, with_reviews
from irsurvey.report.review.stored import store, stored

_FILES = {
    "json": "report.json",
    "csv": "findings.csv",
    "repairs": "repairs.csv",
    "html": "report.html",
    "pdf": "report.pdf",
}
"""Document → the file that shows it was made."""
_SAFE_ID = re.compile(r"(?!\.+$)[A-Za-z0-9._-]{1,99}")


@dataclass(frozen=True, slots=True)
class Applied:
    """What came of a decisions file; `is_new` is false where it had been applied before, `is_same` where it was made
    on this very version of the report; `documents` names what was written again."""

    report: Report
    review: Review
    is_new: bool
    is_same: bool
    documents: tuple[str, ...]

    def standing(self, *kinds: str) -> tuple[ReviewStatus, ...]:
        """The findings and components that stand so, in the order of the report."""
        return tuple(status for status in self.report.review_status if status.status in kinds)

    @property
    def open(self) -> tuple[ReviewStatus, ...]:
        """What nobody decided yet, and what a reviewer is asked again."""
        return self.standing(OPEN, ASKED_AGAIN)

    @property
    def without_reason(self) -> int:
        """How many of the decisions put in reject or reclassify, and do not say why."""
        return sum(
            one.decision in ("rejected", "reclassified") and not one.comment.strip() for one in self.review.decisions
        )

    @property
    def gone(self) -> tuple[ReviewStatus, ...]:
        """What was decided, and is no longer in the report."""
        return self.standing(GONE)


def apply(out: Path, path: Path) -> Applied:
    """Put the decisions of a file into the report of an output folder, and make its documents again.

    What was measured and assessed stays as it was; the decisions stand beside it, in report.json and in a file of
    their own.  The same file applied twice counts once.  Raises UsageError with every fault of the decisions file and
    OutputError where the folder holds no report, both before anything is written."""
    report = read_report(out / "report.json")
    tasks = kept(out)
    _check_ids(*(frame.id for frame in report.frames), *(task.id for task in tasks))
    known = criteria(tuple(dict.fromkeys(own for task in tasks for own in task.own_criteria)))
    earlier = stored(out) or report.reviews
    review = decisions.read(path, report, known)
    is_new = review not in earlier
    report = with_reviews(report, (*earlier, review) if is_new else earlier)
    made = tuple(name for name in WRITERS if _was_made(name, out))
    store(report.reviews, out)
    for name in made:
        WRITERS[name](report, tasks, out)
    return Applied(report, review, is_new, review.report == identity(report), made)


def _was_made(document: str, out: Path) -> bool:
    """Whether a document is there to be made again; tables with a byte order mark where they begin with one."""
    if document == "csv-bom":
        return (out / _FILES["csv"]).is_file() and is_marked(out / _FILES["csv"])
    return (out / _FILES.get(document, f"report.{document}")).is_file()


def _check_ids(*ids: str) -> None:
    """Ids name folders of the report; those of a file from somebody else may not lead out of it."""
    for id_ in ids:
        if not _SAFE_ID.fullmatch(id_):
            fault = Fault("report.json: frames", "ids of letters, digits and . _ -", repr(id_)[:80])
            raise OutputError(fault)
