"""Numbers with an uncertainty and an origin: the inputs of a measurement and its results."""

from __future__ import annotations

from dataclasses import dataclass, replace
from math import inf


@dataclass(frozen=True, slots=True)
class Estimate:
    """A measured number and its standard uncertainty (k = 1), in the unit its field's name ends in.

    `interval_95`: ends of the 95 % interval where it was drawn (Monte Carlo); None: value ± 1.96 u.
    """

    value: float
    u: float | None
    interval_95: tuple[float, float] | None = None


@dataclass(frozen=True, slots=True)
class Quantity:
    """One named scalar input of a measurement, in SI units, with its standard uncertainty and origin.

    `source` is one of "survey", "group", "frame", "surface", "default", "material table",
    "measured in frame", "log".  `low` and `high` bound the domain (an emissivity ends at 1), so that
    a step out of it is taken one-sided.  `distribution` is "normal" or "rectangular".  `follows` names a
    quantity this one moves with, one to one, its own `u` on top: one value given for several.  `u_source` says
    where `u` comes from, as `source` does for the value.
    """

    name: str
    value: float
    u: float = 0.0
    source: str = "default"
    low: float = -inf
    high: float = inf
    distribution: str = "normal"
    follows: str | None = None
    u_source: str = "default"


@dataclass(frozen=True, slots=True)
class Scene:
    """Everything a measurement depends on, one name per source: what two results share moves together.

    Surfaces, components and partner frames refer to these names.  Used ones (SI, fractions not percent):
    `emissivity`, `emissivity:<surface>`, `reflected`, `reflected:<surface>`, `air`, `relative_humidity`,
    `distance`, `pressure`, `atmosphere` (relative error of the absorptance of the air path, 0 ± u),
    `window_transmittance`, `window_reflectance`, `window_temperature`, `window_ambient`,
    `indoor_air`, `outdoor_air`, `ambient`, `mean_radiant`, `sky`, `ground`, `cloud` (0…1), `sky_model` (what a
    modelled sky may be off, 0 ± u [K]), `tilt` [rad], `indoor_humidity`, `outdoor_humidity` (0…1), `total_emissivity`
    and `total_emissivity:<surface>` (over all wavelengths), `u_value` (stated for the element), `hours_…` of the
    conditions [s], `wind`, `convection` (factor on the film coefficient, 1 ± u), `camera_offset` [K], `camera_gain`
    (relative, about the frame's median),
    `ifov` [rad], `view_angle` [rad], `known_length` [m], `known_width` [m], `known_height` [m],
    `load_exponent` (rise ∝ load^n), `temperature:<surface>` (known-temperature surfaces); the camera's own
    imperfections `shading` (corner against centre), `shading_x`, `shading_y` (edge against centre) [K],
    `size_of_source` (share of what blur could take of a contrast), `selection` (of what picking an extreme could
    add), and of each area `noise:<area>` [K] and `outline:<area>` [px], of the reference plane `slope_x`,
    `slope_y` [K px⁻¹].
    """

    quantities: tuple[Quantity, ...]
    correlations: tuple[tuple[str, str, float], ...] = ()  # two names and their coefficient, −1…1

    def __getitem__(self, name: str) -> Quantity:
        for quantity in self.quantities:
            if quantity.name == name:
                return quantity
        raise KeyError(name)

    def __contains__(self, name: object) -> bool:
        return any(quantity.name == name for quantity in self.quantities)

    def value(self, name: str) -> float | None:
        """The value of a quantity, or None where nobody stated it."""
        return self[name].value if name in self else None

    def values(self) -> dict[str, float]:
        """All values by name."""
        return {quantity.name: quantity.value for quantity in self.quantities}

    def with_(self, *quantities: Quantity) -> Scene:
        """The same scene with these quantities added, or put in place of those of the same name."""
        new = {quantity.name: quantity for quantity in quantities}
        kept = tuple(new.pop(quantity.name, quantity) for quantity in self.quantities)
        return replace(self, quantities=(*kept, *new.values()))
