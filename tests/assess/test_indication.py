"""Indications: what is said of cues, and what is never said.

The looks of the patterns and their verification are common practice of the trade [CP]; the numbers are house rules,
which tests/test_pattern_indication.py tries on walls they were not set on.
"""

from __future__ import annotations

from dataclasses import fields
from math import isfinite, nan

import pytest
from hypothesis import given
from hypothesis import strategies as st

from irsurvey.anomalies.cues import Cues
from irsurvey.assess.criteria import criteria
from irsurvey.assess.indication import NO_PATTERN, REFLECTION, indicate, looks

NAMES = [one.name for one in fields(Cues)]
INSULATION, BRIDGE, LEAK, MOISTURE = "missing or displaced insulation", "thermal bridge", "air leakage", "moisture"
PATTERNS = {INSULATION, BRIDGE, LEAK, MOISTURE, REFLECTION, NO_PATTERN}

BAY = dict(zip(NAMES, (1.6, 0.3, 0.98, 0.99, 0.0, 0.9, 0.93, 1.1, 0.0, nan), strict=True))
LINE = dict(zip(NAMES, (9.0, 0.12, 0.93, 0.96, 0.0, 0.55, 0.56, 1.1, 2.0, nan), strict=True))
PLUME = dict(zip(NAMES, (1.5, 0.1, 0.88, 0.95, 0.01, 0.4, 0.55, 12.0, 0.0, 3.0), strict=True))
DAMP = dict(zip(NAMES, (1.3, 0.2, 0.7, 0.8, 0.15, 0.55, 0.7, 1.8, 0.0, nan), strict=True))
SOFT = dict(zip(NAMES, (1.1, 0.08, 0.79, 0.995, 0.0, 0.44, 0.56, 1.1, 0.0, nan), strict=True))
TYPICAL = [(BAY, INSULATION), (LINE, BRIDGE), (PLUME, LEAK), (DAMP, MOISTURE)]


def said(cues, **changes):
    given = {
        "method": "envelope",
        "viewed_from": "inside",
        "sense": "cold",
        "emissivity": 0.93,
        "is_glass": False,
        "pressure_change": None,
        **changes,
    }
    return indicate(cues, **given)


@pytest.mark.parametrize(("cues", "pattern"), TYPICAL)
def test_typical_cues_are_consistent_with_their_pattern(cues, pattern):
    found = said(cues)
    assert found.pattern == pattern
    assert set(found.evidence) <= set(NAMES)
    assert all(found.evidence[name] == cues[name] for name in found.evidence)


def test_a_soft_round_patch_is_consistent_with_none_and_shows_every_cue_measured():
    found = said(SOFT)
    assert found.pattern == NO_PATTERN
    assert found.evidence == {name: value for name, value in SOFT.items() if isfinite(value)}


CUES = st.fixed_dictionaries({name: st.floats(0, 20) | st.just(nan) for name in NAMES})
CIRCUMSTANCES = st.fixed_dictionaries(
    {
        "method": st.sampled_from(["envelope", "air-leakage", "roof-moisture"]),
        "viewed_from": st.sampled_from(["inside", "outside"]),
        "sense": st.sampled_from(["hot", "cold"]),
        "emissivity": st.floats(0, 1) | st.just(nan),
        "is_glass": st.booleans(),
        "pressure_change": st.sampled_from([True, False, None]),
        "outward": st.booleans(),
    }
)


@given(CUES, CIRCUMSTANCES)
def test_whatever_is_said_is_no_bare_diagnosis(cues, circumstances):
    found = said(cues, **circumstances)
    assert found.pattern in PATTERNS
    assert found.statement.startswith("Consistent with ")
    assert found.statement.endswith(f"; verify by {found.verify_by}.")
    assert all(isfinite(value) for value in found.evidence.values())


@given(CUES, CIRCUMSTANCES)
def test_low_emissivity_and_glass_are_always_a_possible_reflection_and_nothing_else_is(cues, circumstances):
    mirrors = circumstances["is_glass"] or not circumstances["emissivity"] >= 0.6  # an unknown one is a low one
    assert (said(cues, **circumstances).pattern == REFLECTION) == mirrors


def test_what_changes_with_the_pressure_is_air_whatever_its_shape():
    for cues, _ in TYPICAL:
        found = said(cues, pressure_change=True)
        assert found.pattern == LEAK
        assert found.evidence["changed_with_pressure"] == 1


def test_what_does_not_change_with_the_pressure_is_no_air_leakage():
    assert said(PLUME, pressure_change=False).pattern != LEAK
    found = said(LINE, pressure_change=False)
    assert found.pattern == BRIDGE
    assert found.evidence["changed_with_pressure"] == 0


@pytest.mark.parametrize(("cues", "pattern"), TYPICAL)
def test_only_what_loses_heat_has_a_typical_pattern(cues, pattern):
    # Inside a heated house the colder ones lose heat, outside the warmer ones; in a cooled house the other way round.
    # What is damp cools by evaporation on either face, and is never the warmer.
    for viewed_from, outward, loss, gain in (
        ("inside", True, "cold", "hot"),
        ("outside", True, "hot", "cold"),
        ("inside", False, "hot", "cold"),
        ("outside", False, "cold", "hot"),
    ):
        for sense, usual in ((loss, pattern), (gain, NO_PATTERN)):
            expected = usual if pattern != MOISTURE else MOISTURE if sense == "cold" else NO_PATTERN
            assert said(cues, viewed_from=viewed_from, outward=outward, sense=sense).pattern == expected


def test_a_warm_place_inside_a_heated_house_is_no_air_leakage_and_the_report_says_why():
    assert "the other way" in said(PLUME, sense="hot").statement


@pytest.mark.parametrize("cues", [BAY, DAMP, SOFT, dict.fromkeys(NAMES, nan)])
def test_a_warm_place_on_a_roof_by_night_is_consistent_with_wet_insulation(cues):
    found = said(cues, method="roof-moisture", viewed_from="outside", sense="hot")
    assert found.pattern == MOISTURE
    assert found.statement.startswith("Consistent with wet insulation; verify by a core sample")
    assert said(cues, method="roof-moisture", viewed_from="outside", sense="cold").pattern == NO_PATTERN


def test_a_region_without_a_shape_shows_no_pattern_and_the_report_says_why():
    found = said(dict.fromkeys(NAMES, nan) | {"elongation": 9.0, "edge_sharpness_per_pixel": 0.5})
    assert found.pattern == NO_PATTERN
    assert "too small or too faint" in found.statement
    assert found.evidence == {"elongation": 9.0, "edge_sharpness_per_pixel": 0.5}


@pytest.mark.parametrize("name", ["four_sidedness", "edge_sharpness_per_pixel", "plateau_share", "flat_top"])
def test_a_cue_that_could_not_be_measured_speaks_against(name):
    assert said(BAY | {name: nan}).pattern != INSULATION


@pytest.mark.parametrize("look", looks(), ids=lambda look: look.pattern)
@given(data=st.data())
def test_a_pattern_fits_as_well_as_its_weakest_cue(look, data):
    cues = data.draw(CUES)
    fits = [one.fit(cues[one.name]) for one in look.cues]
    assert all(0 <= fit <= 1 for fit in fits)
    assert look.fit(cues) == min(fits, default=1)
    for one in look.cues:
        assert one.fit(one.against) == 0
        assert one.fit(one.supports) == 1
        assert one.fit((one.against + one.supports) / 2) == pytest.approx(0.5, abs=1e-9)


def test_every_row_of_the_table_can_be_used():
    methods = {method for one in criteria().values() if one.kind == "building" for method in one.methods}
    for look in looks():
        assert look.pattern in PATTERNS - {NO_PATTERN, REFLECTION}
        assert {one.name for one in look.cues} <= set(NAMES)
        assert set(look.methods) <= methods
        assert look.mark in {"P", "S", "M", "C", "CP", "house"}
        assert look.verify_by
