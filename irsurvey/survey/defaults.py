"""What counts where the survey file is silent: default uncertainties and assumed values, from `defaults.toml`."""

from __future__ import annotations

import tomllib
from dataclasses import dataclass
from functools import cache
from importlib.resources import files
from math import sqrt


@dataclass(frozen=True, slots=True)
class Default:
    """One entry of `defaults.toml`, in the unit its key ends in; `value` is NaN for an uncertainty alone."""

    u: float
    half_width: float | None
    value: float
    source: str
    mark: str

    @property
    def distribution(self) -> str:
        """As `Quantity.distribution`."""
        return "normal" if self.half_width is None else "rectangular"


@cache
def defaults(section: str) -> dict[str, Default]:
    """Entries of "stated" (uncertainties of stated values) or "assumed" (values nobody stated)."""
    table = tomllib.loads(files("irsurvey.survey").joinpath("defaults.toml").read_text("utf-8"))
    return {key: _default(**entry) for key, entry in table[section].items()}


def _default(
    source: str, mark: str, *, standard: float = 0.0, half_width: float | None = None, value: float = float("nan")
) -> Default:
    u = standard if half_width is None else half_width / sqrt(3)
    return Default(u, half_width, value, source, mark)
