"""A page to review in: the sections of results as the report has them, under the report's own policy and style."""

from __future__ import annotations

import re
from pathlib import Path

from markupsafe import Markup

from irsurvey import report
from irsurvey.model import ComponentReport, FrameTask, Report
from irsurvey.report import live, review
from irsurvey.report.review.standing import reviewable

REPORT_CSS = Path(report.__file__).parent / "templates" / "report.css"
_CONTROLS = re.compile(r"[\x00-\x08\x0b\x0c\x0e-\x1f\x7f]")


def page(
    report: Report,
    tasks: tuple[FrameTask, ...],
    *,
    shown: int = 100,
    frames: tuple[str, ...] | None = None,
    script: str | None = None,
) -> str:
    """The page of a report's reviews; of each frame so many findings have a section, the others are folded away.

    `frames`: those that have their sheets on this page, where the report is more than one."""
    desk = review.Desk(report, tasks)
    body = [desk.summary()]
    for frame in report.frames:
        if frames is not None and frame.id not in frames:
            continue
        with_section = {finding.id for finding in frame.findings[:shown]}
        sections = Markup("").join(
            Markup('<section class="result" {}><h4>{}</h4>{}</section>').format(
                Markup('data-{}="{}"').format(
                    "component" if isinstance(one.item, ComponentReport) else "finding", one.key
                ),
                one.id,
                desk.result(one.key),
            )
            for one in reviewable(report)
            if one.frame is frame and (isinstance(one.item, ComponentReport) or one.id in with_section)
        )
        sheet = Markup('<article class="card sheet"><h2>{}</h2>{}{}</article>')
        body.append(sheet.format(frame.id, sections, desk.rest(frame, with_section)))
    hashes = f"{live.script_hash()} {review.script_hash()}"
    policy = f"default-src 'none'; img-src data:; style-src 'unsafe-inline'; script-src {hashes}"
    written = (
        '<!DOCTYPE html>\n<html lang="en"><head><meta charset="utf-8">'
        f'<meta http-equiv="Content-Security-Policy" content="{policy}">'
        '<meta name="viewport" content="width=device-width, initial-scale=1"><title>Review</title>'
        f"<style>{REPORT_CSS.read_text('utf-8')}\n{review.style()}</style></head><body><main>{''.join(body)}</main>"
        f'<script type="application/json" id="review-data">{desk.data(frames)}</script>'
        f"<script>{live.script()}</script>"
        f"<script>{review.script() if script is None else script}</script></body></html>"
    )
    return _CONTROLS.sub("\ufffd", written)  # as the page of the report does
