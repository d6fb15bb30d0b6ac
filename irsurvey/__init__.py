"""Surface temperatures, anomalies, heat and severity from radiometric infrared survey frames."""

from __future__ import annotations

__version__ = "0.1.0"
