"""A report of many frames: one page for each, all of them linked, none left over, and a report that stays small."""

from __future__ import annotations

import re
import shutil
from dataclasses import replace
from pathlib import Path
from urllib.parse import unquote

import pytest
from report.pages import Page

from irsurvey.model import FrameReport, FrameTask, Maps, Report
from irsurvey.report import frame_files, html
from irsurvey.report.html import IN_ONE_FILE, MOST_ROWS
from irsurvey.report.links import Links

MEGABYTE = 1_000_000


def copied(frame: FrameReport, number: int) -> FrameReport:
    """A frame under a name of its own, and its findings and components with it."""
    id_ = f"{frame.id}.{number}"
    return replace(
        frame,
        id=id_,
        findings=tuple(replace(f, id=f"{id_}-{f.label}", key=f"{f.key}.{number}") for f in frame.findings),
        components=tuple(replace(c, key=f"{c.key}.{number}") for c in frame.components),
        pair=None,
    )


def many(report: Report, count: int, out: Path) -> tuple[Report, tuple[FrameTask, ...]]:
    """A report of so many frames, copies of the two that have pictures and of the one that failed."""
    kinds = report.frames[0], report.frames[3], report.frames[2]
    frames = tuple(copied(kinds[min(2, number % 20)], number) for number in range(count))
    for frame in frames:
        original = out / "frames" / frame.id.partition(".")[0]
        if original.is_dir():
            shutil.copytree(original, out / "frames" / frame.id, dirs_exist_ok=True)
    return replace(report, frames=frames, next_visit=(), assets=()), ()


@pytest.fixture
def out(report: Report, wall_maps: Maps, board_maps: Maps, tmp_path: Path) -> Path:
    frame_files.write(report.frames[0], wall_maps, tmp_path)
    frame_files.write(report.frames[3], board_maps, tmp_path)
    return tmp_path


def sheets(out: Path) -> set[str]:
    return {path.parent.name for path in out.glob("frames/*/sheet.html")}


def links(path: Path) -> set[tuple[Path, str]]:
    """Where a page leads: (file, id) each."""
    found = re.findall(r'href="([^"#]*)#([^"]+)"', path.read_text("utf-8"))
    return {((path.parent / unquote(file)).resolve() if file else path.resolve(), place) for file, place in found}


def ids(path: Path) -> set[str]:
    return set(re.findall(r' id="([^"]+)"', path.read_text("utf-8")))


def test_up_to_sixty_frames_all_is_one_file_and_of_more_each_has_a_page(report: Report, out: Path) -> None:
    shown, tasks = many(report, IN_ONE_FILE, out)
    html.write(shown, tasks, out)
    assert sheets(out) == set()
    assert (out / "report.html").read_text("utf-8").count("<article") == IN_ONE_FILE
    more, tasks = many(report, IN_ONE_FILE + 1, out)
    html.write(more, tasks, out)
    assert sheets(out) == {frame.id for frame in more.frames}
    assert "<article" not in (out / "report.html").read_text("utf-8")
    html.write(shown, tasks, out)  # a smaller run into the same folder
    assert sheets(out) <= {more.frames[-1].id}  # the run itself clears the folder of a frame that is gone


def test_every_link_of_every_page_leads_somewhere_and_asks_nothing_of_a_network(report: Report, out: Path) -> None:
    shown, tasks = many(report, IN_ONE_FILE + 5, out)
    html.write(shown, tasks, out)
    pages = [out / "report.html", *out.glob("frames/*/sheet.html")]
    places = {path.resolve(): ids(path) for path in pages}
    for path in pages:
        for file, place in links(path):
            assert place in places[file], (path.name, file.name, place)
        text = path.read_text("utf-8")
        assert Page(text).open == []
        assert not re.search(r'(src|href)="(?!data:|#|frames/|\.\./)', text)
        assert "default-src 'none'" in text
        assert str(out) not in text


def test_a_page_tells_what_the_sheet_in_one_file_tells(report: Report, out: Path) -> None:
    shown, tasks = many(report, IN_ONE_FILE + 1, out)
    html.write(shown, tasks, out)
    alone = replace(shown, frames=shown.frames[:1])
    pattern = re.compile(r"<article.*?</article>", re.DOTALL)
    whole = pattern.search(html.page(alone, tasks, out))
    apart = pattern.search((out / "frames" / shown.frames[0].id / "sheet.html").read_text("utf-8"))
    assert whole
    assert apart
    assert whole[0] == apart[0]


def test_two_hundred_frames_leave_a_report_below_twenty_megabytes(report: Report, out: Path) -> None:
    shown, tasks = many(report, 200, out)
    html.write(shown, tasks, out)
    size = (out / "report.html").stat().st_size
    assert size < 20 * MEGABYTE
    text = (out / "report.html").read_text("utf-8")
    pictured = sum(frame.status != "failed" for frame in shown.frames)
    assert text.count("data:image/jpeg") >= pictured  # a small picture of each
    assert all(f'href="frames/{frame.id}/sheet.html#frame-{frame.id}"' in text for frame in shown.frames)


def test_very_many_results_are_counted_where_they_are_not_listed(report: Report, out: Path) -> None:
    frames = tuple(
        replace(copied(report.frames[0], number), strips=(), surface_at_risk=())
        for number in range(MOST_ROWS // 2 + 40)
    )
    text = html.page(replace(report, frames=frames, next_visit=(), assets=()), (), out)
    assert len(re.findall(r"<tr data-finding=", text)) == MOST_ROWS
    assert "80 more, less important ones are in findings.csv and on the pages of their frames." in Page(text).text


def test_the_same_report_gives_the_same_pages(report: Report, out: Path) -> None:
    shown, tasks = many(report, IN_ONE_FILE + 1, out)
    written = []
    for _ in range(2):
        html.write(shown, tasks, out)
        written.append([path.read_bytes() for path in sorted(out.rglob("*.html"))])
    assert written[0] == written[1]


def test_links_know_where_they_stand() -> None:
    one, report, sheet = Links(), Links(True), Links(True, "F01")
    assert [page.sheet("F01") for page in (one, report, sheet)] == [
        "#frame-F01",
        "frames/F01/sheet.html#frame-F01",
        "#frame-F01",
    ]
    assert sheet.sheet("F02", "finding-F02-1") == "../F02/sheet.html#finding-F02-1"
    assert [page.report("summary") for page in (one, report, sheet)] == [
        "#summary",
        "#summary",
        "../../report.html#summary",
    ]
