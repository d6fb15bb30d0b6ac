"""Building materials: what the table must state, and that it is physics."""

from __future__ import annotations

import pytest

from irsurvey.heat.building_materials import BuildingMaterial, building_materials

MATERIALS = building_materials()


# ISO 10456 (2007), design values, as quoted by secondary texts [S]: conductivity, density, specific heat.
@pytest.mark.parametrize(
    ("name", "conductivity", "density", "specific_heat"),
    [
        ("concrete", 2.00, 2400, 1000),
        ("plasterboard", 0.25, 900, 1000),
        ("granite", 2.8, 2600, 1000),
        ("timber", 0.13, 500, 1600),
        ("soda glass", 1.0, 2500, 750),
        ("water", 0.60, 1000, 4190),
    ],
)
def test_design_values_are_those_of_the_standard(
    name: str, conductivity: float, density: float, specific_heat: float
) -> None:
    one = MATERIALS[name]
    assert (one.conductivity, one.density, one.specific_heat) == (conductivity, density, specific_heat)


@pytest.mark.parametrize("material", MATERIALS.values(), ids=MATERIALS)
def test_every_material_says_where_its_figures_come_from(material: BuildingMaterial) -> None:
    assert material.source
    assert material.mark in ("P", "S", "M")


# Engineering handbooks' span: from still air to copper, from foam to copper, from copper to water.
@pytest.mark.parametrize("material", MATERIALS.values(), ids=MATERIALS)
def test_every_figure_is_in_the_unit_it_is_said_to_be(material: BuildingMaterial) -> None:
    assert 0.02 <= material.conductivity <= 400
    assert 1 <= material.density <= 9000
    assert 350 <= material.specific_heat <= 4200


# Design values are rounded: water within 5 %, air within 2 % of their properties in CoolProp at 10 °C and 1 atm.
@pytest.mark.parametrize(("name", "fluid", "off"), [("water", "Water", 0.05), ("still air", "Air", 0.02)])
def test_fluids_agree_with_a_reference_library(name: str, fluid: str, off: float) -> None:
    from CoolProp.CoolProp import PropsSI

    one = MATERIALS[name]
    state = ("T", 283.15, "P", 101_325, fluid)
    assert one.conductivity == pytest.approx(PropsSI("L", *state), rel=off)
    assert one.density == pytest.approx(PropsSI("D", *state), rel=off)
    assert one.specific_heat == pytest.approx(PropsSI("C", *state), rel=off)
