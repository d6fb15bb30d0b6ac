"""The reference tables, and bands by the names they carry there."""

from __future__ import annotations

import csv
from collections.abc import Callable
from pathlib import Path

import numpy as np
import pytest
from numpy.typing import NDArray

REFERENCE = Path(__file__).parents[1] / "reference"

BANDS = {"7.5-13": (7.5e-6, 13e-6), "8-14": (8e-6, 14e-6), "7.5-14": (7.5e-6, 14e-6), "3-5": (3e-6, 5e-6)}

Columns = dict[str, NDArray[np.float64]]


@pytest.fixture
def columns() -> Callable[..., Columns]:
    """Numeric columns of a table in tests/reference, restricted to one band where the table has several."""

    def read(name: str, band: str | None = None) -> Columns:
        with (REFERENCE / name).open(encoding="utf-8") as lines:
            rows = list(csv.DictReader(line for line in lines if not line.startswith("#")))
        rows = [row for row in rows if band is None or row["band_um"] == band]
        assert rows
        return {key: np.array([float(row[key]) for row in rows]) for key in rows[0] if key != "band_um"}

    return read


@pytest.fixture(params=BANDS)
def band_name(request: pytest.FixtureRequest) -> str:
    """Each of the bands in turn."""
    return str(request.param)


@pytest.fixture
def band(band_name: str) -> tuple[float, float]:
    return BANDS[band_name]
