"""Emissivities and reflected temperatures of a frame: the target's, and those of drawn areas that have their own.

Each emissivity, in the camera's band, has a total one of the same name for the exchange of heat.
"""

from __future__ import annotations

from collections.abc import Iterator, Mapping, Sequence
from dataclasses import replace
from itertools import chain, count

from irsurvey.model import Quantity
from irsurvey.survey.defaults import defaults
from irsurvey.survey.known import Known
from irsurvey.survey.levels import DEPTH, Stated
from irsurvey.survey.scene import Quantities
from irsurvey.survey.schema_drawn import Surface
from irsurvey.survey.schema_electrical import Component
from irsurvey.survey.uncertainties import Uncertainties
from irsurvey.survey.units import si

_LIMITS = (0.001, 1.0)
"""Of an emissivity: nothing emits nothing, so that a step of the uncertainty stays above 0."""
_TARGET = "emissivity"


def target(stated: Mapping[str, Stated], uncertainties: Uncertainties, known: Known) -> Iterator[Quantity]:
    """Emissivity, and total emissivity, of what no drawn surface says otherwise about."""
    own = _emissivity(stated, uncertainties, known)
    if own is None:
        own = _quantity(defaults("assumed")["emissivity"].value, "default", uncertainties, assumed="emissivity")
    yield own
    told = stated.get("emissivity_total")
    depths = [stated[key].depth for key in ("emissivity", "material") if key in stated]
    if told is not None and told.depth < max(depths, default=0):
        told = None  # a lower level says that it is another surface
    yield _total(own, told, uncertainties)


def optics(
    area: Surface | Component,
    quantities: Quantities,
    target_material: str | None,
    uncertainties: Uncertainties,
    known: Known,
) -> str:
    """Name in the scene of an area's emissivity; adds it, and the total one, to `quantities` where they are new.

    What is one thing has one name, and moves together: areas of one material, components of one group with one
    emissivity.  An area that states a total emissivity alone has the target's in the band.
    """
    stated = {key: Stated(value, "surface", DEPTH["surface"]) for key, value in area.stated().items()}
    own, told = _emissivity(stated, uncertainties, known), stated.get("emissivity_total")
    if own is None:
        if told is None:
            return _TARGET
        own = replace(quantities[_TARGET], u=0.0, follows=_TARGET)
    group = area.group if isinstance(area, Component) else None
    names = [f"emissivity:{label}" for label in (area.material, group, area.name) if label]
    same = [_TARGET] if area.material and area.material == target_material else []
    return put(quantities, [*same, *names], own, _total(own, told, uncertainties))


def own_reflected(area: Surface | Component, quantities: Quantities, uncertainties: Uncertainties) -> str:
    """Name in the scene of what an area mirrors; adds it to `quantities` where the area states its own."""
    if area.reflected_c is None:
        return "reflected"
    value = si("reflected_c", area.reflected_c)
    own = uncertainties.quantity("", value, "reflected_k", source="surface", low=0.0)
    return put(quantities, [f"reflected:{area.name}"], own)


def put(quantities: Quantities, names: Sequence[str], own: Quantity, total: Quantity | None = None) -> str:
    """Adds `own` under the first of `names` that is free or stands for the same value already, and says which.

    `total` is the total emissivity that belongs to `own`, an emissivity.
    """
    numbered = (f"{names[-1]} ({number})" for number in count(2))
    for name in chain(names, numbered):
        new = {name: replace(own, name=name)}
        if total is not None:
            follows = None if total.follows is None else name
            new[f"total_{name}"] = replace(total, name=f"total_{name}", follows=follows)
        if all(_is_same(quantities.setdefault(key, quantity), quantity) for key, quantity in new.items()):
            break
    return name


def _is_same(present: Quantity, own: Quantity) -> bool:
    """Whether two quantities of one name stand for one value, alone or moving with another."""
    return replace(present, source=own.source, u_source=own.u_source, low=own.low, high=own.high) == own


def _total(own: Quantity, told: Stated | None, uncertainties: Uncertainties) -> Quantity:
    """Total hemispherical emissivity; where it is not told, that in the band, off by something of its own."""
    name, key, (low, high) = f"total_{own.name}", "emissivity_total", _LIMITS
    if told is not None:
        return uncertainties.quantity(name, told.value, key, source=told.source, low=low, high=high)
    return uncertainties.quantity(name, own.value, key, low=low, high=high, assumed=key, follows=own.name)


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
