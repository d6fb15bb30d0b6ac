"""Building elements of the survey file, their layers with the values of the materials they name."""

from __future__ import annotations

from collections.abc import Iterator, Mapping

from irsurvey.errors import Fault
from irsurvey.model import Element, Layer
from irsurvey.survey import schema_building as schema
from irsurvey.survey.faults import nearest
from irsurvey.survey.known import Known
from irsurvey.survey.schema import Document


def elements(document: Document, known: Known) -> dict[str, Element]:
    """Elements by id."""
    return {
        stated.id: Element(
            id=stated.id,
            description=stated.description,
            layers=tuple(_layer(layer, known.building_materials) for layer in stated.layers),
            mass=stated.mass,
            u_value=stated.u_value_w_m2k,
            area=stated.area_m2,
        )
        for stated in document.element
    }


def material_faults(document: Document, known: Known) -> Iterator[Fault]:
    """Layers of a material that nobody knows."""
    materials = known.building_materials
    for element in document.element:
        for number, layer in enumerate(element.layers, 1):
            if layer.material is not None and layer.material not in materials:
                where = f"element[{element.id}].layers[#{number}].material"
                remedy = nearest(layer.material, materials)
                yield Fault(where, "a name from the table of building materials", repr(layer.material), remedy)


def _layer(stated: schema.Layer, materials: Mapping[str, tuple[float, float, float]]) -> Layer:
    known = materials.get(stated.material or "", (None, None, None))
    own = (stated.conductivity_w_mk, stated.density_kg_m3, stated.specific_heat_j_kgk)
    conductivity, density, specific_heat = (a if a is not None else b for a, b in zip(own, known, strict=True))
    return Layer(
        material=stated.material or "",
        thickness=stated.thickness_m or 0.0,
        conductivity=conductivity,
        density=density,
        specific_heat=specific_heat,
        resistance=stated.resistance_m2k_w,
    )
