"""Emissivities and reflected temperatures of a frame: the target's, and those of drawn areas that have their own."""

from __future__ import annotations

from collections.abc import Mapping, Sequence
from dataclasses import replace
from itertools import chain, count

from irsurvey.model import Quantity
from irsurvey.survey import schema
from irsurvey.survey.defaults import defaults
from irsurvey.survey.known import Known
from irsurvey.survey.levels import DEPTH, Stated
from irsurvey.survey.scene import Quantities
from irsurvey.survey.uncertainties import Uncertainties
from irsurvey.survey.units import si

_LIMITS = (0.001, 1.0)
"""Of an emissivity: nothing emits nothing, so that a step of the uncertainty stays above 0."""


def target(stated: Mapping[str, Stated], uncertainties: Uncertainties, known: Known) -> Quantity:
    """Emissivity of what no drawn surface says otherwise about."""
    own = _emissivity(stated, uncertainties, known)
    if own is not None:
        return own
    value = defaults("assumed")["emissivity"].value
    return _quantity(value, "default", uncertainties, assumed="emissivity")


def own_emissivity(
    area: schema.Surface | schema.Component,
    quantities: Quantities,
    target_material: str | None,
    own: Quantity,
) -> str:
    """Name in the scene of an area's own emissivity; adds it to `quantities` where it is new.

    What is one thing has one name, and moves together: areas of one material, components of one group with one
    emissivity.
    """
    group = area.group if isinstance(area, schema.Component) else None
    names = [f"emissivity:{label}" for label in (area.material, group, area.name) if label]
    same = ["emissivity"] if area.material and area.material == target_material else []
    return put(quantities, [*same, *names], own)


def emissivity_of(
    area: schema.Surface | schema.Component, uncertainties: Uncertainties, known: Known
) -> Quantity | None:
    """The emissivity an area states, or that of its material; None where it has the target's."""
    stated = {key: Stated(value, "surface", DEPTH["surface"]) for key, value in area.stated().items()}
    return _emissivity(stated, uncertainties, known)


def own_reflected(area: schema.Surface | schema.Component, quantities: Quantities, uncertainties: Uncertainties) -> str:
    """Name in the scene of what an area mirrors; adds it to `quantities` where the area states its own."""
    if area.reflected_c is None:
        return "reflected"
    value = si("reflected_c", area.reflected_c)
    own = uncertainties.quantity("", value, "reflected_k", source="surface", low=0.0)
    return put(quantities, [f"reflected:{area.name}"], own)


def put(quantities: Quantities, names: Sequence[str], own: Quantity) -> str:
    """Adds `own` under the first of `names` that is free or stands for the same value already, and says which."""
    numbered = (f"{names[-1]} ({number})" for number in count(2))
    for name in chain(names, numbered):
        present = quantities.setdefault(name, replace(own, name=name))
        if (present.value, present.u, present.distribution) == (own.value, own.u, own.distribution):
            break
    return name


def _emissivity(stated: Mapping[str, Stated], uncertainties: Uncertainties, known: Known) -> Quantity | None:
    if "emissivity" in stated:
        value, source = stated["emissivity"].value, stated["emissivity"].source
        return _quantity(value, source, uncertainties)
    material = stated.get("material")
    if material is None or material.value not in known.materials:
        return None
    value, u = known.materials[material.value]
    general = uncertainties.stated.get("emissivity")
    if general is not None and general.depth >= material.depth:  # stated where the material is, not for all above it
        return _quantity(value, "material table", uncertainties)
    return Quantity("emissivity", value, u, "material table", *_LIMITS, distribution="rectangular")


def _quantity(value: float, source: str, uncertainties: Uncertainties, assumed: str = "") -> Quantity:
    low, high = _LIMITS
    return uncertainties.quantity("emissivity", value, "emissivity", source=source, low=low, high=high, assumed=assumed)
