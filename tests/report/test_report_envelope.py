"""What report.html tells of buildings: claim, conditions, envelope, moisture, bridges, pressure, season, checklist."""

from __future__ import annotations

import re
from collections.abc import Callable
from dataclasses import replace
from pathlib import Path

import numpy as np
import pytest
from report.pages import Page, section

from irsurvey.model import ConditionCheck, Estimate, FrameReport, FrameTask, Indication, Input, Maps, Report
from irsurvey.report import frame_files, season_table
from irsurvey.report.condition_rows import rows
from irsurvey.report.html import page
from irsurvey.report.picture import NUMBERED
from irsurvey.report.pressure import leak_sense

Shown = Callable[[Report], str]


@pytest.fixture
def show(tasks: tuple[FrameTask, ...], wall_maps: Maps, report: Report, tmp_path: Path) -> Shown:
    """The page of a report as its text of HTML; frame F01 has its pictures."""
    frame_files.write(report.frames[0], wall_maps, tmp_path)
    return lambda shown: page(shown, tasks, tmp_path)


def with_wall(report: Report, **changes: object) -> Report:
    """The report with frame F01 alone, changed."""
    return replace(report, frames=(replace(report.frames[0], **changes),))  # type: ignore[arg-type]


def test_the_summary_begins_with_the_claim_of_the_whole_survey_and_its_reason(report: Report, show: Shown) -> None:
    summary = section(show(report), "summary").text
    assert summary.index("the frame F03 could not be read") < summary.index("What was found")
    assert "From most of this survey nothing may be concluded. Why: the frame F03" in summary


def test_the_summary_tells_what_a_finding_is_consistent_with_and_what_it_takes(report: Report, show: Shown) -> None:
    summary = section(show(report), "summary").text
    assert (
        "Consistent with missing or displaced insulation; excess heat 8.5 ± 1.7 W; "
        "in a heating season 34.0 ± 9.8 kWh (4.1 ± 1.4 EUR), an estimate" in summary
    )
    assert "in a heating season of the order of 10 kWh (of the order of 1 EUR), an estimate" in summary


@pytest.mark.parametrize(
    ("pattern", "told"),
    [("no typical pattern", "No typical pattern;"), ("possible reflection", "Possibly a reflection;")],
)
def test_what_is_no_pattern_of_a_defect_is_not_called_consistent_with_one(
    report: Report, show: Shown, pattern: str, told: str
) -> None:
    indication = Indication(pattern, "Consistent with nothing typical; verify by x.", {}, "x")
    finding = replace(report.frames[0].findings[0], indication=indication)
    summary = section(show(with_wall(report, findings=(finding,))), "summary").text
    assert told in summary
    assert "onsistent with" not in summary


def test_conditions_tell_what_they_leave_and_what_to_record(report: Report, show: Shown) -> None:
    text = section(show(report), "conditions").text
    assert text.index("not met") < text.index("not recorded") < text.index("≥ 10 K")
    assert "wind living-room ≤ 5 m/s nothing; to record: wind_m_s not recorded" in text
    assert "load switch room ≥ 40 % 31 not met patterns, no numbers" in text
    assert "indoor–outdoor air living-room ≥ 10 K 20 invented for this test" in text


def test_a_recorded_condition_has_its_unit_even_where_its_circumstances_were_assumed(
    report: Report, show: Shown
) -> None:
    # names and units as in the file of requirements
    review = (
        ConditionCheck("", "wind", "≤ 5 m/s", 3.2, "met", "x"),
        ConditionCheck("", "time dry, heavy construction (assumed)", "≥ 24 h", 30.0, "met", "x"),
        ConditionCheck("", "a check of nobody's", "≥ 1", None, "not recorded", "x", "not valid"),
    )
    text = section(show(replace(report, conditions_review=review)), "conditions").text
    assert "≤ 5 m/s 3.2 m/s x" in text
    assert "≥ 24 h 30 h x" in text
    assert "nothing; to record: a check of nobody's not recorded nothing x" in text


def test_groups_that_fared_alike_share_a_row_and_what_is_not_met_comes_first(report: Report) -> None:
    wind = ConditionCheck("kitchen", "wind", "≤ 5 m/s", 1.0, "met", "x")
    rain = ConditionCheck("attic", "time dry", "≥ 24 h", 3.0, "not met", "x", "qualitative")
    review = (
        wind,
        replace(wind, group="hall", value=2.5),
        replace(wind, group="attic", value=1.5),
        replace(rain, group="hall", value=30.0, verdict="met", limits_to=None),
        rain,
    )
    told = [(row.check.check, row.groups, row.recorded, row.check.verdict) for row in rows(review)]
    assert [(check, groups, recorded.replace("\u00a0", " "), verdict) for check, groups, recorded, verdict in told] == [
        ("time dry", "attic", "3 h", "not met"),
        ("wind", "all", "1 to 2.5 m/s", "met"),
        ("time dry", "hall", "30 h", "met"),
    ]
    assert len(rows(report.conditions_review)) == 3


def test_the_reference_tells_its_flux_by_parts_its_film_and_both_u_values(report: Report, show: Shown) -> None:
    text = Page(show(with_wall(report))).text
    assert "Heat flux 17.9 ± 8.2 W/m², an estimate 6.1 ± 3.8 W/m² to the air by convection; 11.8 ± 5.8 W/m²" in text
    assert "Film resistance of the face seen 0.131 ± 0.025 m²·K/W" in text
    assert "U-value 0.90 ± 0.42 W/(m²·K), an estimate from one moment" in text
    assert "U-value, from conventional film resistance 0.94 ± 0.68 W/(m²·K), an estimate from one moment" in text


def test_a_number_that_is_not_given_tells_why_and_what_would_make_it_possible(report: Report, show: Shown) -> None:
    wall = report.frames[0]
    assert wall.reference
    why = "under an open sky: measure sky_c and wind_m_s, or look from inside"
    refused = replace(
        wall.reference,
        u_value_w_m2k=None,
        u_value_simple_w_m2k=None,
        refusals={"u_value_w_m2k": why, "u_value_simple_w_m2k": why},
    )
    text = Page(show(with_wall(report, reference=refused))).text
    assert f"U-value; U-value, from conventional film resistance not given {why}" in text
    assert "not given no U-value is stated for the element: state u_value_w_m2k and run again" in text  # a finding
    assert "not given its U would be 128 % of it: ask for a larger difference of the airs" in text  # a strip


def test_a_finding_tells_what_it_means_for_the_envelope(report: Report, show: Shown) -> None:
    text = section(show(report), "finding-F01-1").text
    for line in (
        "Heat flux goes 14.1 ± 4.2 W/m² to the air by convection; 24.1 ± 6.6 W/m² to what the surface faces by",
        "Excess heat per kelvin between the two airs 0.425 ± 0.083 W/K",
        "U-value 1.91 ± 0.46 W/(m²·K), an estimate",
        "U-value above that of the reference by 1.02 ± 0.16 W/(m²·K), an estimate",
        "Temperature factor, at the film resistance seen 0.721 ± 0.062",
        "Temperature factor, at 0.25 m²·K/W as limits assume 0.573 ± 0.082",
        "Coldest spot minus dew point 5.4 ± 1.4 K probability of condensation at the moment of the survey: < 1 %",
        "Coldest spot minus mould limit 1.9 ± 1.5 K probability of mould conditions at the moment of the survey: 1 %",
        "Change with pressure 0.05 ± 0.22 K",
    ):
        assert line in text


def test_a_spot_too_small_to_measure_is_at_least_as_cold_and_as_likely_at_risk(report: Report, show: Shown) -> None:
    # one-sided safety: blur makes a small cold spot look warmer than it is
    small = replace(report.frames[0].findings[0], flags=("size-limited",))
    text = section(show(with_wall(report, findings=(small,))), "finding-F01-1").text
    assert "Coldest spot minus mould limit ≤ 1.9 ± 1.5 K" in text
    assert "probability of mould conditions at the moment of the survey: at least 1 %" in text
    assert "at 0.25 m²·K/W as limits assume ≤ 0.573 ± 0.082" in text


def test_an_indication_gives_its_cues_and_how_to_verify_it(report: Report, show: Shown) -> None:
    text = section(show(report), "finding-F01-1").text
    assert "Consistent with missing or displaced insulation; verify by borescope or opening up at one point." in text
    assert text.count("borescope") == 1  # its statement says so already
    assert (
        "What it was read from how steep its edge is, in its contrast 0.31 1/px "
        "how many times its width it is long 2.4 changed with the pressure no "
        "share of it with nearly its full contrast 0.83" in text
    )
    assert "distance to the nearest opening" not in text  # none was drawn
    assert "An indication, not proof." in text


def test_an_indication_that_does_not_say_how_is_completed(report: Report, show: Shown) -> None:
    bare = replace(report.frames[0].findings[0], indication=Indication("moisture", "", {}, "a moisture meter"))
    text = section(show(with_wall(report, findings=(bare,))), "finding-F01-1").text
    assert "Consistent with moisture Verify by a moisture meter." in text


def test_moisture_tells_the_room_air_and_how_much_of_the_surface_is_at_risk(report: Report, show: Shown) -> None:
    text = Page(show(with_wall(report))).text
    assert "Room air: its humidity was measured." in text
    assert "Dew point of the air 8.6 ± 1.9 °C" in text
    assert "Surface temperature needed against mould 12.0 ± 1.9 °C" in text
    assert "Mould (80 % humidity at the surface) 12.0 ± 1.9 °C 3 % (1 % to 8 %) 0.35 m² (0.12 to 0.9 m²) 62 %" in text
    assert "a margin clears nothing for the rest of the year" in text


def test_a_risk_without_a_scale_has_no_area(report: Report, show: Shown) -> None:
    risk = replace(
        report.frames[0].surface_at_risk[1], risk="a-criterion", area_m2=None, area_low_m2=None, area_high_m2=None
    )
    assert (
        "Limit of a-criterion 12.0 ± 1.9 °C 3 % (1 % to 8 %) – 62 %"
        in Page(show(with_wall(report, surface_at_risk=(risk,)))).text
    )


def test_a_strip_tells_its_numbers_its_warning_and_draws_its_profile(report: Report, show: Shown) -> None:
    html = show(with_wall(report))
    text = Page(html).text
    assert "Heat through the strip, as a factor of undisturbed wall 1.417 ± 0.094, an estimate" in text
    assert "Linear thermal transmittance Ψ 0.112 ± 0.048 W/(m·K), an estimate" in text
    assert "Temperature factor, at the film resistance seen 0.708 ± 0.062" in text
    assert "ends still have a gradient: Where the wall should be undisturbed" in text
    words = [(tag["aria-label"] or "").replace("\u00a0", " ") for tag in Page(html).all("svg")]
    assert words[1] == "Temperature along the strip, 15.2 to 18.5 °C over 0.3 m; undisturbed wall 18.6 °C"


AIRS = {"indoor_air_c": Input(20.5, 0.5, "log"), "outdoor_air_c": Input(1.0, 0.5, "log")}


def test_an_accepted_pair_tells_what_changed_and_what_did_not(report: Report, show: Shown) -> None:
    text = Page(show(with_wall(report, inputs=report.frames[0].inputs | AIRS))).text
    assert "the pressure inside was 50 Pa below that outside" in text
    assert "correlation 0.97 (1: alike)" in text
    assert (
        "Where the middle of this picture lies in the other 3.2 px to the right of its middle and 1.1 px above it, "
        "turned by 0.41°" in text
    )
    assert "Smallest change that counts 0.35 K" in text
    assert "a colder −1.62 ± 0.22 0.310 ± 0.040 F01-2 consistent with air leakage; verify with smoke" in text
    assert "b colder – 21.0 ± 8.0 cm² none lies there consistent with air leakage; verify with smoke" in text
    assert "Did not change: F01-1. That is consistent with the construction" in text


def test_only_what_is_known_not_to_change_is_called_construction(report: Report, show: Shown) -> None:
    wall = report.frames[0]
    first = wall.findings[0]
    assert first.indication
    untold = {key: value for key, value in first.indication.evidence.items() if key != "changed_with_pressure"}
    for indication in (None, replace(first.indication, evidence=untold)):
        findings = (replace(first, indication=indication), wall.findings[1])
        text = Page(show(with_wall(report, findings=findings))).text
        assert "Cannot be told at this pressure: F01-1." in text
        assert "Did not change" not in text


@pytest.mark.parametrize(
    ("pressure", "viewed_from", "indoor", "outdoor", "leak"),
    [
        # air flows from the higher pressure to the lower, and brings the temperature of where it comes from
        (-50.0, "inside", 20.0, 1.0, "cold"),
        (-50.0, "inside", 24.0, 33.0, "hot"),
        (50.0, "outside", 20.0, 1.0, "hot"),
        (50.0, "outside", 24.0, 33.0, "cold"),
        (50.0, "inside", 20.0, 1.0, ""),
        (-50.0, "outside", 20.0, 1.0, ""),
        (-50.0, "inside", 20.0, 18.0, ""),
        (-50.0, None, 20.0, 1.0, None),
    ],
)
def test_a_leak_shows_by_the_air_that_comes_through_it(
    report: Report,
    tasks: tuple[FrameTask, ...],
    pressure: float,
    viewed_from: str | None,
    indoor: float,
    outdoor: float,
    leak: str | None,
) -> None:
    wall = report.frames[0]
    assert wall.pair
    airs = {"indoor_air_c": Input(indoor, 0.5, "log"), "outdoor_air_c": Input(outdoor, 0.5, "log")}
    at = replace(wall, pair=replace(wall.pair, pressure_pa=pressure), inputs=wall.inputs | airs)
    assert leak_sense(at, replace(tasks[0], viewed_from=viewed_from)) == leak
    assert leak_sense(wall, tasks[0]) is None  # the airs were not recorded


def test_a_change_of_the_wrong_sense_is_not_called_leakage(report: Report, show: Shown) -> None:
    wall = report.frames[0]
    assert wall.pair
    warmer = tuple(replace(change, sense="hot") for change in wall.pair.changes)
    text = Page(show(with_wall(report, inputs=wall.inputs | AIRS, pair=replace(wall.pair, changes=warmer)))).text
    assert "consistent with air leakage" not in text
    assert text.count("not that of a leak, which would be colder at this pressure") == 2
    outward = replace(wall.pair, pressure_pa=50.0)
    text = Page(show(with_wall(report, inputs=wall.inputs | AIRS, pair=outward))).text
    assert "consistent with air leakage" not in text
    assert text.count("not that of a leak, which leaves no trace on this side at this pressure") == 2
    text = Page(show(report)).text
    assert "consistent with air leakage" not in text
    assert text.count("not told: the side seen and the temperatures of both airs are not all known") == 2


def test_a_pair_that_could_not_be_compared_concludes_nothing(report: Report, show: Shown) -> None:
    pair = report.frames[0].pair
    assert pair
    refused = replace(pair, accepted=False, reason="The two pictures are not alike.", changes=(), shift_px=None)
    text = Page(show(with_wall(report, pair=refused))).text
    assert "not compared The two pictures are not alike. Nothing is concluded about air leakage" in text
    assert "Did not change" not in text
    assert "consistent with air leakage" not in text


def test_a_pair_without_changes_clears_nothing(report: Report, show: Shown) -> None:
    pair = report.frames[0].pair
    assert pair
    text = Page(show(with_wall(report, pair=replace(pair, changes=())))).text
    assert "Nothing changed by as much as counts. That clears nothing" in text


def test_sections_without_anything_to_tell_are_not_there(report: Report, show: Shown) -> None:
    clean = replace(report.frames[1], reference=None)
    bare = replace(report, frames=(clean,), seasons=(), checklist=(), conditions_review=())
    html = show(bare)
    text = Page(html).text
    for heading in ("What it costs", "Moisture", "Thermal bridges", "With and without", "Roof survey", "complete?"):
        assert heading not in text
    for id_ in ("season", "checklist", "conditions", "roof"):
        assert f'id="{id_}"' not in html
    assert "no promise" not in text
    assert "weeks" not in text  # the caution about moisture


def energies(text: str) -> list[tuple[float, float]]:
    """Value and U of every energy of a text, in its order."""
    return [(float(value), float(u)) for value, u in re.findall(r"([\d.]+) ± ([\d.]+) kWh", text)]


def test_the_rows_an_owner_reads_add_up_to_the_total(report: Report, show: Shown) -> None:
    season = report.seasons[0]
    sure = replace(season, findings=tuple(replace(row, order_of_magnitude=False) for row in season.findings))
    table = section(show(replace(report, seasons=(sure,))), "season").text
    first, second, together = (energy for energy, _ in energies(table)[:3])
    # each is rounded to the place of its U: halves of 0.1, 1 and 1 kWh
    assert first + second == pytest.approx(together, abs=0.05 + 0.5 + 0.5, rel=0)
    assert "Together 44 ± 18 kWh 5.3 ± 2.3 EUR" in table


def test_an_owner_reads_where_what_and_how_much(report: Report, show: Shown) -> None:
    table = section(show(report), "season").text
    for line in (
        "Colder patch F01-1 consistent with missing or displaced insulation Living room, north wall 34.0 ± 9.8 kWh",
        "Colder patch F01-2 Living room, north wall of the order of 10 kWh of the order of 1 EUR",
        "North wall, solid brick Living room, north wall 1290 ± 680 kWh 155 ± 88 EUR",
        "It rests on 3000 ± 600 degree days (stated in the survey), 90 % efficiency of the heating, 0.12 EUR per kWh.",
        "each day counts by as many degrees as it is too cold outdoors",
        "the total counts it twice",
        "do not add the two tables",
        "no promise of a saving",
    ):
        assert line in table
    assert not re.search(r"W/K|K·d|ΔT|λ|Ψ", table)  # no symbol an owner would have to know


def test_a_cooling_season_speaks_of_heat_outdoors_and_without_a_price_of_no_money(report: Report, show: Shown) -> None:
    season = replace(report.seasons[0], sense="cooling", efficiency=3.2, price=None)
    rows = tuple(replace(row, cost=None) for row in season.findings)
    table = section(show(replace(report, seasons=(replace(season, findings=rows, elements=()),))), "season").text
    assert "Cooling season" in table
    assert "a performance factor of 3.2 of the cooling." in table
    assert "too hot outdoors" in table
    assert "Cost" not in table
    assert "EUR" not in table
    assert "two tables" not in table


def test_places_that_take_next_to_nothing_share_a_line_and_the_total_stays(report: Report, show: Shown) -> None:
    season = report.seasons[0]
    tiny = replace(season.findings[0], energy_kwh=Estimate(0.31, 0.05), cost=Estimate(0.037, 0.007))
    many = tuple(replace(tiny, of=f"F01-{n}") for n in range(3, 8))
    table = section(
        show(replace(report, seasons=(replace(season, findings=(*season.findings, *many)),))), "season"
    ).text
    assert "5 places that take less than 1 kWh each – about 1.6 kWh about 0.18 EUR" in table  # 5 · 0.31 and 5 · 0.037
    assert "F01-5" not in table
    assert "Together 44 ± 18 kWh" in table
    alone = section(show(replace(report, seasons=(replace(season, findings=many[:1]),))), "season").text
    assert "F01-3" in alone


def test_what_may_be_large_is_never_put_among_the_small(report: Report) -> None:
    season = report.seasons[0]
    unsure = replace(season.findings[0], energy_kwh=Estimate(0.31, 0.9), order_of_magnitude=True)
    shown = season_table.tables(replace(report, seasons=(replace(season, findings=(unsure, unsure)),)))
    assert [line.energy.replace("\u00a0", " ") for line in shown[0].parts[0].lines] == ["at most about 3 kWh"] * 2


def test_the_summary_tells_the_season_in_which_a_finding_takes_most(report: Report) -> None:
    heating = report.seasons[0]
    hot = replace(
        heating,
        sense="cooling",
        findings=tuple(replace(r, energy_kwh=Estimate(90.0, 9.0)) for r in heating.findings[:1]),
    )
    for both in ((heating, hot), (hot, heating)):
        told = season_table.in_short(replace(report, seasons=both))
        assert told["F01-1"].replace("\u00a0", " ") == "in a cooling season 90 ± 18 kWh (4.1 ± 1.4 EUR)"


def test_an_element_that_was_not_measured_says_so(report: Report, show: Shown) -> None:
    season = report.seasons[0]
    stated = replace(season.elements[0], frame=None)
    table = section(show(replace(report, seasons=(replace(season, elements=(stated,)),))), "season").text
    assert "North wall, solid brick not measured: its U-value as stated 1290 ± 680 kWh" in table


def test_elements_without_a_description_have_their_id_and_odd_survey_files_do_no_harm(report: Report) -> None:
    for listed in (None, "x", [{"id": "north-wall"}], [1, {"description": "y"}]):
        odd = replace(report, survey={"element": listed})
        assert season_table.tables(odd)[0].parts[1].lines[0].what == "north-wall"


def test_a_roof_survey_lists_warm_areas_that_need_verification(
    report: Report, tasks: tuple[FrameTask, ...], tmp_path: Path
) -> None:
    on_roof = tuple(replace(task, method="roof-moisture") for task in tasks)
    wall = report.frames[0]
    cold, warm = wall.findings[0], replace(wall.findings[1], sense="hot", indication=wall.findings[0].indication)
    text = section(page(with_wall(report, findings=(cold, warm)), on_roof, tmp_path), "roof").text
    assert "F01-2 Living room, north wall 0.419 ± 0.043 −2.53 ± 0.24 needs verification by borescope" in text
    assert "F01-1" not in text
    assert "is not shown to be dry" in text


def test_the_checklist_tells_what_is_missing_and_where_it_would_be_stated(report: Report, show: Shown) -> None:
    html = show(report)
    text = section(html, "checklist").text
    assert "1 of 2 things that a complete report states is missing." in text
    assert "client any report missing to be stated: survey.client" in text
    assert "equipment, its make and serial number full report present sheets of the frames" in text
    assert "Checklist of a complete report: 1 of 2 stated" in section(html, "summary").text


def test_small_areas_are_in_square_centimetres_wherever_they_stand(report: Report, show: Shown) -> None:
    small = replace(report.frames[0].findings[0], area_m2=Estimate(0.0042, 0.0003))
    html = show(with_wall(report, findings=(small,)))
    assert "over 42.0 ± 6.0 cm²" in section(html, "summary").text
    assert section(html, "anomalies").text.count("42.0 ± 6.0 cm²") == 1
    assert "0.0042" not in Page(html).text


@pytest.mark.parametrize(
    ("taken", "shown"),
    [
        ("2026-01-18T07:12:00+01:00", "2026-01-18 07:12 +01:00"),
        ("2026-01-18T07:12:59.5", "2026-01-18 07:12"),
        ("2026-01-18T07:12Z", "2026-01-18 07:12 Z"),
        ("yesterday", "yesterday"),
    ],
)
def test_times_are_told_to_the_minute(report: Report, show: Shown, taken: str, shown: str) -> None:
    html = show(with_wall(report, taken=taken))
    assert f'<time datetime="{taken}">{shown}</time>' in html.replace("&#43;", "+")


def many(wall: FrameReport, count: int) -> FrameReport:
    """A frame with so many findings, the last of which is the most urgent."""
    mild = [replace(wall.findings[0], id=f"F01-{n}", key=f"k{n}", label=n, urgency=1) for n in range(1, count)]
    return replace(wall, findings=(*mild, replace(mild[0], id=f"F01-{count}", key="last", label=count, urgency=4)))


def test_of_very_many_findings_the_sheet_shows_the_most_important_and_tells_of_the_rest(
    report: Report, show: Shown
) -> None:
    html = show(replace(report, frames=(many(report.frames[0], NUMBERED + 15),)))
    shown = re.findall(r'<section id="finding-(F01-\d+)"', html)
    assert len(shown) == NUMBERED
    assert f"F01-{NUMBERED + 15}" in shown  # urgent, though it is the smallest
    assert "15 more, less important ones are in report.json and findings.csv." in Page(html).text
    links, ids = set(re.findall(r'href="#([^"]+)"', html)), set(re.findall(r' id="([^"]+)"', html))
    assert links <= ids  # what has no place of its own leads to its sheet
    assert len(re.findall(r"<tr data-finding=", html)) == NUMBERED + 15  # the table of all has all


def test_a_rise_of_nought_at_rated_load_is_left_out(report: Report, show: Shown) -> None:
    board = report.frames[3]
    assert board.components[1].at_rated_load
    band = board.components[1].at_rated_load.delta_similar_k
    assert band
    none = replace(board.components[1].at_rated_load, delta_similar_k=replace(band, low=0.0, high=0.0))
    cool = replace(board.components[1], at_rated_load=none)
    assert "0 to 0" not in Page(show(replace(report, frames=(replace(board, components=(cool,)),)))).text
    assert "110 to 150" in Page(show(report)).text


def test_the_page_of_one_frame_grows_by_its_pictures_and_not_by_its_strips(report: Report, show: Shown) -> None:
    wall = report.frames[0]
    ten = tuple(replace(wall.strips[0], name=f"strip {n}") for n in range(10))
    grown = len(show(with_wall(report, strips=ten)).encode()) - len(show(with_wall(report, strips=())).encode())
    assert grown / 10 < 10_000  # a tenth of a picture


def test_a_frame_taken_beside_one_that_failed_links_to_nothing_missing(report: Report, show: Shown) -> None:
    pair = report.frames[0].pair
    assert pair
    html = show(with_wall(report, pair=replace(pair, with_="F99")))
    assert "#frame-F99" not in html
    assert "Compared with F99" in Page(html).text


def test_numbers_of_a_drawing_are_finite(report: Report, show: Shown) -> None:
    strip = report.frames[0].strips[0]
    holes = tuple((x, float("nan") if 30 < x < 50 else t) for x, t in strip.profile)
    html = show(with_wall(report, strips=(replace(strip, profile=holes, undisturbed_c=None),)))
    assert "nan" not in html.partition("<svg")[2].partition("</svg>")[0]
    assert np.isfinite([float(x) for x in re.findall(r"(?<=points=\")[\d.]+", html)]).all()
