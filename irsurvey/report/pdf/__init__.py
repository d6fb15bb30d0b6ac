"""report.pdf: the report on paper; of very many frames in volumes, with report.pdf as their summary."""

from __future__ import annotations

import re
from collections.abc import Sequence
from pathlib import Path

from irsurvey import files
from irsurvey.model import FrameReport, FrameTask, Report

FRAMES_IN_A_VOLUME = 200
"""Up to so many frames the report is one document."""

_VOLUME = re.compile(r"report-\d+\.pdf")


def write(report: Report, tasks: tuple[FrameTask, ...], out: Path) -> Path:
    """Write OUT/report.pdf from the records and the pictures already in OUT/frames, and return its path.

    Of more frames than `FRAMES_IN_A_VOLUME` the sheets are in OUT/report-1.pdf, report-2.pdf … and report.pdf holds
    everything else; volumes of an earlier run that are not part of this one go.  The same report gives the same
    bytes: the document is dated by its survey.  Raises OutputError where the folder cannot be written."""
    from irsurvey.report.pdf.story import gather
    from irsurvey.report.pdf.volumes import summary_of, volume_of, whole

    story = gather(report, tasks, out)
    volumes = _volumes(report.frames)
    names = [f"report-{number}.pdf" for number in range(1, len(volumes) + 1)]
    path = out / "report.pdf"
    if not volumes:
        files.write_bytes(path, whole(story))
    else:
        pages: dict[str, tuple[int, int]] = {}
        for number, (name, frames) in enumerate(zip(names, volumes, strict=True), 1):
            data, places = volume_of(story, frames, number, len(volumes))
            files.write_bytes(out / name, data)
            pages |= {id_: (number, page) for id_, page in places.items()}
        files.write_bytes(path, summary_of(story, pages, len(volumes)))
    for old in out.iterdir():
        if _VOLUME.fullmatch(old.name) and old.name not in names:
            old.unlink()
    return path


def _volumes(frames: Sequence[FrameReport]) -> list[Sequence[FrameReport]]:
    """Frames by volume; none where one document holds them all."""
    if len(frames) <= FRAMES_IN_A_VOLUME:
        return []
    return [frames[start : start + FRAMES_IN_A_VOLUME] for start in range(0, len(frames), FRAMES_IN_A_VOLUME)]
