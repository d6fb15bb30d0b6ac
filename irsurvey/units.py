"""The units that the keys of records end in."""

from __future__ import annotations

from typing import Final

UNITS: Final = {
    "m2k_w": "m²·K/W",
    "w_m2k": "W/(m²·K)",
    "w_m2": "W/m²",
    "w_mk": "W/(m·K)",
    "w_k": "W/K",
    "kwh": "kWh",
    "kd": "K·d",
    "g_m3": "g/m³",
    "m_s": "m/s",
    "k_per_m": "K/m",
    "k_per_px": "K/px",
    "per_pixel": "1/px",
    "percent": "%",
    "k_per_year": "K/year",
    "uohm": "µΩ",
    "mv": "mV",
    "mrad": "mrad",
    "hpa": "hPa",
    "m2": "m²",
    "deg": "°",
    "pa": "Pa",
    "px": "px",
    "um": "µm",
    "a": "A",
    "c": "°C",
    "k": "K",
    "m": "m",
    "w": "W",
}
"""The ending of a key → the unit as people write it; longer endings first."""
