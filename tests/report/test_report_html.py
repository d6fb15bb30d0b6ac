"""report.html: self-contained, complete, accessible, and never anything but text where text was given."""

from __future__ import annotations

import re
from dataclasses import fields, is_dataclass, replace
from functools import cache
from importlib.resources import files
from itertools import pairwise
from pathlib import Path
from typing import Any

import numpy as np
import pytest
from report.pages import Page

from irsurvey.model import Estimate, FrameTask, Maps, Report
from irsurvey.numbers import shown
from irsurvey.report import frame_files
from irsurvey.report.html import page, write
from irsurvey.report.open_points import Open, gathered, not_cleared

RTL = "\u202eשלום עולם مرحبا\u202c"
HOSTILE = [
    "<script>alert(1)</script>",
    "\"'><img src=x onerror=alert(1)>",
    "</style></title><svg onload=alert(1)>",
    "{{ 7 * 7 }}{% for x in () %}",
    "&lt;b&gt; & <b>",
    RTL,
    "x" * 10_000,
    "many words " * 900,
    "control \x00\x08\x1b characters",
]


def words(text: str) -> str:
    """A text as a page shows it: runs of white space as one space."""
    return re.sub(r"\s+", " ", text)


@pytest.fixture
def out(report: Report, wall_maps: Maps, board_maps: Maps, tmp_path: Path) -> Path:
    clean = replace(wall_maps, labels=np.zeros_like(wall_maps.labels))
    for frame, maps in zip(report.frames, (wall_maps, clean, None, board_maps), strict=True):
        if maps:
            frame_files.write(frame, maps, tmp_path)
    return tmp_path


@pytest.fixture
def shown_page(report: Report, tasks: tuple[FrameTask, ...], out: Path) -> Page:
    return Page(page(report, tasks, out))


def hostile(record: Any, text: str) -> Any:
    """A record with `text` in every string that a person could have written, however deep."""
    kept = {"status", "kind", "claim", "sense", "verdict", "from_", "id", "sha256", "dtype"}
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


INSIDE = "#", "data:image/png;base64,", "data:image/jpeg;base64,"


def test_nothing_outside_the_file_is_asked_for(shown_page: Page) -> None:
    for tag, attributes in shown_page.elements:
        for name in ("src", "href", "srcset", "poster", "data", "action", "background"):
            value = attributes.get(name)
            assert value is None or value.startswith(INSIDE), (tag, name, value)
    assert not shown_page.all("link", "iframe", "object", "embed", "base", "form")
    assert {script.get("src") for script in shown_page.all("script")} == {None}


def test_the_style_asks_for_nothing_outside_either(report: Report, out: Path) -> None:
    style = re.search(r"<style>(.*?)</style>", page(report, (), out), re.DOTALL)
    assert style
    assert not re.search(r"url\(|@import|http", style[1])


def test_the_page_forbids_itself_every_request(shown_page: Page) -> None:
    policy = next(meta["content"] for meta in shown_page.all("meta") if "http-equiv" in meta)
    allowed = r"default-src 'none'; img-src data:; style-src 'unsafe-inline'; script-src( 'sha256-[\w+/]{43}='){2}"
    assert re.fullmatch(allowed, policy)  # the page's own two scripts, by their hashes, and no other


def test_every_frame_finding_and_component_has_its_place(report: Report, shown_page: Page) -> None:
    ids = {attributes["id"] for _, attributes in shown_page.elements if "id" in attributes}
    assert {f"frame-{frame.id}" for frame in report.frames} <= ids
    assert {f"finding-{finding.id}" for frame in report.frames for finding in frame.findings} <= ids
    assert {"component-S01-A", "component-S01-B", "component-S01-C"} <= ids
    for frame in report.frames:
        for part in frame.components:
            assert part.name in shown_page.text


def test_identifiers_are_unique_and_every_link_leads_somewhere(shown_page: Page) -> None:
    ids = [attributes["id"] for _, attributes in shown_page.elements if "id" in attributes]
    assert len(ids) == len(set(ids))
    targets = {link["href"] for link in shown_page.all("a")}
    assert targets <= {f"#{identifier}" for identifier in ids}
    assert {"#summary", "#frame-F03", "#finding-F01-1", "#component-S01-B"} <= targets


def test_every_tag_that_opens_closes(shown_page: Page) -> None:
    assert shown_page.open == []


KINDS = "jpeg", "png"  # of the small pictures in the map of frames, and of those on the sheets


def test_the_page_can_be_heard(report: Report, shown_page: Page) -> None:
    # WCAG 2.2: 3.1.1 language of page, 1.1.1 text alternatives, 1.3.1 info and relationships, 2.4.1 bypass blocks
    assert shown_page.all("html") == [{"lang": "en"}]
    every = shown_page.all("img")
    small, pictures = ([one for one in every if f"image/{kind}" in (one["src"] or "")] for kind in KINDS)
    seen = [frame.id for frame in report.frames if frame.status != "failed"]
    assert [one["alt"] for one in small] == [f"Thermal picture of frame {id_}" for id_ in seen]
    change = pictures.pop(1)
    assert (change["alt"] or "").startswith("Change of surface temperature from frame F02 to frame F01, colour scale")
    for frame, picture in zip((report.frames[0], report.frames[1], report.frames[3]), pictures, strict=True):
        assert f"Surface temperatures of frame {frame.id}, colour scale" in (picture["alt"] or "")
    levels = [int(tag[1]) for tag, _ in shown_page.elements if re.fullmatch(r"h[1-6]", tag)]
    assert levels.count(1) == 1
    assert levels[0] == 1
    assert all(after <= before + 1 for before, after in pairwise(levels))
    assert all(header.get("scope") in ("row", "col") for header in shown_page.all("th"))
    assert len(shown_page.all("caption")) == len(shown_page.all("table"))
    assert next(link for link in shown_page.all("a"))["href"] == "#summary"


def luminance(colour: str) -> float:
    """Relative luminance of "#rrggbb" (WCAG 2.2)."""
    parts = [int(colour[i : i + 2], 16) / 255 for i in (1, 3, 5)]
    linear = [part / 12.92 if part <= 0.04045 else ((part + 0.055) / 1.055) ** 2.4 for part in parts]
    return 0.2126 * linear[0] + 0.7152 * linear[1] + 0.0722 * linear[2]


@cache
def style() -> dict[str, dict[str, str]]:
    """Selector → property → value of report.css, outside media queries; #rgb written out, variables put in."""
    css = (files("irsurvey.report") / "templates" / "report.css").read_text(encoding="utf-8").split("@media")[0]
    css = re.sub(r"#([0-9a-f])([0-9a-f])([0-9a-f])\b", r"#\1\1\2\2\3\3", css)
    variables = dict(re.findall(r"(--\w+): (#\w{6})", css))
    css = re.sub(r"var\((--\w+)\)", lambda match: variables.get(match[1], match[0]), css)
    rules: dict[str, dict[str, str]] = {}
    for selectors, body in re.findall(r"([^{}]+)\{([^{}]*)\}", css):
        properties = dict(re.findall(r"([\w-]+):\s*([^;]+);", body + ";"))
        for selector in selectors.split(","):
            rules.setdefault(selector.strip(), {}).update(properties)
    return rules


@pytest.mark.parametrize(
    ("text", "ground"),
    [
        ("body", "body"),
        (".quiet", ".card"),
        ("dt", "body"),
        ("figcaption", ".card"),
        ("thead th", ".card"),
        ("a", "body"),
        ("h1", "body"),
        (".figures .alert b", ".card"),
        ("footer", "body"),
        *((f".chip.{kind}", f".chip.{kind}") for kind in ("ok", "weak", "ux", "u1", "u2", "u3", "u4")),
        ("dt", ".card"),
        ("summary", ".card"),
        (".mark", ".mark"),
        (".mark.dark", ".mark.dark"),
    ],
)
def test_text_stands_out_from_its_ground(text: str, ground: str) -> None:
    foreground = style()[text].get("color") or style()[".chip"]["color"]
    bright, dark = sorted((luminance(foreground), luminance(style()[ground]["background"][:7])), reverse=True)
    assert (bright + 0.05) / (dark + 0.05) >= 4.5  # WCAG 2.2, 1.4.3: contrast (minimum), AA


def test_bars_stand_out_from_their_track_and_text_from_its_bar() -> None:
    ink, tint, track = (luminance(colour) for colour in (variable("bar-ink"), variable("bar-tint"), "#eeece6"))
    assert (track + 0.05) / (ink + 0.05) >= 3  # WCAG 2.2, 1.4.11: non-text contrast
    assert (tint + 0.05) / (luminance(style()["body"]["color"]) + 0.05) >= 4.5  # 1.4.3


def variable(name: str) -> str:
    return style()[":root"][f"--{name}"]


def test_results_carry_their_uncertainty_and_unit(report: Report, shown_page: Page) -> None:
    finding = report.frames[0].findings[0]
    text = shown_page.text.replace("\u00a0", " ")
    assert "colder than its reference, ΔT −2.53 ± 0.24 K over 0.419 ± 0.043 m²" in text
    for key in ("mean_c", "extreme_c", "heat_flux_w_m2", "excess_heat_w", "temperature_factor"):
        assert shown(getattr(finding, key)).replace("\u00a0", " ") in text


def test_the_summary_names_the_most_important_first(shown_page: Page) -> None:
    text = shown_page.text
    summary = text[text.index("What was found") : text.index("What may be claimed")]
    places = [summary.index(name) for name in ("S01-1", "phase 2 lug", "F01-1", "phase 3 bare bar", "F01-2")]
    assert places == sorted(places)
    assert "phase 1 lug, Feeder" not in summary  # asks for no action


def test_a_clean_frame_is_a_bounded_statement(shown_page: Page) -> None:
    assert (
        "This frame would have shown deviations of at least 0.4 K in the picture (after blur) "
        "over at least 10 cm² (25 pixels); none was found. "
        "Smaller or weaker ones may be there unseen." in shown_page.text
    )


def test_a_frame_that_allows_no_claim_clears_nothing(report: Report, tasks: tuple[FrameTask, ...], out: Path) -> None:
    clean = replace(report.frames[1], claim="not valid", claim_reason="the sun was on the wall")
    text = Page(page(replace(report, frames=(clean,)), tasks, out)).text
    assert "none was found" in text
    assert "it clears nothing" in text
    assert "the whole frame: the sun was on the wall" in text


def test_a_failed_frame_is_shown_with_its_reason(report: Report, shown_page: Page) -> None:
    assert report.frames[2].reason
    assert shown_page.text.count(report.frames[2].reason) == 2  # summary and sheet
    assert "This frame was not analysed. It shows nothing and clears nothing." in shown_page.text


def test_what_could_not_be_cleared_is_listed(report: Report) -> None:
    found = [(point.frames[0].id, point.what, point.why) for point in not_cleared(report)]
    assert found == [
        ("S01", "40 pixels", "no temperature could be measured there"),
        ("S01", "phase 3 bare bar", "Too reflective for a claim."),
    ]


def test_a_finding_that_asks_for_nothing_is_still_not_cleared(report: Report) -> None:
    wall = report.frames[0]
    mild, other = wall.findings
    mild = replace(mild, urgency=0, outcome="not cleared")
    found = [point.what for point in not_cleared(replace(report, frames=(replace(wall, findings=(mild, other)),)))]
    assert found == ["finding F01-1"]


def test_results_of_a_frame_that_are_open_for_one_reason_are_one_line(report: Report) -> None:
    wall = report.frames[0]
    many = [Open((wall,), f"finding F01-{k}", "automatic reference", f"k{k}") for k in range(1, 40)]
    other = [Open((report.frames[3],), "bar", "too reflective", "b"), Open((wall,), "40 pixels", "not measured")]
    lines = [(point.what, point.why) for point in gathered([*many, *other])]
    assert lines == [
        ("39 of its results", "automatic reference"),
        ("bar", "too reflective"),
        ("40 pixels", "not measured"),
    ]
    assert [point.what for point in gathered(many[:2])] == ["finding F01-1, finding F01-2"]


def test_results_of_many_frames_that_are_open_for_one_reason_are_one_line(report: Report) -> None:
    frames = [replace(report.frames[0], id=f"W{k}") for k in range(5)]
    results = [Open((frame,), f"finding {frame.id}-1", "automatic reference", frame.id) for frame in frames]
    blind = [Open((frame,), "the whole frame", "no reference") for frame in frames]
    lost = [Open((frame,), f"{k} pixels", "not measured") for k, frame in enumerate(frames)]
    found = gathered([*results, *blind, *lost])
    told = [(len(point.frames), point.what) for point in found[:2]]
    assert told == [(5, "5 of their results"), (5, "the whole frame")]
    assert [point.what for point in found[2:]] == [f"{k} pixels" for k in range(5)]  # each its own number
    assert [len(point.frames) for point in gathered(results[:3])] == [1, 1, 1]  # of a few, each by name


def test_what_is_not_cleared_is_never_labelled_no_action(report: Report, out: Path) -> None:
    # one-sided safety: an urgency of 0 beside "not cleared" would be read as all clear
    wall = report.frames[0]
    mild = replace(wall.findings[0], urgency=0, outcome="not cleared", assessments=())
    html = page(replace(report, frames=(replace(wall, findings=(mild,), components=()),)), (), out)
    chips = re.findall(r'class="chip[^"]*">([^<]+)<', html)
    assert chips.count("look again") == 3  # in the table, in the index and on its sheet
    assert not {"no action", "nothing found"} & set(chips)


def test_a_frame_in_which_nothing_was_compared_is_not_called_free_of_findings(report: Report, out: Path) -> None:
    wall = report.frames[0]
    assert wall.detectable
    blind = replace(wall, findings=(), reference=None, detectable=replace(wall.detectable, min_delta_k=None))
    text = Page(page(replace(report, frames=(blind,)), (), out)).text
    assert "nothing compared" in text
    assert "nothing found" not in text
    assert [point.what for point in not_cleared(replace(report, frames=(blind,)))] == ["the whole frame"]


def test_inputs_say_whether_they_were_stated_measured_or_assumed(shown_page: Page) -> None:
    text = shown_page.text.replace("\u00a0", " ")
    for line in (
        "Emissivity 0.920 ± 0.040 stated (survey)",
        "Reflected apparent temperature 20.5 ± 2.0 °C measured (in a frame)",
        "Air temperature along the path 21.0 ± 1.0 °C measured (logger) , ± assumed",
        "Distance 2.50 ± 0.10 m stated (frame) Air pressure",  # value and ± both stated, if in two places
        "Air pressure 1013.25 hPa stated (survey) Emissivity, cover plate",  # exact as stated
        "Relative humidity 45 ± 10 % assumed (default)",
        "Emissivity, cover plate 0.30 ± 0.10 assumed (material table)",
        "Lens shading (corner against centre) 0.00 ± 0.20 K assumed (default)",
        "Place of an outline 0.0 ± 2.0 px assumed (default)",
    ):
        assert line in text


def test_assessments_give_statement_source_and_probabilities(report: Report, shown_page: Page) -> None:
    text = shown_page.text.replace("\u00a0", " ")
    for finding in report.frames[0].findings:
        for assessment in finding.assessments:
            assert assessment.statement in text
    # only where an edge is near: 75 % against 25 %, not 99.71 % against 0.3 %
    assert "probability of each: below the limit 25 %, above the limit 75 %." in text
    assert "marked deviation >" not in text
    assert "Source: invented for this test" in text


def test_every_finding_and_component_says_what_is_done_about_it_and_how_sure_that_is(shown_page: Page) -> None:
    text = shown_page.text.replace("\u00a0", " ")
    assert "Outcome act: it asks for action" in text
    assert "Outcome cleared: no action, its uncertainty included" in text
    assert "Outcome not cleared: not shown to be sound, look again" in text
    assert "At the edge where action begins fail: past that edge by more than U" in text
    assert "At the edge where action begins pass: short of that edge by more than U" in text
    assert "ΔT truly beyond the least that counts probability > 99 %" in text
    assert text.count("At the edge where action begins") == 4  # one of six has no class, one no assessment
    assert "4 to act on 1 not cleared 1 cleared" in text


def test_a_fragile_class_says_which_changes_would_flip_it(shown_page: Page) -> None:
    assert (
        "Fragile. A change of −1.3 K in reflected apparent temperature, or of +0.021 in emissivity, would make it "
        "“slight deviation”. A change of +9.1 points in relative humidity would make it “severe deviation”."
        in shown_page.text
    )
    assert shown_page.text.count("Fragile.") == 1


def test_the_next_visit_leads_to_what_it_would_settle(report: Report, tasks: tuple[FrameTask, ...], out: Path) -> None:
    section = re.search(r'<section id="next-visit".*?</section>', page(report, tasks, out), re.DOTALL)
    assert section
    card = Page(section[0])
    assert [link["href"] for link in card.all("a")] == ["#finding-F01-2", "#component-S01-C", "#finding-S01-1"]
    assert "Put crumpled foil beside it and in the frame. It gives its reflected apparent temperature" in card.text
    assert card.text.index("foil") < card.text.index("Confirm the reference area")
    nothing = page(replace(report, next_visit=()), tasks, out)
    assert "next-visit" not in nothing.split("</style>")[1]


def test_a_budget_stands_beside_the_number_it_belongs_to(shown_page: Page) -> None:
    text = shown_page.text.replace("\u00a0", " ")
    # the first finding's ΔT, u = 0.142 K: 0.105 K/K · 1 K is 0.105 K, (0.105/0.142)² is 55 % of the variance
    assert "ΔT −3.13 ± 0.28 K Input u Sensitivity Contribution, K Share Reflected apparent temperature 1 K" in text
    assert "1 K 0.1 K per K 0.1 55 %" in text
    assert "Pixel noise, measurement spot of F01-1 0.046 K 1.1 K per K 0.05 12 %" in text
    assert "Film coefficient, as a factor of the one calculated 0.1 9.7 W/m² 0.97 5 %" in text


def test_a_budget_is_folded_on_screen_and_printed_all_the_same(shown_page: Page) -> None:
    folded = [one for one in shown_page.all("details") if one["class"] == "budgets"]
    assert len(folded) == 4  # two findings and two components have one
    assert not [attributes for attributes in folded if "open" in attributes]
    css = (files("irsurvey.report") / "templates" / "report.css").read_text(encoding="utf-8")
    on_paper = css[css.index("@media print") :]
    assert ".budgets::details-content { content-visibility: visible; block-size: auto; }" in on_paper


def test_a_bar_only_repeats_the_share_written_beside_it(
    report: Report, tasks: tuple[FrameTask, ...], out: Path
) -> None:
    # WCAG 2.2, 1.1.1 and 1.4.1: what the bar shows can be read as text
    shown = page(report, tasks, out)
    bars = re.findall(r'<li style="--bar:(\d+)%"><span>[^<]+</span><i></i><b>([^<]+)</b></li>', shown)
    assert len(bars) > 8
    for length, share in bars:
        assert abs(int(length) - int(re.sub(r"\D", "", share))) <= 1  # "< 1 %" may be a bar of 0


def test_budgets_of_many_findings_leave_the_page_small(
    report: Report, tasks: tuple[FrameTask, ...], tmp_path: Path
) -> None:
    wall = report.frames[0]
    terms = tuple(replace(wall.findings[0].budgets["delta_k"][0], share=0.1) for _ in range(10))
    full = dict.fromkeys(("delta_k", "extreme_c", "heat_flux_w_m2", "temperature_factor"), terms)

    def size(budgets: dict[str, Any]) -> int:
        many = tuple(
            replace(wall.findings[0], id=f"F01-{n}", key=f"k{n}", label=n, budgets=budgets) for n in range(1, 51)
        )
        return len(page(replace(report, frames=(replace(wall, findings=many),)), tasks, tmp_path).encode())

    assert (size(full) - size({})) / 50 < 10_000  # a tenth of a picture: the page grows by frames, not by budgets


def test_how_uncertainty_was_propagated_is_told_frame_by_frame(shown_page: Page) -> None:
    assert "Uncertainty first order" in shown_page.text
    assert "Uncertainty Monte Carlo, 20 000 draws" in shown_page.text


def test_a_drawn_interval_stands_below_its_reading(shown_page: Page) -> None:
    text = shown_page.text.replace("\u00a0", " ")
    assert "71.5 ± 2.8 68.9 to 74.4 (95 %)" in text
    assert "36.4 ± 1.8 34.7 to 38.2 (95 %)" in text


def test_heat_flux_and_u_value_of_the_reference_are_called_estimates(
    report: Report, tasks: tuple[FrameTask, ...], out: Path
) -> None:
    wall = report.frames[0]
    assert wall.reference
    text = Page(page(replace(report, frames=(wall,)), tasks, out)).text.replace("\u00a0", " ")
    assert "17.9 ± 8.2 W/m², an estimate" in text
    assert "0.90 ± 0.42 W/(m²·K), an estimate from one moment" in text
    none = {"heat_flux_w_m2": None, "u_value_w_m2k": None, "u_value_simple_w_m2k": None, "film_resistance_m2k_w": None}
    bare = replace(wall, reference=replace(wall.reference, **none), findings=(), strips=())
    text = Page(page(replace(report, frames=(bare,)), tasks, out)).text
    assert "U-value" not in text
    assert "What its reference area tells" not in text


def test_flags_are_explained_and_unknown_ones_shown(report: Report, tasks: tuple[FrameTask, ...], out: Path) -> None:
    frame = replace(report.frames[0], flags=("saturated", "a flag nobody explained"))
    text = Page(page(replace(report, frames=(frame,)), tasks, out)).text
    assert "saturated: The camera's range ended here" in text
    assert "a flag nobody explained" in text


def test_cautions_follow_the_kinds_of_survey(report: Report, tasks: tuple[FrameTask, ...], out: Path) -> None:
    both = Page(page(report, tasks, out)).text
    building = Page(page(replace(report, frames=report.frames[:2]), tasks, out)).text
    for text in (both, building):
        assert "One invented caution." in text
        assert "A normal picture does not prove that a part is sound or safe." in text
        assert "Local codes and licensed practice decide" in text
    assert "arc-flash" in both
    assert "arc-flash" not in building


@pytest.mark.parametrize("text", HOSTILE, ids=lambda text: text[:20])
def test_whatever_is_written_into_a_text_is_shown_as_text(
    report: Report, tasks: tuple[FrameTask, ...], out: Path, shown_page: Page, text: str
) -> None:
    attacked = hostile(report, text)
    written = {"title": text, "surveyor": text, "notes": text}
    attacked = replace(attacked, survey={"survey": written, "element": [{"id": text, "description": text}]})
    attacked_page = Page(
        page(attacked, tuple(replace(task, camera=replace(task.camera, name=text)) for task in tasks), out)
    )
    as_shown = words(re.sub(r"[\x00-\x08\x1b]", "\ufffd", text)).strip()
    assert as_shown in attacked_page.text
    assert attacked_page.open == []
    expected, found = ({tag for tag, _ in p.elements} for p in (shown_page, attacked_page))
    assert found <= expected
    for tag, attributes in attacked_page.elements:
        assert not [name for name in attributes if name.startswith("on")], tag
        for name in ("src", "href"):
            assert (attributes.get(name) or "#").startswith(INSIDE)


def test_a_long_text_does_not_push_the_summary_off_its_page(
    report: Report, tasks: tuple[FrameTask, ...], out: Path
) -> None:
    text = Page(page(hostile(report, "word " * 2000), tasks, out)).text
    summary = text[text.index("What was found") : text.index("What may be claimed")]
    assert len(summary) < 3000


def test_more_results_than_a_summary_holds_are_counted(report: Report, tasks: tuple[FrameTask, ...], out: Path) -> None:
    wall = report.frames[0]
    many = tuple(replace(wall.findings[0], id=f"F01-{n}", key=f"k{n}", label=n) for n in range(1, 31))
    text = Page(page(replace(report, frames=(replace(wall, findings=many),)), tasks, out)).text
    assert "18 more in the tables below." in text


def test_a_report_without_anything_found_says_so(report: Report, out: Path) -> None:
    bare = replace(report, frames=report.frames[1:2], conditions_review=(), assets=(), survey={})
    text = Page(page(bare, (), out)).text
    assert "No frame showed a deviation that asks for action." in text
    assert "Thermographic survey" in text


def test_a_missing_picture_is_admitted(report: Report, tasks: tuple[FrameTask, ...], tmp_path: Path) -> None:
    assert "The picture of this frame is missing from the output folder." in Page(page(report, tasks, tmp_path)).text


def test_the_same_report_gives_the_same_bytes(report: Report, tasks: tuple[FrameTask, ...], out: Path) -> None:
    first = write(report, tasks, out).read_bytes()
    assert write(report, tasks, out).read_bytes() == first
    assert b"secret" not in first
    assert str(out).encode() not in first


def test_every_number_of_a_finding_or_component_is_on_the_page(
    report: Report, tasks: tuple[FrameTask, ...], out: Path
) -> None:
    # each estimate gets a value that stands nowhere else on the page, so that a number left out is missed
    board = report.frames[3]
    for item in (report.frames[0].findings[0], board.components[1]):
        keys = [field.name for field in fields(item) if str(field.type) == "Estimate | None"]
        odd = {key: Estimate(7.0 + number / 100, 0.05) for number, key in enumerate(keys, 11)}
        marked = replace(item, **odd, flags=())
        findings, components = ((marked,), ()) if hasattr(marked, "sense") else ((), (marked,))
        text = Page(
            page(replace(report, frames=(replace(board, findings=findings, components=components),)), tasks, out)
        ).text
        missing = {key for key, estimate in odd.items() if f"{estimate.value:.2f} ±" not in text}
        # of a finding, heat flux and its reference stand side by side; a component is judged by its temperatures
        assert missing == ({"excess_heat_w_m2"} if findings else {"heat_flux_w_m2"})
