"""The table of emissivities: what it promises about itself, and a textbook table beside it."""

from __future__ import annotations

from math import sqrt

import pytest

from irsurvey.radiometry.emissivity import material, materials, nearest

TEXTBOOK = {
    "red brick": (0.93, 0.96),
    "rough concrete": (0.88, 0.93),
    "asphalt": (0.85, 0.93),
    "planed wood": (0.82, 0.92),
    "water": (0.96, 0.96),
    "ice": (0.95, 0.98),
    "snow": (0.82, 0.90),
    "granite": (0.88, 0.95),
    "polished copper": (0.03, 0.03),
    "silver": (0.02, 0.02),
}
"""Total, 300 K: Bergman et al., Fundamentals of Heat and Mass Transfer (2011), table A.11; from memory."""


@pytest.mark.parametrize("name", TEXTBOOK)
def test_the_textbook_agrees_within_the_range(name: str) -> None:
    low, high = TEXTBOOK[name]
    assert material(name).low <= high
    assert material(name).high >= low


def test_every_material_says_where_it_comes_from_and_how_sure_it_is() -> None:
    assert len(materials()) >= 40
    for name, entry in materials().items():
        assert entry.name == name
        assert entry.mark in {"S", "M"}
        assert entry.source
        assert 0 < entry.low <= entry.emissivity <= entry.high <= 1
        assert entry.low < entry.high


def test_the_uncertainty_is_that_of_a_rectangle_over_the_range() -> None:
    """JCGM 100:2008, 4.3.7: half-width over √3."""
    assert material("red brick").u == pytest.approx(0.03 / sqrt(3), rel=1e-12)
    assert material("black vinyl tape").u == pytest.approx(0.02 / sqrt(3), rel=1e-12)


def test_bare_metal_is_too_reflective_for_a_claim() -> None:
    """Common practice: polished metal shows its surroundings; below 0.6 no class is given (product definition)."""
    for name in (
        "polished copper",
        "bare aluminium",
        "tinned copper",
        "nickel plate",
        "bright copper busbar",
        "silver",
    ):
        assert material(name).high < 0.6


def test_a_range_that_is_ours_says_so() -> None:
    assert "allowance" in material("slate").note
    assert "allowance" not in material("red brick").note


def test_a_misspelt_material_is_not_found_but_its_neighbours_are() -> None:
    with pytest.raises(KeyError):
        material("red brik")
    assert nearest("red brik")[0] == "red brick"
    assert nearest("xyzzy") == ()
