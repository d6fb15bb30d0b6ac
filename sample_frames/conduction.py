"""Steady heat conduction in two dimensions, by finite volumes: the edge of a concrete slab in an insulated wall."""

from __future__ import annotations

from dataclasses import dataclass
from itertools import pairwise

import numpy as np
from painting import Field
from scipy.sparse import coo_array
from scipy.sparse.linalg import spsolve

R_OUTSIDE = 0.04  # film resistance [m² K W⁻¹], ISO 6946


@dataclass(frozen=True)
class Sheet:
    """A layer of the wall, from inside to outside, and how finely it is cut."""

    thickness: float  # [m]
    conductivity: float  # [W m⁻¹ K⁻¹]
    cells: int
    conductivity_at_slab: float  # where the slab passes; the same where it does not pass


@dataclass(frozen=True)
class Edge:
    """What the slab edge does to the inside surface; temperatures as (T − T_outside)/(T_inside − T_outside)."""

    offset: Field  # distance from the middle of the slab along the wall [m], rising from 0
    width: Field  # of each row of cells along the wall [m]
    factor: Field  # surface temperature factor at each offset
    factor_undisturbed: float
    u_value: float  # of the wall without the slab [W m⁻² K⁻¹]
    psi: float  # linear thermal transmittance, both sides of the slab together [W m⁻¹ K⁻¹]


def slab_edge(
    sheets: tuple[Sheet, ...], slab: float, *, r_inside: float, reach: float = 1.2, step: float = 0.002
) -> Edge:
    """The inside surface across a slab of height `slab` [m], solved on one side of its middle, adiabatic at both ends.

    Rows `step` [m] high as far as 0.15 m beyond the slab's edge, then growing by 5 % each until `reach` [m].
    """
    depth = np.concatenate([np.full(sheet.cells, sheet.thickness / sheet.cells) for sheet in sheets])
    fine = np.full(round((slab / 2 + 0.15) / step), step)
    growing = step * 1.05 ** np.arange(1, 200)
    growing = growing[np.cumsum(growing) < reach - fine.sum()]
    height = np.concatenate([fine, growing])
    offset = np.cumsum(height) - height / 2
    plain, bridged = (
        np.concatenate([np.full(sheet.cells, value) for sheet, value in zip(sheets, values, strict=True)])
        for values in ([s.conductivity for s in sheets], [s.conductivity_at_slab for s in sheets])
    )
    conductivity = np.where(offset[:, None] < slab / 2, bridged, plain)  # rows along the wall, columns into it
    surface = _surface_factors(conductivity, height, depth, r_inside)
    u_value = 1 / (r_inside + float((depth / plain).sum()) + R_OUTSIDE)
    flux = (1 - surface) / r_inside
    psi = 2 * float(((flux - u_value) * height).sum())
    return Edge(offset, height, surface, 1 - u_value * r_inside, u_value, psi)


def _surface_factors(conductivity: Field, height: Field, depth: Field, r_inside: float) -> Field:
    """Inside surface temperatures, by row, for 1 inside and 0 outside."""
    rows, columns = conductivity.shape
    number = np.arange(rows * columns).reshape(rows, columns)
    half_in, half_along = depth / 2 / conductivity, height[:, None] / 2 / conductivity  # resistances [m² K W⁻¹]
    inward = height[:, None] / (half_in[:, :-1] + half_in[:, 1:])
    along = depth / (half_along[:-1] + half_along[1:])
    to_inside, to_outside = height / (r_inside + half_in[:, 0]), height / (R_OUTSIDE + half_in[:, -1])
    diagonal = np.zeros((rows, columns))
    diagonal[:, 0] += to_inside
    diagonal[:, -1] += to_outside
    entries = []
    for links, one, other in ((inward, number[:, :-1], number[:, 1:]), (along, number[:-1], number[1:])):
        np.add.at(diagonal.ravel(), one.ravel(), links.ravel())
        np.add.at(diagonal.ravel(), other.ravel(), links.ravel())
        entries += [(one.ravel(), other.ravel(), -links.ravel()), (other.ravel(), one.ravel(), -links.ravel())]
    entries.append((number.ravel(), number.ravel(), diagonal.ravel()))
    row, column, value = (np.concatenate(parts) for parts in zip(*entries, strict=True))
    heat = np.zeros((rows, columns))
    heat[:, 0] = to_inside
    t = spsolve(coo_array((value, (row, column)), shape=(number.size, number.size)).tocsc(), heat.ravel())
    flux = to_inside / height * (1 - t.reshape(rows, columns)[:, 0])
    return 1 - flux * r_inside


def across(edge: Edge, distance: Field) -> Field:
    """Surface temperature factors at distances from the middle of the slab [m], either side; 1-D far away."""
    return np.interp(np.abs(distance), edge.offset, edge.factor)


def incidence_factor(edge: Edge, start: float, end: float) -> float:
    """Heat through the strip from `start` to `end` [m from the middle of the slab] over that through the plain wall."""
    at = np.linspace(start, end, 20_001)
    steps = [float(b - a) for a, b in pairwise(at)]
    middle = (at[:-1] + at[1:]) / 2
    return float(np.average((1 - across(edge, middle)) / (1 - edge.factor_undisturbed), weights=steps))
