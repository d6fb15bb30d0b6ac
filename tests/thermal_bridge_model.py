"""An independent model of thermal bridges: steady conduction in two dimensions, finite volumes, no code of irsurvey.

`solve` takes any rectangular grid of conductivities with films, given temperatures or insulation at its four sides.
`bridge` builds a plane wall with something in it that conducts more, and returns what a camera would see of its inner
face together with the true Ψ, U, incidence factor and temperature factor of that very solution.

SI throughout: m, K (or °C: only differences count, unless a film radiates), W m⁻¹ K⁻¹, W m⁻² K⁻¹.
"""

from __future__ import annotations

from collections.abc import Callable, Sequence
from dataclasses import dataclass
from typing import Any

import numpy as np
from numpy.typing import ArrayLike, NDArray
from scipy import sparse
from scipy.sparse.linalg import spsolve

Array = NDArray[np.float64]
Film = tuple[ArrayLike, ArrayLike]
"""What lies beyond a side: film coefficient [W m⁻² K⁻¹] (infinite: the surface itself has the temperature) and
temperature, numbers or one for each cell along the side."""


@dataclass(frozen=True, slots=True, eq=False)
class Field:
    """Temperatures (rows, columns) of the cells' middles, and for each side with a film the flux into the body
    [W m⁻²] and the surface temperature, by its name."""

    temperature: Array
    flux: dict[str, Array]
    surface: dict[str, Array]


def solve(conductivity: ArrayLike, columns: ArrayLike, rows: ArrayLike, **sides: Film) -> Field:
    """Steady temperatures of a rectangle of cells; `conductivity` (rows, columns), `columns` and `rows` their sizes.

    `sides` are any of top, bottom (a film for each column), left, right (for each row); a side left out is adiabatic.
    Between two cells the half cells conduct in series, so that a jump of conductivity on a cell face is exact."""
    k = np.asarray(conductivity, dtype=float)
    dx, dy = np.asarray(columns, dtype=float), np.asarray(rows, dtype=float)
    number = np.arange(k.size).reshape(k.shape)
    across = (dx / 2) / k, (dy / 2)[:, None] / k  # resistance of half a cell, along x and along y
    links = [
        (number[:, :-1], number[:, 1:], dy[:, None] / (across[0][:, :-1] + across[0][:, 1:])),
        (number[:-1], number[1:], dx / (across[1][:-1] + across[1][1:])),
    ]
    first, second, conductance = (np.concatenate([np.ravel(link[i]) for link in links]) for i in range(3))
    diagonal = np.bincount(first, conductance, k.size) + np.bincount(second, conductance, k.size)
    source = np.zeros(k.size)
    edges = {"left": np.s_[:, 0], "right": np.s_[:, -1], "top": np.s_[0, :], "bottom": np.s_[-1, :]}
    beyond: dict[str, tuple[Array, Array, Array]] = {}
    for side, (h, t) in sides.items():
        along, normal = (dy, 0) if side in ("left", "right") else (dx, 1)
        cells, half = number[edges[side]], across[normal][edges[side]]
        per_area = 1 / (half + 1 / np.broadcast_to(np.asarray(h, dtype=float), cells.shape))
        t_beyond = np.broadcast_to(np.asarray(t, dtype=float), cells.shape)
        np.add.at(diagonal, cells, along * per_area)
        np.add.at(source, cells, along * per_area * t_beyond)
        beyond[side] = per_area, t_beyond, half
    matrix = sparse.coo_array(
        (
            np.concatenate([diagonal, -conductance, -conductance]),
            (np.concatenate([number.ravel(), first, second]), np.concatenate([number.ravel(), second, first])),
        )
    ).tocsc()
    temperature = spsolve(matrix, source).reshape(k.shape)
    flux = {side: u * (t - temperature[edges[side]]) for side, (u, t, _) in beyond.items()}
    surface = {side: temperature[edges[side]] + flux[side] * half for side, (_, _, half) in beyond.items()}
    return Field(temperature, flux, surface)


# --- thermal bridges --------------------------------------------------------------------------------------------------


@dataclass(frozen=True, slots=True)
class Insert:
    """Something of another conductivity in a wall: `left` to `right` along it, `near` to `far` from its inner face."""

    left: float
    right: float
    near: float
    far: float
    conductivity: float


@dataclass(frozen=True, slots=True)
class Wall:
    """A plane wall, layers (thickness, conductivity) from inside to outside, with inserts around the place 0."""

    layers: tuple[tuple[float, float], ...]
    inserts: tuple[Insert, ...] = ()

    @property
    def thickness(self) -> float:
        return sum(thickness for thickness, _ in self.layers)


# Typical constructions; conductivities after ISO 10456 or typical.
CONCRETE_COLUMN = Wall(
    ((0.0125, 0.25), (0.16, 0.77), (0.10, 0.037), (0.02, 1.0)), (Insert(-0.10, 0.10, 0.0125, 0.2725, 2.0),)
)
"""Plaster, brick, insulation and render, interrupted by 0.2 m of concrete: the edge of a slab or a column."""
TIMBER_STUD = Wall(((0.0125, 0.25), (0.14, 0.037), (0.012, 0.13)), (Insert(-0.03, 0.03, 0.0125, 0.1525, 0.13),))
"""Plasterboard, insulation and sheathing, with a stud of timber 60 mm wide through the insulation."""
STEEL_STUD = Wall(
    ((0.0125, 0.25), (0.10, 0.037), (0.015, 0.13)),
    (
        Insert(-0.00075, 0.00075, 0.0125, 0.1125, 50.0),
        Insert(-0.00075, 0.04925, 0.0125, 0.014, 50.0),
        Insert(-0.00075, 0.04925, 0.111, 0.1125, 50.0),
    ),
)
"""Plasterboard, insulation and sheathing, with a C-section of steel: a web and two flanges, 1.5 mm thick."""


@dataclass(frozen=True, slots=True, eq=False)
class Bridge:
    """The solution of a wall with a bridge, and what is true of it.

    `x`, `width`: middles and sizes of the cells along the wall [m], `t_surface` [K] and `flux` [W m⁻²] (positive out
    of the warm room) of its inner face; the wall without inserts has `t_undisturbed` and `flux_undisturbed`.  `psi`
    is Q/ΔT − U·l of the whole model; `incidence_factor` Σ(T_i − T)/[N(T_i − T_1D)] of its surface temperatures;
    `heat_ratio` the heat itself over that of the undisturbed wall, the same where the film is constant; `f_rsi` that
    of its coldest place."""

    x: Array
    width: Array
    t_surface: Array
    flux: Array
    t_inside: float
    t_outside: float
    t_undisturbed: float
    flux_undisturbed: float
    u_value: float
    psi: float
    incidence_factor: float
    heat_ratio: float
    f_rsi: float
    imbalance: float  # heat in at the inner face minus heat out at the outer one, relative

    @property
    def length(self) -> float:
        """Of the wall modelled [m]."""
        return float(self.width.sum())

    def factor_within(self, half: float) -> float:
        """Incidence factor of a strip that reaches only `half` metres to each side: it depends on that, unlike Ψ."""
        pixels = self.pixels(2 * half, 1)
        return float((self.t_inside - pixels[0]) / (self.t_inside - self.t_undisturbed))

    def pixels(self, spacing: float, count: int) -> Array:
        """Temperatures [K] of `count` pixels `spacing` metres apart with the place 0 in their middle, each the mean
        over its own width, as a camera averages; beyond the model the wall is undisturbed."""
        edges = (np.arange(count + 1) - count / 2) * spacing
        ends = np.concatenate([[self.x[0] - self.width[0] / 2], self.x + self.width / 2])
        excess = np.concatenate([[0.0], np.cumsum((self.t_surface - self.t_undisturbed) * self.width)])
        return np.asarray(self.t_undisturbed + np.diff(np.interp(edges, ends, excess)) / spacing)


def radiating(h_convective: float, emissivity: float, t_radiant: float) -> Callable[[Array], Array]:
    """A film of convection and radiation to surroundings at `t_radiant` [K], by the surface temperature [K]."""
    sigma = 5.670374419e-8  # CODATA 2018
    return lambda t: h_convective + emissivity * sigma * (t + t_radiant) * (t**2 + t_radiant**2)


def bridge(
    wall: Wall,
    *,
    t_inside: float = 293.15,
    t_outside: float = 273.15,
    inside: float | Callable[[Array], Array] = 1 / 0.13,
    outside: float = 1 / 0.04,
    half: float = 2.5,
    finest: float = 0.0005,
) -> Bridge:
    """The wall from `half` metres left of the place 0 to `half` metres right of it, its ends adiabatic.

    `inside` is the inner film coefficient, or a function of the surface temperature [K] (`radiating`), found by
    iteration.  Cells are `finest` at every edge of a layer or an insert and grow by a fifth from there."""
    depths = np.cumsum([0.0, *(thickness for thickness, _ in wall.layers)])
    columns = graded([-half, half, *(x for one in wall.inserts for x in (one.left, one.right))], finest, half / 20)
    rows = graded([*depths, *(y for one in wall.inserts for y in (one.near, one.far))], finest, wall.thickness / 20)
    x, y = middles(columns) - half, middles(rows)
    layer = np.searchsorted(depths, y) - 1
    plain = np.array([conductivity for _, conductivity in wall.layers])[layer]
    conductivity = np.repeat(plain[:, None], x.size, axis=1)
    for one in wall.inserts:
        conductivity[np.ix_((y > one.near) & (y < one.far), (x > one.left) & (x < one.right))] = one.conductivity

    def face(cells: Array, widths: Array) -> tuple[Array, Array, Array]:
        film: Any = inside if isinstance(inside, float | int) else inside(np.full(widths.size, t_inside))
        while True:
            field = solve(cells, widths, rows, top=(film, t_inside), bottom=(outside, t_outside))
            if isinstance(inside, float | int):
                break
            film, last = inside(field.surface["top"]), film
            if np.max(np.abs(film - last)) < 1e-9:  # each round gains two digits or more
                break
        return field.surface["top"], field.flux["top"], field.flux["bottom"]

    surface, flux, leaving = face(conductivity, columns)
    alone, flux_alone, _ = face(plain[:, None], np.ones(1))
    delta_t, length = t_inside - t_outside, float(columns.sum())
    heat, u_value = float(flux @ columns), float(flux_alone[0] / delta_t)
    return Bridge(
        x, columns, surface, flux, t_inside, t_outside, float(alone[0]), float(flux_alone[0]), u_value,
        psi=heat / delta_t - u_value * length,
        incidence_factor=float((t_inside - surface) @ columns / (length * (t_inside - alone[0]))),
        heat_ratio=heat / float(flux_alone[0] * length),
        f_rsi=float((surface.min() - t_outside) / delta_t),
        imbalance=float((heat + leaving @ columns) / heat),
    )


def graded(edges: Sequence[float], finest: float, coarsest: float) -> Array:
    """Sizes of cells that begin with `finest` at every edge, grow by a fifth away from it, and end on every edge."""
    sizes: list[Array] = []
    for span in np.diff(np.unique(np.round(edges, 9))):
        growing = np.minimum(finest * 1.2 ** np.arange(1000), coarsest)
        half = growing[: max(int(np.searchsorted(np.cumsum(growing), span / 2)), 1)]
        both = np.concatenate([half, half[::-1]])
        sizes.append(both * span / both.sum())
    return np.concatenate(sizes)


def middles(sizes: Array) -> Array:
    """Positions of the cells' middles from the first one's edge."""
    return np.cumsum(sizes) - sizes / 2
