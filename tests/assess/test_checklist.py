"""The checklist of a complete report: its items, and what is said of one that is missing."""

from __future__ import annotations

import pytest

from irsurvey.assess.checklist import REPORTS, asked, checklist

# EN 13187, contents of a report, as quoted by secondary texts [S]: words of each item by which it is known here.
SIMPLIFIED = (
    *("tested", "standard", "for whom", "constructed", "date and hour", "indoor air", "air temperature difference"),
    *("pressure difference", "parts looked at", "place, extent and type", "measurements made besides", "influenced"),
    "signature",
)
FULL = (
    *(
        "surface materials and their emissivity",
        "face",
        "camera",
        "outdoor air temperature during",
        "in the 24 h before",
    ),
    *("sun on the faces during", "sun on the faces in the 12 h before", "precipitation", "wind"),
    *("photographs or sketches", "thermograms with their temperature scale"),
)


@pytest.mark.parametrize(("report", "words"), [(REPORTS[0], SIMPLIFIED), (REPORTS[1], FULL)])
def test_every_item_of_the_standard_is_asked_by_its_report(report: str, words: tuple[str, ...]) -> None:
    items = [one.item for one in asked() if one.asked_by == report]
    assert len(items) == len(words)
    for item, expected in zip(items, words, strict=True):
        assert expected in item


def test_every_item_says_what_would_state_it() -> None:
    names = [one.name for one in asked()]
    assert len(set(names)) == len(names)
    assert all(one.stated_by and one.asked_by in REPORTS for one in asked())


def test_an_item_is_present_where_the_report_states_it_and_missing_otherwise() -> None:
    rows = {row.item: row for row in checklist({"client": "survey.client", "wind": ""})}
    assert len(rows) == len(asked())
    assert (rows["for whom"].present, rows["for whom"].where) == (True, "survey.client")
    assert (rows["wind"].present, rows["wind"].where) == (False, "conditions.wind_m_s")
    assert sum(row.present for row in rows.values()) == 1


def test_nothing_stated_leaves_everything_missing() -> None:
    assert not any(row.present for row in checklist({}))


def test_a_name_that_is_no_items_is_told() -> None:
    with pytest.raises(KeyError, match="clients"):
        checklist({"clients": "survey.client"})
