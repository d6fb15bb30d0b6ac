"""report.pdf: complete, dated by its survey, the same bytes each time, and never anything but text where text was."""

from __future__ import annotations

import io
import os
import pickle
import re
import subprocess
import sys
from collections.abc import Iterator
from dataclasses import fields, is_dataclass, replace
from datetime import UTC, datetime
from pathlib import Path
from typing import Any

import numpy as np
import pypdfium2
import pytest
from PIL import Image
from pypdf import PdfReader
from pypdf.generic import Destination, IndirectObject

from irsurvey import texts
from irsurvey.model import (
    ComponentReport,
    Decision,
    Estimate,
    Finding,
    FrameReport,
    FrameTask,
    Input,
    Maps,
    Report,
    Review,
    ReviewStatus,
)
from irsurvey.report import component_facts, facts, frame_files, pdf, repair_list, results, season_table
from irsurvey.report.pdf import FRAMES_IN_A_VOLUME, write
from irsurvey.report.pdf.letters import MISSING
from irsurvey.report.ranking import in_order

RTL = "\u202eשלום עולם مرحبا\u202c"
HOSTILE = [
    "<script>alert(1)</script> </title> & <b>",
    ") Tj ET Q (\\) << /Type /Page >> endobj {pages} {0}",
    RTL,
    "x" * 10_000,
    "many words " * 900,
    "control \x00\x08\x1b characters \ud800 and \t tabs\nlines",
    "壁 🧱 👩‍🔧 ﷽ Z̸̧̛a̶l̴g̷o",
    " ",
]


def bare(text: str) -> str:
    """A text without white space: where a line ends is for the paper to decide."""
    return re.sub(r"\s+", "", text)


def read(path: Path) -> PdfReader:
    return PdfReader(io.BytesIO(path.read_bytes()))


def text_of(path: Path) -> str:
    """All that a document says, as pdfium reads it, without white space."""
    document = pypdfium2.PdfDocument(path)
    return bare("".join(page.get_textpage().get_text_range() for page in document))


def outline(reader: PdfReader, entries: list[Any] | None = None, level: int = 0) -> Iterator[tuple[int, str, int]]:
    """Level, title and page of each bookmark."""
    for entry in reader.outline if entries is None else entries:
        if isinstance(entry, list):
            yield from outline(reader, entry, level + 1)
        else:
            assert isinstance(entry, Destination)
            number = reader.get_destination_page_number(entry)
            assert number is not None
            yield level, str(entry.title), number + 1


def fonts(reader: PdfReader) -> Iterator[dict[str, Any]]:
    for page in reader.pages:
        for font in page["/Resources"]["/Font"].values():  # type: ignore[index]
            yield font.get_object()


@pytest.fixture
def out(report: Report, wall_maps: Maps, board_maps: Maps, tmp_path: Path) -> Path:
    clean = replace(wall_maps, labels=np.zeros_like(wall_maps.labels))
    for frame, maps in zip(report.frames, (wall_maps, clean, None, board_maps), strict=True):
        if maps:
            frame_files.write(frame, maps, tmp_path)
    return tmp_path


@pytest.fixture
def path(report: Report, tasks: tuple[FrameTask, ...], out: Path) -> Path:
    return write(report, tasks, out)


def test_it_is_written_beside_the_other_documents(path: Path, out: Path) -> None:
    assert path == out / "report.pdf"
    assert path.read_bytes().startswith(b"%PDF-")
    assert not list(out.glob(".part-*"))


def test_every_page_says_which_of_how_many_it_is_except_the_title_page(path: Path) -> None:
    reader = read(path)
    count = len(reader.pages)
    assert count > 8
    assert "page 1 of" not in reader.pages[0].extract_text()
    for number, page in enumerate(reader.pages[1:], 2):
        told = page.extract_text()
        assert f"page {number} of {count}" in told
        assert "Demo house and switch room" in told
        assert "irsurvey 0.0.test" in told


def test_no_page_is_blank(path: Path) -> None:
    """Between head and foot each page has letters, and as many dark pixels as a line of them at least."""
    for page in pypdfium2.PdfDocument(path):
        image = np.asarray(page.render(scale=1).to_pil().convert("L"))
        middle = image[int(0.075 * image.shape[0]) : int(0.94 * image.shape[0])]
        assert (middle < 160).sum() > 200


def test_nothing_is_drawn_outside_the_margins(path: Path) -> None:
    for page in pypdfium2.PdfDocument(path):
        image = np.asarray(page.render(scale=2).to_pil().convert("L"))
        edge = int(image.shape[1] * 15 / 210)  # margins are 17 mm
        assert image[:, :edge].min() == 255
        assert image[:, -edge:].min() == 255


def test_bookmarks_lead_to_each_section_and_each_frame(path: Path, report: Report) -> None:
    reader = read(path)
    found = list(outline(reader))
    sections = [title for level, title, _ in found if level == 0]
    assert sections == [
        *("Title page", "Contents", "Summary", "What stays open", "What it costs", "Conditions of the survey"),
        *("Anomalies", "Components", "Assets", "Frames", "Is this report complete?", "Cautions"),
    ]
    frames = [title for level, title, _ in found if level == 1]
    assert [title.split()[0] for title in frames] == [frame.id for frame in report.frames]
    for _, title, number in found[1:]:
        assert bare(title) in bare(reader.pages[number - 1].extract_text()) or title == "Frames"
    assert [number for *_, number in found] == sorted(number for *_, number in found)


def test_the_contents_name_the_pages_that_bookmarks_lead_to(path: Path) -> None:
    reader = read(path)
    told = bare(reader.pages[1].extract_text())
    for _, title, number in outline(reader):
        if title not in ("Title page", "Contents"):
            assert re.search(rf"{re.escape(bare(title)[:40])}\D*{number}(?!\d)", told), (title, number)


def test_links_lead_to_pages_of_the_document(path: Path) -> None:
    reader = read(path)
    pages = {page.indirect_reference.idnum for page in reader.pages if page.indirect_reference}
    count = 0
    for page in reader.pages:
        for annotation in page.get("/Annots", ()):
            goal = annotation.get_object()["/Dest"][0]
            assert isinstance(goal, IndirectObject)
            assert goal.idnum in pages
            count += 1
    assert count > 20


def test_every_font_is_embedded_as_a_subset_that_maps_back_to_text(path: Path) -> None:
    names = set()
    for font in fonts(read(path)):
        assert font["/Subtype"] == "/Type0"
        assert "/ToUnicode" in font
        descriptor = font["/DescendantFonts"][0].get_object()["/FontDescriptor"].get_object()
        assert len(descriptor["/FontFile2"].get_object().get_data()) < 150_000  # of the 750 kB of the whole font
        names.add(str(font["/BaseFont"]).partition("+")[2])
    assert len(names) == 2
    assert all("DejaVu" in name for name in names)


def test_metadata_are_those_of_the_survey(path: Path) -> None:
    reader = read(path)
    about = reader.metadata
    assert about
    assert about.title == "Demo house and switch room"
    assert about.author == "N. N. (invented)"
    assert about.creator == "irsurvey 0.0.test"
    assert about.creation_date == datetime(2026, 1, 18, 12, tzinfo=UTC)
    assert reader.trailer["/Root"]["/Lang"] == "en"  # type: ignore[index]


@pytest.mark.parametrize("date", ["", "no date", "2026-99-99"])
def test_a_survey_without_a_date_has_that_of_its_earliest_frame(
    report: Report, tasks: tuple[FrameTask, ...], out: Path, date: str
) -> None:
    undated = replace(report, survey={"survey": {"title": "t", "date": date}})
    about = read(write(undated, tasks, out)).metadata
    assert about
    assert about.creation_date == datetime(2026, 1, 18, 12, tzinfo=UTC)


def test_the_same_report_gives_the_same_bytes(
    report: Report, tasks: tuple[FrameTask, ...], out: Path, tmp_path_factory: pytest.TempPathFactory
) -> None:
    """Also from another process, with another order of sets and another time zone."""
    first = write(report, tasks, out).read_bytes()
    assert write(report, tasks, out).read_bytes() == first
    kept = tmp_path_factory.mktemp("other") / "report.pickle"
    kept.write_bytes(pickle.dumps((report, tasks, out)))
    told = (
        "import pickle, sys; from irsurvey.report.pdf import write;"
        "print(write(*pickle.loads(open(sys.argv[1], 'rb').read())))"
    )
    environment = {**os.environ, "PYTHONHASHSEED": "77", "TZ": "Asia/Tokyo"}
    subprocess.run([sys.executable, "-c", told, str(kept)], check=True, env=environment, capture_output=True)
    assert (out / "report.pdf").read_bytes() == first


def test_no_path_of_this_machine_is_in_it(path: Path, out: Path) -> None:
    reader = read(path)
    data = b"".join(page.get_contents().get_data() for page in reader.pages if page.get_contents())  # type: ignore[union-attr]
    for secret in (str(out), "/secret/place"):
        assert secret.encode() not in path.read_bytes() + data
        assert bare(secret) not in text_of(path)


def test_it_tells_all_numbers_of_each_finding_and_component(path: Path, report: Report) -> None:
    told = text_of(path)
    of_findings = ("mean_delta_k", "delta_k", "extreme_c", "mean_c", "area_m2", "excess_heat_w", "heat_flux_w_m2")
    of_components = ("max_c", "mean_c", "delta_similar_k", "delta_ambient_k")
    for entry in in_order(report):
        item = entry.item
        for key in of_components if isinstance(item, ComponentReport) else of_findings:
            assert bare(results.reading(item, key, unit=False)) in told, (item, key)
            assert bare(results.interval(item, key)) in told
        assert bare(texts.outcome(item.outcome)) in told


def test_it_tells_what_was_assessed_and_indicated_and_how_sure_it_is(path: Path, report: Report) -> None:
    told = text_of(path)
    for item in (entry.item for entry in in_order(report)):
        for assessment in item.assessments:
            assert all(bare(part) in told for part in (assessment.criterion, assessment.statement, assessment.source))
        if item.indication:
            assert bare(item.indication.verify_by) in told
            assert all(bare(cue.text) in told for cue in facts.cues(item.indication.evidence))
        for flag in set(item.flags) - {"fragile"}:  # which its flips tell better
            assert bare(texts.flag(flag)) in told
        for change in results.changes(item):
            assert all(bare(way) in told for way in change.inputs)
        for shown in results.budgets(item):
            assert bare(f"{shown.name} {shown.reading}") in told
            assert all(bare(line.name) in told and bare(line.share) in told for line in shown.lines)


def test_it_tells_the_facts_of_the_envelope(path: Path, report: Report) -> None:
    told = text_of(path)
    for frame in report.frames:
        shown = [fact for item in frame.findings for fact in facts.of_finding(item)]
        shown += facts.of_reference(frame.reference) if frame.reference else ()
        shown += facts.of_room(frame.room_air) if frame.room_air else ()
        shown += [fact for strip in frame.strips for fact in facts.of_strip(strip)]
        for fact in shown:
            assert all(bare(part) in told for part in (fact.name, fact.text, fact.note)), fact
        for risk in frame.surface_at_risk:
            assert bare(facts.share(risk)) in told
            assert bare(facts.area(risk)) in told
    assert bare("Compared with F02") in told
    assert bare("Did not change: F01-1") in told


def test_what_pressure_changed_is_called_a_leak_only_where_one_would_look_so(
    report: Report, tasks: tuple[FrameTask, ...], out: Path
) -> None:
    wall = report.frames[0]
    assert wall.pair
    airs = {"indoor_air_c": Input(20.0, 0.5, "log"), "outdoor_air_c": Input(1.0, 0.5, "log")}
    leak, otherwise = bare("consistent with air leakage; verify with smoke"), bare("not that of a leak, which")
    seen = replace(wall, inputs=wall.inputs | airs)
    told = text_of(write(replace(report, frames=(seen, *report.frames[1:])), tasks, out))
    assert bare("Colder:") + leak in told
    assert otherwise not in told
    outward = replace(seen, pair=replace(wall.pair, pressure_pa=50.0))
    told = text_of(write(replace(report, frames=(outward, *report.frames[1:])), tasks, out))
    assert leak not in told
    assert bare("Colder:") + otherwise + bare("leaves no trace on this side") in told
    unsure = tuple(replace(finding, indication=None) for finding in wall.findings)
    told = text_of(write(replace(report, frames=(replace(wall, findings=unsure), *report.frames[1:])), tasks, out))
    assert leak not in told
    assert bare("Colder: not told: the side seen and the temperatures of both airs are not all known.") in told
    assert bare("Cannot be told at this pressure: F01-1.") in told
    assert bare("Did not change") not in told


def test_settings_of_the_survey_are_not_among_its_texts(
    report: Report, tasks: tuple[FrameTask, ...], out: Path
) -> None:
    survey = report.survey["survey"]
    assert isinstance(survey, dict)
    settings = {key: f"set{key}" for key in ("history", "frame_table", "criteria", "standards", "decimal_comma")}
    told = text_of(write(replace(report, survey={**report.survey, "survey": {**survey, **settings}}), tasks, out))
    assert [text for text in settings.values() if bare(text) in told] == []


def test_every_input_stands_with_its_origin(path: Path, report: Report) -> None:
    told = text_of(path)
    for frame in report.frames:
        for key, entry in frame.inputs.items():
            assert bare(texts.name(key)) in told
            assert bare(texts.origin(entry.from_)) in told


def test_it_tells_conditions_costs_checklist_assets_and_cautions(path: Path, report: Report) -> None:
    told = text_of(path)
    for check in report.conditions_review:
        assert all(bare(part) in told for part in (check.check, check.requirement, check.verdict))
    for table in season_table.tables(report):
        lines = [line for part in table.parts for line in (*part.lines, part.total) if line]
        assert bare(table.basis) in told
        assert all(bare(part) in told for line in lines for part in (line.what, line.energy, line.cost))
    for item in report.checklist:
        assert bare(item.item) in told
    for asset in report.assets:
        assert bare(asset.description) in told
    for caution in texts.cautions_for(report.frames, has_season=True):
        assert bare(caution) in told
    assert bare("blocked by scaffolding") in told
    assert bare("f03.tif: expected a readable TIFF") in told


def test_the_summary_is_one_page_with_the_most_important_first(path: Path, report: Report) -> None:
    reader = read(path)
    starts = {title: number for _, title, number in outline(reader)}
    assert starts["What stays open"] == starts["Summary"] + 1
    told = bare(reader.pages[starts["Summary"] - 1].extract_text())
    urgent, lasting = bare("S01-1"), bare("F01-2")  # at once, and investigate
    assert 0 < told.find(bare("phase 2 lug")) < told.find(lasting)
    assert 0 < told.find(urgent) < told.find(lasting)
    assert bare(texts.overall(report.claim)) in told
    assert bare("1 met, 1 not met, 1 not recorded") in told


def test_the_repair_list_is_complete_and_leads_the_summary(
    switch_room: Report, tasks: tuple[FrameTask, ...], out: Path
) -> None:
    path = write(switch_room, tasks, out)
    told = text_of(path)
    listed = repair_list.shown(switch_room, in_order(switch_room), {task.id: task for task in tasks}, out)
    for line in (*listed.repair, *listed.again):
        item = line.item
        assert all(bare(part) in told for part in (item.what, item.action, item.inspect_again, line.delta, line.sure))
    assert bare(texts.repairs("safety")) in told
    reader = read(path)
    starts = {title: number for _, title, number in outline(reader)}
    assert bare(listed.repair[0].item.what) in bare(reader.pages[starts["Summary"] - 1].extract_text())
    assert list(reader.pages[starts["Repair list"] - 1].images)


def test_the_sheet_of_a_component_tells_limit_joint_and_trend(
    switch_room: Report, tasks: tuple[FrameTask, ...], out: Path
) -> None:
    told = text_of(write(switch_room, tasks, out))
    item = switch_room.frames[0].components[1]
    assert item.trend
    assert item.joint
    shown = [*component_facts.of_component(item), *component_facts.of_joint(item)]
    shown += component_facts.of_trend(item.trend)
    assert len(shown) > 10
    for fact in shown:
        assert all(bare(part) in told for part in (fact.name, fact.text, fact.note)), fact


def test_the_thermal_picture_is_there_pixel_by_pixel(path: Path, out: Path) -> None:
    reader = read(path)
    starts = {title.split()[0]: number for _, title, number in outline(reader)}
    with Image.open(out / "frames" / "F01" / "annotated.png") as opened:
        expected = np.asarray(opened.convert("RGB"))
    seen = [np.asarray(one.image.convert("RGB")) for one in reader.pages[starts["F01"] - 1].images if one.image]
    assert any(image.shape == expected.shape and (image == expected).all() for image in seen)


def test_the_photograph_of_a_frame_stands_beside_it(
    report: Report, tasks: tuple[FrameTask, ...], out: Path, tmp_path: Path
) -> None:
    photo = tmp_path / "photo.jpg"
    exif = Image.Exif()
    exif[0x010E] = "GPS-secret"  # ImageDescription
    Image.new("RGB", (1600, 1200), (90, 140, 60)).save(photo, exif=exif)
    with_photo = (replace(tasks[0], photo_path=str(photo)), *tasks[1:])
    path = write(report, with_photo, out)
    reader = read(path)
    starts = {title.split()[0]: number for _, title, number in outline(reader)}
    sizes = [one.image.size for one in reader.pages[starts["F01"] - 1].images if one.image]
    assert (520, 390) in sizes
    assert b"GPS-secret" not in path.read_bytes()


def test_a_frame_whose_picture_is_missing_still_has_its_sheet(
    report: Report, tasks: tuple[FrameTask, ...], out: Path
) -> None:
    (out / "frames" / "F01" / "annotated.png").unlink()
    assert bare("The picture of this frame is missing") in text_of(write(report, tasks, out))


def hostile(record: Any, text: str) -> Any:
    """A record with `text` in every string that a person could have written, however deep."""
    kept = {"status", "kind", "claim", "sense", "verdict", "from_", "id", "sha256", "dtype", "decision", "key", "frame"}
    if is_dataclass(record) and not isinstance(record, type):
        return replace(
            record,
            **{f.name: hostile(getattr(record, f.name), text) for f in fields(record) if f.name not in kept},
        )
    if isinstance(record, str):
        return text
    if isinstance(record, tuple):
        return tuple(hostile(entry, text) for entry in record)
    if isinstance(record, dict):
        return {key: hostile(entry, text) for key, entry in record.items()}
    return record


@pytest.mark.parametrize("text", HOSTILE, ids=range(len(HOSTILE)))
def test_whatever_a_text_holds_it_is_shown_as_text(
    report: Report, switch_room: Report, tasks: tuple[FrameTask, ...], out: Path, text: str
) -> None:
    for one in (report, switch_room):
        path = write(hostile(one, text), tasks, out)
        reader = read(path)
        assert all(page.get_textpage().count_chars() > 40 for page in pypdfium2.PdfDocument(path))
        opened = reader.trailer["/Root"].get("/OpenAction", [])  # type: ignore[union-attr]
        assert isinstance(opened, list)  # a view of the first page, not an action
        assert not {"/AA", "/Names", "/AcroForm"} & reader.trailer["/Root"].keys()  # type: ignore[union-attr]
        for page in reader.pages:
            for annotation in page.get("/Annots", ()):
                assert "/A" not in annotation.get_object()  # nothing but places within the document
    if text.isascii() and text.isprintable() and len(text) < 1000:
        assert bare(text) in text_of(path)


def test_a_very_long_text_is_all_there(report: Report, tasks: tuple[FrameTask, ...], out: Path) -> None:
    wall = replace(report.frames[0], notes="x" * 10_000)
    told = text_of(write(replace(report, frames=(wall, *report.frames[1:])), tasks, out))
    assert told.count("x") >= 10_000


def test_what_the_font_lacks_is_a_box_and_the_paper_says_so(
    report: Report, tasks: tuple[FrameTask, ...], out: Path
) -> None:
    wall = replace(report.frames[0], notes="壁の断熱材")
    told = text_of(write(replace(report, frames=(wall, *report.frames[1:])), tasks, out))
    assert MISSING * 5 in told
    assert bare(f"{MISSING} stands for a character") in told


def test_right_to_left_text_stands_at_the_right(report: Report, tasks: tuple[FrameTask, ...], out: Path) -> None:
    wall = replace(report.frames[0], notes="שלום עולם")
    document = pypdfium2.PdfDocument(write(replace(report, frames=(wall, *report.frames[1:])), tasks, out))
    for page in document:
        letters = page.get_textpage()
        for k in range(letters.count_chars()):
            if letters.get_text_range(k, 1) == "ש":
                assert letters.get_charbox(k)[2] == pytest.approx(193 / 25.4 * 72, abs=3)  # the right margin, 17 mm
                return
    pytest.fail("the text is not there")


def test_a_review_stands_beside_what_it_decides(report: Report, tasks: tuple[FrameTask, ...], out: Path) -> None:
    item = report.frames[0].findings[0]
    decision = Decision(item.key, item.id, "F01", "rejected", None, None, None, "A cable duct, opened up.", {})
    review = Review("R. Viewer", "2026-02-01", "", (decision,))
    status = ReviewStatus(item.key, item.id, "F01", "rejected", None, None, "R. Viewer", "2026-02-01", "", ())
    seen = replace(report, reviews=(review,), review_status=(status,))
    told = text_of(write(seen, tasks, out))
    assert bare("Rejected by R. Viewer, 2026-02-01") in told
    assert bare("A cable duct, opened up.") in told
    assert bare("Reviewed by R. Viewer") in told


def test_units_decimal_mark_and_days_are_those_the_survey_asks_for(
    report: Report, tasks: tuple[FrameTask, ...], out: Path
) -> None:
    survey = report.survey["survey"]
    assert isinstance(survey, dict)
    asked = {**survey, "display_units": "us", "decimal_comma": True, "date_format": "%d.%m.%Y"}
    told = text_of(write(replace(report, survey={**report.survey, "survey": asked}), tasks, out))
    item = report.frames[0].findings[0]
    assert item.extreme_c == Estimate(15.4312, 0.61)
    assert bare("59,8 ± 2,2") in told  # 15.4312 °C · 1.8 + 32 = 59.78 °F, U = 2 · 0.61 · 1.8 = 2.20
    assert "18.01.2026" in told
    assert bare("Temperatures and their differences are °F; 1,8 °F of difference are 1 K.") in told
    for si in ("W/m²", "m²·K/W", "W/(m²·K)", "W/K"):
        assert bare(si) not in told


def test_more_frames_than_a_volume_holds_are_in_volumes(
    report: Report, tasks: tuple[FrameTask, ...], out: Path, monkeypatch: pytest.MonkeyPatch
) -> None:
    assert FRAMES_IN_A_VOLUME == 200
    (out / "report-7.pdf").write_bytes(b"of an earlier run")
    (out / "report-mine.pdf").write_bytes(b"not one of ours")
    monkeypatch.setattr(pdf, "FRAMES_IN_A_VOLUME", 3)
    path = write(report, tasks, out)
    assert path == out / "report.pdf"
    names = [one.name for one in out.glob("*.pdf")]
    assert sorted(names) == ["report-1.pdf", "report-2.pdf", "report-mine.pdf", "report.pdf"]
    first, second = (read(out / f"report-{number}.pdf") for number in (1, 2))
    assert [title.split()[0] for level, title, _ in outline(first) if level == 1] == ["F01", "F02", "F03"]
    assert [title.split()[0] for level, title, _ in outline(second) if level == 1] == ["S01"]
    summary = text_of(path)
    starts = {title.split()[0]: number for _, title, number in outline(second)}
    assert bare(f"volume 2, page {starts['S01']}") in summary
    assert bare("phase 2 lug") in summary
    assert bare("Volume 2 of 2: frames S01 to S01") in text_of(out / "report-2.pdf")
    monkeypatch.undo()
    write(report, tasks, out)
    assert sorted(one.name for one in out.glob("*.pdf")) == ["report-mine.pdf", "report.pdf"]


def test_a_report_of_no_frames_is_still_a_document(report: Report, out: Path) -> None:
    empty = replace(report, frames=(), next_visit=(), assets=(), seasons=(), conditions_review=())
    assert bare(texts.cautions([])[0]) in text_of(write(empty, (), out))


def test_a_report_whose_frames_all_failed_says_so(report: Report, out: Path) -> None:
    lost = report.frames[2]
    frames: tuple[FrameReport, ...] = tuple(replace(lost, id=f"L{number}") for number in range(30))
    told = text_of(write(replace(report, frames=frames, next_visit=(), seasons=()), (), out))
    assert told.count(bare("This frame was not analysed.")) == 30


def test_very_many_findings_of_a_frame_are_all_in_the_table(
    report: Report, tasks: tuple[FrameTask, ...], out: Path
) -> None:
    first: Finding = report.frames[0].findings[0]
    many = tuple(replace(first, id=f"F01-{k}", key=f"k{k}", label=k) for k in range(1, 151))
    path = write(replace(report, frames=(replace(report.frames[0], findings=many, pair=None),)), tasks[:1], out)
    reader = read(path)
    starts = {title: number for _, title, number in outline(reader)}
    pages = [page.extract_text() for page in reader.pages[starts["Anomalies"] - 1 : starts["Assets"]]]
    assert all(f"F01-{k}" in "".join(pages) for k in range(1, 151))
    of_table = [page for page in pages if "F01-" in page and "Anomaly" in page]
    assert len(of_table) >= 3  # its heading stands on each of them
    assert bare("the 30 foremost of 150") in text_of(path)
