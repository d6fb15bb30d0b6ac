"""Pieces on pages: what stays together, what is repeated, that nothing leaves the page, how wide columns are."""

from __future__ import annotations

from collections.abc import Iterator

import pytest
from hypothesis import given
from hypothesis import strategies as st

from irsurvey.report.facts import Fact
from irsurvey.report.pdf.blocks import Column, beside, facts, paragraph, text
from irsurvey.report.pdf.layout import BOTTOM, BREADTH, LENGTH, TOP, Layout, Piece, total
from irsurvey.report.pdf.runs import Run
from irsurvey.report.pdf.tables import Head, table


def piece(height: float, **fields: object) -> Piece:
    return Piece(height, lambda _paper, _x, _y: None, **fields)  # type: ignore[arg-type]


def pages(layout: Layout) -> Iterator[list[Piece]]:
    for page in layout.pages:
        yield [placed.piece for placed in page.placed]


@given(st.lists(st.tuples(st.floats(0.5, 120.0), st.floats(0.0, 8.0), st.booleans()), max_size=60))
def test_nothing_leaves_the_page_or_stands_on_something_else(asked: list[tuple[float, float, bool]]) -> None:
    layout = Layout()
    layout.turn("x")
    pieces = [piece(height, gap=gap, keep=keep) for height, gap, keep in asked]
    layout.add(pieces)
    assert [one for page in pages(layout) for one in page] == pieces
    for page in layout.pages:
        below = TOP
        for placed in page.placed:
            assert placed.y >= below - 1e-6
            below = placed.y + placed.piece.height
        assert below <= BOTTOM + 1e-3
        assert page.placed or not pieces  # no blank page


def test_pieces_that_stay_together_turn_the_page_together() -> None:
    layout = Layout()
    layout.turn("x")
    layout.add([piece(LENGTH - 30), piece(20, keep=True), piece(20)])
    assert [len(page) for page in pages(layout)] == [1, 2]


def test_the_gap_above_is_left_out_at_the_top_of_a_page() -> None:
    layout = Layout()
    layout.turn("x")
    layout.add([piece(10, gap=7), piece(10, gap=7), piece(LENGTH - 10, gap=7)])
    assert [placed.y for page in layout.pages for placed in page.placed] == [TOP, TOP + 17, TOP]


def test_the_heading_of_a_table_stands_again_on_every_page() -> None:
    rows = [[text(f"row {k}"), text("some words " * 12)] for k in range(120)]
    layout = Layout()
    layout.turn("x")
    layout.add(table([Head("A"), Head("B")], rows))
    head = next(pages(layout))[0]
    assert len(layout.pages) > 2
    assert all(page[0].height == head.height and page[0].draw is head.draw for page in pages(layout))


def test_the_heading_of_a_table_never_stands_alone() -> None:
    layout = Layout()
    layout.turn("x")
    layout.add([piece(LENGTH - 9)])
    layout.add(table([Head("A")], [[text("one")]], caption=text("told")))
    assert [len(page) for page in pages(layout)] == [1, 3]


def test_the_total_of_a_table_never_stands_alone() -> None:
    made = table([Head("A")], [[text("one")], [text("two")]], foot=[text("sum")])
    assert [one.keep for one in made[-3:]] == [False, True, False]


def test_a_cell_taller_than_a_page_is_divided() -> None:
    layout = Layout()
    layout.turn("x")
    layout.add(table([Head("A"), Head("B")], [[text("x" * 10_000), text("words " * 2000)]]))
    assert len(layout.pages) > 1
    assert all(placed.y + placed.piece.height <= BOTTOM + 1e-3 for page in layout.pages for placed in page.placed)


def test_numbers_are_not_broken_where_text_can_be() -> None:
    """Eight columns of numbers and one of words of which not even the longest fits: the words give way."""
    number = (Run("−2.81\u00a0±\u00a00.31"),)
    rows = [[(Run("unbreakably-long-name-of-a-thing-that-nobody-drew"),), *[number] * 8]]
    height = total(table([Head("Name"), *[Head("n", at_right=True)] * 8], rows))
    single = total(table([Head("n", at_right=True)] * 8, [[number] * 8]))
    several = height - single
    assert several > 0  # the name took more than one line …
    line = total(paragraph(number))
    assert several == pytest.approx(round(several / line) * line, abs=1e-6)  # … and the numbers one, as before


def test_neither_the_first_nor_the_last_line_of_a_paragraph_stands_alone() -> None:
    lines = paragraph(text("word " * 400))
    assert [one.keep for one in lines[:2]] == [True, False]
    assert [one.keep for one in lines[-2:]] == [True, False]


def test_things_side_by_side_are_as_high_as_the_highest() -> None:
    (both,) = beside([Column(0, [piece(10), piece(5, gap=2)]), Column(50, [piece(12)])])
    assert both.height == 17


def test_very_tall_things_side_by_side_are_divided_and_lose_nothing() -> None:
    drawn: list[int] = []

    def noted(number: int) -> Piece:
        return Piece(5.0, lambda _paper, _x, _y: drawn.append(number))

    parts = beside([Column(0, [noted(k) for k in range(80)]), Column(50, [noted(100)])])
    for part in parts:
        part.draw(None, 0.0, 0.0)  # type: ignore[arg-type]
    assert len(parts) > 1
    assert sorted(drawn) == [*range(80), 100]


def test_a_fact_that_tells_much_has_a_line_of_its_own() -> None:
    short, long = Fact("a", "b"), Fact("name", "words " * 60)
    assert len(facts([short, short, short])) == 1
    assert len(facts([short, long, short])) == 3
    assert max(one.height for one in facts([long])) < total(paragraph(text("words " * 60), width=BREADTH / 3))
