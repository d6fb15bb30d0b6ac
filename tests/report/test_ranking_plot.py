"""Differences in order with their uncertainty: places where the numbers say, one drawing for each criterion."""

from __future__ import annotations

from dataclasses import replace

import pytest

from irsurvey.model import Assessment, ComponentReport, Estimate, FrameReport, Report
from irsurvey.numbers import Style
from irsurvey.report.axes import RIGHT
from irsurvey.report.ranking import Ranked
from irsurvey.report.ranking_plot import LEFT_END, MOST_ROWS, Plot, plots


def judged(item: ComponentReport, name: str, delta: Estimate | None) -> ComponentReport:
    one = Assessment("neta-similar", "marked", 2, "", {}, "", governs=True, quantity="delta_similar_k")
    return replace(item, name=name, delta_similar_k=delta, assessments=(one,))


def ranked(frame: FrameReport, *deltas: Estimate | None) -> list[Ranked]:
    item = frame.components[0]
    return [Ranked(frame, judged(item, f"lug {place}", delta), place) for place, delta in enumerate(deltas, 1)]


@pytest.fixture
def drawn(report: Report) -> Plot:
    entries = ranked(report.frames[3], Estimate(2.0, 0.3), Estimate(18.0, 0.9), Estimate(-5.0, None), None)
    (one,) = plots(entries, ())
    return one


def at(drawn: Plot, kelvin: float) -> float:
    first, last = drawn.across[0], drawn.across[-1]
    return first.at + (last.at - first.at) * (kelvin - float(first.text)) / (float(last.text) - float(first.text))


def test_the_largest_comes_first_whatever_its_sign_and_none_is_left_out(drawn: Plot) -> None:
    assert [row.name for row in drawn.rows] == ["lug 2 (B, S01)", "lug 3 (C, S01)", "lug 1 (A, S01)"]
    assert [row.reading.replace("\u00a0", " ") for row in drawn.rows] == ["18.0 ± 1.8 K", "−5 K", "2.00 ± 0.60 K"]
    assert drawn.more == 0


def test_values_and_the_ends_of_their_u_stand_where_the_ticks_say(drawn: Plot) -> None:
    for row, (value, expanded) in zip(drawn.rows, [(18.0, 1.8), (5.0, 0.0), (2.0, 0.6)], strict=True):
        places = [at(drawn, value + shift) for shift in (-expanded, 0, expanded)]
        assert [row.low, row.at, row.high] == pytest.approx(places, abs=0.2)  # coordinates are rounded to 0.1
        assert LEFT_END <= row.low <= row.high <= RIGHT


def test_the_edges_are_those_of_the_criterion(drawn: Plot) -> None:
    # product-wide: NETA, differences of similar components: [1, 3], (3, 15], above 15 K
    assert [edge.text for edge in drawn.edges] == ["1", "3", "15"]
    assert [edge.at for edge in drawn.edges] == pytest.approx([at(drawn, k) for k in (1, 3, 15)], abs=0.2)
    assert drawn.criterion == "neta-similar"


def test_in_us_units_only_the_lettering_moves(report: Report, drawn: Plot) -> None:
    entries = ranked(report.frames[3], Estimate(2.0, 0.3), Estimate(18.0, 0.9), Estimate(-5.0, None), None)
    (us,) = plots(entries, (), style=Style("us", True))
    places, of_si = ([x for row in one.rows for x in (row.at, row.low, row.high)] for one in (us, drawn))
    assert places == pytest.approx(of_si, abs=0.1)  # coordinates are rounded to 0.1
    assert [edge.text for edge in us.edges] == ["1,8", "5,4", "27"]  # times 1.8
    assert us.unit == "°F"
    assert us.rows[0].reading.replace("\u00a0", " ") == "32,4 ± 3,2 °F"


def test_an_uncertainty_beyond_the_value_does_not_reach_below_nought(report: Report) -> None:
    (drawn,) = plots(ranked(report.frames[3], Estimate(2.0, 3.0), Estimate(18.0, 0.9)), ())
    assert drawn.rows[1].low == LEFT_END


def test_of_very_many_the_largest_are_drawn_and_the_rest_counted(report: Report) -> None:
    (drawn,) = plots(ranked(report.frames[3], *(Estimate(k / 10, 0.1) for k in range(1, 60))), ())
    assert len(drawn.rows) == MOST_ROWS
    assert drawn.more == 59 - MOST_ROWS
    assert drawn.rows[0].reading.startswith("5.9")
    assert drawn.bottom > drawn.rows[-1].y


def test_each_criterion_has_a_drawing_and_what_judges_no_difference_has_none(report: Report) -> None:
    entries = ranked(report.frames[3], Estimate(2.0, 0.3), Estimate(18.0, 0.9))
    one = entries[0].item.assessments[0]
    ambient = replace(one, criterion="neta-ambient", quantity="delta_ambient_k")
    factor = replace(one, criterion="temperature-factor-ie", quantity="temperature_factor")
    others = [
        replace(entry, item=replace(entry.item, assessments=(assessment,)))
        for entry in entries
        for assessment in (ambient, factor)
    ]
    assert [drawn.criterion for drawn in plots([*entries, *others], ())] == ["neta-similar", "neta-ambient"]
    assert plots(entries[:1], ()) == ()  # one alone has no order
    assert plots((), ()) == ()


def test_a_criterion_nobody_knows_any_more_has_no_edges(report: Report) -> None:
    entries = ranked(report.frames[3], Estimate(2.0, 0.3), Estimate(18.0, 0.9))
    gone = [
        replace(e, item=replace(e.item, assessments=(replace(e.item.assessments[0], criterion="of-old"),)))
        for e in entries
    ]
    (drawn,) = plots(gone, ())
    assert drawn.edges == ()
