"""Standard uncertainties of a scene's quantities: stated under [uncertainty], or by default."""

from __future__ import annotations

from collections.abc import Mapping
from dataclasses import dataclass
from math import sqrt

from irsurvey.survey.defaults import defaults
from irsurvey.survey.levels import Stated
from irsurvey.survey.schema import HalfWidth
from irsurvey.survey.units import si


@dataclass(frozen=True, slots=True)
class Uncertainties:
    """What [uncertainty] states for one frame; `surroundings` is "inside", "outside" or "electrical"."""

    stated: Mapping[str, Stated]
    surroundings: str

    def of(self, value: float, *keys: str, assumed: str = "") -> float:
        """Standard uncertainty of a `value` in SI units, by the first of `keys` that is stated or has a default.

        A key in `_fraction` is relative to the value.  `assumed` is the entry that counts for a value nobody stated.
        """
        for key in keys:
            if key in self.stated:
                u = self.stated[key].value
                return _si(key, u.half_width / sqrt(3) if isinstance(u, HalfWidth) else u, value)
        section, keys = ("assumed", (assumed,)) if assumed else ("stated", keys)
        table = defaults(section)
        for key in keys:
            default = table.get(f"{key}_{self.surroundings}") or table.get(key)
            if default is not None:
                return _si(key, default.u, value)
        return 0.0


def _si(key: str, u: float, value: float) -> float:
    return abs(value) * u if key.endswith("_fraction") else si(key, u)
