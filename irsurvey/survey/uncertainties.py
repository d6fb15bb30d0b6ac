"""Quantities of a scene with their standard uncertainties: stated under [uncertainty], or by default."""

from __future__ import annotations

from collections.abc import Mapping
from dataclasses import dataclass
from math import inf, sqrt

from irsurvey.model import Quantity
from irsurvey.survey.defaults import defaults
from irsurvey.survey.levels import Stated
from irsurvey.survey.schema import HalfWidth
from irsurvey.survey.units import si


@dataclass(frozen=True, slots=True)
class Uncertainties:
    """What [uncertainty] states for one frame; `surroundings` is "inside", "outside" or "electrical"."""

    stated: Mapping[str, Stated]
    surroundings: str

    def quantity(
        self,
        name: str,
        value: float,
        *keys: str,
        source: str = "default",
        low: float = -inf,
        high: float = inf,
        assumed: str = "",
        follows: str | None = None,
        relative_to: float | None = None,
    ) -> Quantity:
        """A quantity in SI units, as uncertain as the first of `keys` that is stated or has a default; else exact.

        A key in `_fraction` is relative to the value, or to `relative_to`.  `assumed` is the entry that counts for a
        value nobody stated.  What comes from a half-width is rectangular.
        """
        key, u, distribution, u_source = self._spread(keys, assumed)
        if key.endswith("_fraction"):
            u *= abs(value if relative_to is None else relative_to)
        return Quantity(name, value, si(key, u), source, low, high, distribution, follows, u_source)

    def source(self, key: str) -> str:
        """Where `key` is stated."""
        return self.stated[key].source if key in self.stated else "default"

    def _spread(self, keys: tuple[str, ...], assumed: str) -> tuple[str, float, str, str]:
        """The key that counts, the standard uncertainty in its unit, the distribution, and where it comes from."""
        for key in keys:
            if key in self.stated:
                u, source = self.stated[key].value, self.stated[key].source
                if isinstance(u, HalfWidth):
                    return key, u.half_width / sqrt(3), "rectangular", source
                return key, u, "normal", source
        section, keys = ("assumed", (assumed,)) if assumed else ("stated", keys)
        table = defaults(section)
        for key in keys:
            default = table.get(f"{key}_{self.surroundings}") or table.get(key)
            if default is not None:
                return key, default.u, default.distribution, "default"
        return "", 0.0, "normal", "default"
