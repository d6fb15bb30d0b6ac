"""From temperatures to heat: humid air, convection, radiation, sky, flux at a surface, envelope, moisture, season."""

from __future__ import annotations

from typing import Any, TypeAlias

import numpy as np
from numpy.typing import NDArray

Numbers: TypeAlias = "float | NDArray[np.floating[Any]]"
"""A number or an array of numbers; functions of several broadcast."""
