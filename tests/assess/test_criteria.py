"""Criteria files: every edge of every table, what they must state, and what a malformed one is told."""

from __future__ import annotations

import re
from math import inf, nan

import numpy as np
import pytest
from hypothesis import given
from hypothesis import strategies as st

from irsurvey.assess.criteria import (
    ALWAYS,
    DEFAULTS,
    MARKS,
    METHODS,
    URGENCIES,
    Criterion,
    chosen,
    class_index,
    class_of,
    criteria,
    criterion_faults,
    load_criterion,
)
from irsurvey.errors import SurveyError

BUILT_IN = criteria()

SITE = """
name = "site-lugs"
title = "Lugs of the site"
edition = "1"
kind = "electrical"
methods = ["contact"]
applies_to = "component"
quantity = "delta_similar_k"
sense = "hot"
source = "maintenance plan"
mark = "house"
notes = "none"
[[classes]]
name = "fine"
at_most = 5
urgency = 0
statement = "fine"
[[classes]]
name = "poor"
above = 5
urgency = 3
statement = "poor"
"""


def urgency(name: str, value: float) -> int:
    found = class_of(value, BUILT_IN[name])
    assert found is not None
    return found.urgency


# ANSI/NETA Table 100.18 (ATS-2003): 1–3, 4–15, above 15 K over a similar component; 1–10, 11–20, 21–40, above 40 K
# over ambient air.  The half-open edges between its whole kelvins are those of this project's specification.
@pytest.mark.parametrize(
    ("value", "similar", "ambient"),
    [
        (-3.0, 0, 0),
        (0.0, 0, 0),
        (0.9999, 0, 0),
        (1.0, 1, 1),
        (3.0, 1, 1),
        (3.0001, 2, 1),
        (3.5, 2, 1),
        (4.0, 2, 1),
        (10.0, 2, 1),
        (10.4, 2, 2),
        (15.0, 2, 2),
        (15.4, 4, 2),
        (20.0, 4, 2),
        (20.7, 4, 3),
        (40.0, 4, 3),
        (40.1, 4, 4),
        (inf, 4, 4),
    ],
)
def test_the_neta_edges_are_half_open_and_nothing_is_rounded(value: float, similar: int, ambient: int) -> None:
    assert urgency("neta-similar", value) == similar
    assert urgency("neta-ambient", value) == ambient


# Older naval scheme: 10–25, 25–40, 40–70, 70 K or more, as quoted [S].  Of voltage-driven parts 0.5 to 3 K may be
# serious; the edges within that, and those for PV modules, are house rules.
@pytest.mark.parametrize(
    ("value", "naval", "voltage", "pv"),
    [
        (-3.0, 0, 0, 0),
        (0.4999, 0, 0, 0),
        (0.5, 0, 2, 0),
        (0.9999, 0, 2, 0),
        (1.0, 0, 3, 0),
        (1.9999, 0, 3, 0),
        (2.0, 0, 3, 1),
        (3.0, 0, 3, 1),
        (3.0001, 0, 4, 1),
        (3.5, 0, 4, 1),
        (4.0, 0, 4, 1),
        (9.9999, 0, 4, 1),
        (10.0, 2, 4, 2),
        (10.4, 2, 4, 2),
        (15.0, 2, 4, 2),
        (15.4, 2, 4, 2),
        (18.6, 2, 4, 2),  # 16 K at 860 W/m² brought to 1000 W/m², specification
        (19.9999, 2, 4, 2),
        (20.0, 2, 4, 3),
        (20.7, 2, 4, 3),
        (24.9999, 2, 4, 3),
        (25.0, 2, 4, 3),
        (39.9999, 2, 4, 3),
        (40.0, 3, 4, 4),
        (40.1, 3, 4, 4),
        (69.9999, 3, 4, 4),
        (70.0, 4, 4, 4),
        (inf, 4, 4, 4),
    ],
)
def test_the_edges_of_the_naval_scheme_of_voltage_driven_parts_and_of_pv_modules(
    value: float, naval: int, voltage: int, pv: int
) -> None:
    assert [urgency(name, value) for name in ("naval", "voltage-driven", "pv-modules")] == [naval, voltage, pv]


def test_the_two_middle_grades_of_the_naval_scheme_are_told_apart() -> None:
    found = [class_of(value, BUILT_IN["naval"]) for value in (24.9999, 25.0)]
    assert [kind.name for kind in found if kind] == ["first grade", "second grade"]


# Relative difference, devices in general: 35/80/95 %, not classed below a rise of 10 K, as quoted [S].
def test_the_edges_of_the_relative_difference() -> None:
    values = (-20.0, 0.0, 34.9999, 35.0, 79.9999, 80.0, 94.9999, 95.0, 100.0)
    assert [urgency("relative-difference", value) for value in values] == [0, 0, 0, 2, 2, 3, 3, 4, 4]
    assert BUILT_IN["relative-difference"].classed_from == ("delta_ambient_k", 10.0)


@pytest.mark.parametrize(("name", "beyond"), [("absolute-limit", 4), ("absolute-limit-at-load", 2)])
def test_a_part_at_its_limit_keeps_it(name: str, beyond: int) -> None:
    assert [urgency(name, value) for value in (-40.0, 0.0, np.nextafter(0, 1), 40.0)] == [0, 0, beyond, beyond]


# DIN 4108-2: at least 0.70; Irish Technical Guidance Document L 2011: 0.75 or better (Dáil written answer 788, 2015).
# BRE Information Paper 1/06: 0.75 in dwellings, as quoted [S].  Netherlands 0.65, Poland 0.72 from memory [M].
@pytest.mark.parametrize(
    ("profile", "limit"), [("de", 0.70), ("ie", 0.75), ("uk-dwellings", 0.75), ("nl", 0.65), ("pl", 0.72)]
)
def test_a_temperature_factor_at_its_limit_meets_it(profile: str, limit: float) -> None:
    name = f"temperature-factor-{profile}"
    assert urgency(name, limit) == 0
    assert urgency(name, np.nextafter(limit, 0)) == 2


@pytest.mark.parametrize("name", [name for name in BUILT_IN if name.startswith("temperature-factor-")])
def test_limits_of_the_temperature_factor_hold_at_the_film_resistance_they_assume(name: str) -> None:
    criterion = BUILT_IN[name]
    assert criterion.quantity == "temperature_factor_at_0_25"
    assert (criterion.sense, criterion.viewed_from, criterion.methods) == ("cold", "inside", ("envelope",))


# BRE Information Paper 1/06, by use of the building, from memory [M]: stores 0.30, offices and shops 0.50, schools and
# residential 0.75, sports halls, kitchens and canteens 0.80, swimming pools, laundries and breweries 0.90.
def test_a_building_of_unknown_use_is_in_order_only_at_the_strictest_limit() -> None:
    edges = (0.30, 0.50, 0.75, 0.80, 0.90)
    assert BUILT_IN["temperature-factor-uk-other"].edges == edges
    assert [urgency("temperature-factor-uk-other", edge) for edge in edges] == [2, 1, 1, 1, 0]
    assert [urgency("temperature-factor-uk-other", np.nextafter(edge, 0)) for edge in edges] == [2, 2, 1, 1, 1]


# How warm says little about how wet (house rule): whatever is warmer is looked into, and nothing is called wet.
def test_every_warm_area_of_a_roof_is_to_be_verified() -> None:
    criterion = BUILT_IN["roof-moisture"]
    assert [urgency("roof-moisture", value) for value in (-2.0, 0.0, 1e-6, 0.5, 30.0)] == [0, 0, 1, 1, 1]
    assert (criterion.sense, criterion.viewed_from, criterion.methods) == ("hot", "outside", ("roof-moisture",))
    assert "verify" in criterion.classes[-1].statement
    assert "consistent with" in criterion.classes[-1].statement


def test_the_edges_of_building_contrast_belong_to_the_worse_class() -> None:  # house rule
    assert [urgency("building-contrast", x) for x in (0.0, 0.999, 1.0, 2.999, 3.0, 50.0)] == [0, 0, 1, 1, 2, 2]


@pytest.mark.parametrize("criterion", BUILT_IN.values(), ids=BUILT_IN)
def test_every_criterion_says_where_it_comes_from_and_how_sure_that_is(criterion: Criterion) -> None:
    assert criterion.source
    assert criterion.edition
    assert criterion.mark in MARKS
    assert criterion.notes
    assert (criterion.mark == "house") == ("house rule" in criterion.source)
    assert all(kind.urgency in URGENCIES and kind.statement for kind in criterion.classes)


@pytest.mark.parametrize("criterion", BUILT_IN.values(), ids=BUILT_IN)
def test_every_value_lies_in_exactly_one_class(criterion: Criterion) -> None:
    around = [np.nextafter(edge, way) for edge in criterion.edges for way in (-inf, inf)]
    for value in [*criterion.edges, *around, -1e9, 0.0, 1e9]:
        holding = [
            kind
            for kind in criterion.classes
            if (kind.low < value or (kind.low == value and kind.holds_low))
            and (value < kind.high or (value == kind.high and kind.holds_high))
        ]
        assert holding == [class_of(value, criterion)]


@pytest.mark.parametrize("criterion", BUILT_IN.values(), ids=BUILT_IN)
def test_classes_of_an_array_are_those_of_its_numbers(criterion: Criterion) -> None:
    values = np.array([[-2.0, 0.0, 0.7, nan], [1.0, 3.0, 10.4, 41.0]])
    one_by_one = [[int(class_index(value, criterion)) for value in row] for row in values]
    assert class_index(values, criterion).tolist() == one_by_one
    assert class_of(nan, criterion) is None


def test_every_kind_and_method_has_defaults_and_they_exist() -> None:
    assert set(DEFAULTS) == {(kind, method) for kind, methods in METHODS.items() for method in methods}
    for (kind, method), names in DEFAULTS.items():
        for name in names:
            assert BUILT_IN[name].kind == kind
            assert method in BUILT_IN[name].methods


def test_named_criteria_count_where_they_suit_and_defaults_elsewhere() -> None:
    named = ("neta-ambient",)
    assert [one.name for one in chosen(named, "electrical", "contact")] == ["neta-ambient", *CONTACT]
    assert tuple(one.name for one in chosen(named, "building", "envelope")) == DEFAULTS["building", "envelope"]
    voltage = [one.name for one in chosen(named, "electrical", "voltage-driven")]
    assert voltage == ["voltage-driven", "absolute-limit"]  # no table for contacts is borrowed


CONTACT = ("electrical-contrast", *ALWAYS)
"""What counts beside criteria named for components: that for what is hot outside any, and those of stated limits."""


def test_limits_stated_for_a_part_count_whatever_criteria_are_named() -> None:
    assert [one.name for one in chosen(("naval",), "electrical", "contact")] == ["naval", *CONTACT]
    assert chosen(ALWAYS, "electrical", "contact") == chosen((), "electrical", "contact")  # they take no default away
    assert not set(ALWAYS) & {one.name for one in chosen(("naval",), "building", "envelope")}


OWN = (("schemes/site.toml", SITE),)


def test_a_scheme_of_the_site_counts_beside_built_in_ones_named_by_its_file_or_its_name() -> None:
    for names in (("neta-ambient",), ("neta-ambient", "schemes/site.toml"), ("neta-ambient", "site-lugs")):
        found = [one.name for one in chosen(names, "electrical", "contact", OWN)]
        assert found == ["neta-ambient", "site-lugs", *CONTACT]
    assert [one.name for one in chosen((), "electrical", "contact", OWN)] == ["site-lugs", *CONTACT]
    assert "site-lugs" not in [one.name for one in chosen((), "electrical", "pv", OWN)]  # does not suit
    assert list(criteria(OWN)) == [*BUILT_IN, "site-lugs"]
    assert criteria(OWN)["site-lugs"] == load_criterion(SITE, "site.toml")


def test_a_scheme_of_the_site_may_judge_any_number_of_a_component() -> None:
    for quantity in ("delta_similar_in_calm_k", "relative_difference_percent", "above_allowed_k", "delta_neighbours_k"):
        assert criterion_faults(SITE.replace("delta_similar_k", quantity)) == []


def test_faults_of_a_scheme_of_the_site_name_the_key() -> None:
    assert criterion_faults(SITE) == []
    text = SITE.replace('mark = "house"', 'mark = "Q"').replace("urgency = 3", "urgency = 9")
    assert [fault.where for fault in criterion_faults(text)] == ["mark", "classes[2].urgency"]
    assert [fault.where for fault in criterion_faults("name = ")] == [""]


def test_a_scheme_of_the_site_may_not_pass_for_a_built_in_one() -> None:
    posing = SITE.replace("site-lugs", "neta-similar")
    (fault,) = criterion_faults(posing)
    assert (fault.where, fault.got) == ("name", "'neta-similar'")
    with pytest.raises(SurveyError, match=re.escape("posing.toml: name")):
        chosen((), "electrical", "contact", (("posing.toml", posing),))
    with pytest.raises(SurveyError, match=re.escape("second.toml: name")):
        criteria((("first.toml", SITE), ("second.toml", SITE)))


def test_a_criterion_may_ask_for_a_rise_before_it_classes_anything() -> None:
    text = SITE.replace(
        'notes = "none"', 'notes = "none"\nclassed_from = { quantity = "delta_ambient_k", at_least = 5 }'
    )
    assert load_criterion(text, "site.toml").classed_from == ("delta_ambient_k", 5.0)
    assert load_criterion(SITE, "site.toml").classed_from is None


def test_an_unknown_criterion_is_a_fault_that_names_the_nearest() -> None:
    with pytest.raises(SurveyError, match="neta-similar"):
        chosen(("neta-similr",), "electrical", "contact")


def test_a_scheme_of_the_site_is_read_like_a_built_in_one() -> None:
    criterion = load_criterion(SITE, "site.toml")
    assert criterion.edges == (5.0,)
    assert [kind.name for kind in criterion.classes] == ["fine", "poor"]
    assert criterion.worse == 1


def test_classes_may_stand_in_any_order() -> None:
    head, fine, poor = SITE.split("[[classes]]")
    shuffled = "[[classes]]".join([head, poor, fine])
    assert load_criterion(shuffled, "site.toml") == load_criterion(SITE, "site.toml")


@pytest.mark.parametrize(
    ("old", "new", "key"),
    [
        *((f"{key} =", f"# {key} =", key) for key in ("title", "edition", "kind", "methods", "applies_to", "quantity")),
        *((f"\n{key} =", f"\n# {key} =", key) for key in ("sense", "source", "mark", "notes")),
        ('kind = "electrical"', 'kind = "nautical"', "kind"),
        ('["contact"]', '["envelope"]', "methods"),
        ('["contact"]', '"contact"', "methods"),
        ('applies_to = "component"', 'applies_to = "frame"', "applies_to"),
        ("delta_similar_k", "delta_similar", "quantity"),
        ("delta_similar_k", "delta_k", "quantity"),  # a finding's number, not a component's
        ('mark = "house"', 'mark = "Q"', "mark"),
        ('sense = "hot"', 'sense = "warm"', "sense"),
        ('name = "site-lugs"', 'name = "Site lugs!"', "name"),
        ('notes = "none"', 'notes = "none"\nnote = "twice"', "note"),
        ('notes = "none"', 'notes = "none"\nfilm_resistance = 0.25', "film_resistance"),
        ('notes = "none"', 'notes = "none"\nclassed_from = 10', "classed_from"),
        ('notes = "none"', 'notes = "none"\nclassed_from = { quantity = "delta_ambient_k" }', "classed_from"),
        ('notes = "none"', 'notes = "none"\nclassed_from = { quantity = "x", at_least = "1" }', "classed_from"),
        ('notes = "none"', 'notes = "none"\nclassed_from = { quantity = "x", at_least = 1 }', "classed_from.quantity"),
        (
            'applies_to = "component"\nquantity = "delta_similar_k"',
            'applies_to = "finding"\nquantity = "delta_k"\nclassed_from = { quantity = "delta_k", at_least = 1 }',
            "classed_from",
        ),
        ("urgency = 3", "urgency = 5", "classes[2].urgency"),
        ("urgency = 3", "urgency = true", "classes[2].urgency"),
        ("urgency = 3", "", "classes[2].urgency"),
        ('statement = "poor"', "", "classes[2].statement"),
        ('name = "poor"', 'name = "fine"', "classes.name"),
        ("above = 5", "above = 6", "classes"),  # gap
        ("above = 5", "above = 4", "classes"),  # overlap
        ("above = 5", "at_least = 5", "classes"),  # 5 twice
        ("at_most = 5", "below = 5", "classes"),  # 5 nowhere
        ("at_most = 5", "at_most = 5\nabove = 0", "classes"),  # nothing below 0
        ("above = 5", "above = 5\nbelow = 9", "classes"),  # nothing above 9
        ("above = 5", "above = 5\nat_least = 5", "classes[2].above"),
        ("above = 5", "above = 5\nbelow = 5", "classes[2]"),  # holds no value
        ("above = 5", 'above = "5"', "classes[2].above"),
        ("above = 5", "above = inf", "classes[2].above"),
        ("above = 5", "more_than = 5", "classes[2].more_than"),
        ("[[classes]]", "[[class]]", "classes"),
    ],
)
def test_a_malformed_criterion_is_told_its_file_and_key(old: str, new: str, key: str) -> None:
    text = SITE.replace(old, new)
    assert text != SITE
    with pytest.raises(SurveyError) as caught:
        load_criterion(text, "site.toml")
    assert f"site.toml: {key}" in [fault.where for fault in caught.value.faults]


def test_an_urgency_that_turns_back_along_the_axis_is_refused() -> None:
    third = '[[classes]]\nname = "odd"\nabove = 9\nurgency = 1\nstatement = "odd"\n'
    with pytest.raises(SurveyError, match=re.escape("site.toml: classes.urgency")):
        load_criterion(SITE.replace("above = 5", "above = 5\nat_most = 9") + third, "site.toml")


def test_an_urgency_may_fall_along_the_axis() -> None:
    assert load_criterion(SITE.replace("urgency = 0", "urgency = 4"), "site.toml").worse == -1


def test_all_faults_of_a_file_are_reported_together() -> None:
    text = SITE.replace('mark = "house"', 'mark = "Q"').replace("urgency = 3", "urgency = 9")
    with pytest.raises(SurveyError) as caught:
        load_criterion(text, "site.toml")
    assert [fault.where for fault in caught.value.faults] == ["site.toml: mark", "site.toml: classes[2].urgency"]


def test_a_text_that_is_no_toml_is_a_fault_of_its_file() -> None:
    with pytest.raises(SurveyError, match=r"^site\.toml: expected a criterion in TOML"):
        load_criterion("name = ", "site.toml")


@given(st.lists(st.floats(-50, 50), min_size=1, max_size=4, unique=True), st.lists(st.booleans(), min_size=4))
def test_any_partition_of_the_axis_is_accepted_and_finds_each_class(edges: list[float], closed: list[bool]) -> None:
    edges = sorted(edges)
    rows = []
    for k in range(len(edges) + 1):
        low = f"{'above' if closed[k - 1] else 'at_least'} = {edges[k - 1]!r}\n" if k else ""
        high = f"{'at_most' if closed[k] else 'below'} = {edges[k]!r}\n" if k < len(edges) else ""
        rows.append(f'[[classes]]\nname = "class {k}"\nstatement = "x"\nurgency = {min(k, 4)}\n{low}{high}')
    criterion = load_criterion(SITE.split("[[classes]]")[0] + "".join(rows), "site.toml")
    for k, edge in enumerate(edges):
        found = class_of(edge, criterion)
        assert found is not None
        assert found.name == f"class {k if closed[k] else k + 1}"


@pytest.mark.parametrize("name", BUILT_IN)
def test_no_class_that_asks_for_action_can_be_read_as_all_clear(name: str) -> None:
    # a class stands alone in tables: "clear" beside "cleared", "below the limit" of what?  (house rule)
    for kind in BUILT_IN[name].classes:
        if kind.urgency > 0:
            assert not re.search(r"clear|\bok\b|good|sound|safe|fine|below the|within", kind.name)
