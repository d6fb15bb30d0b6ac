"""A camera looking through air: from object temperatures to the numbers it stores, wavelength by wavelength."""

from __future__ import annotations

import csv
from dataclasses import dataclass
from functools import cache
from math import sqrt
from pathlib import Path

import numpy as np
from painting import Field, Mask, Subject, grid, normals
from scipy.ndimage import gaussian_filter

H, C, K = 6.62607015e-34, 299_792_458.0, 1.380649e-23  # exact since the 2019 SI
AIR_TABLE = Path(__file__).with_name("air_transmittance.csv")


@dataclass(frozen=True)
class Camera:
    """An invented camera: band, noise (NETD at 30 °C), pixel pitch, blur, range, and how it writes numbers down.

    T = scale · stored, in kelvin or degrees Celsius (`unit` "K" or "C").
    """

    name: str
    band_um: tuple[float, float]
    shape: tuple[int, int]
    ifov_mrad: float
    noise_k: float
    blur_px: float
    range_c: tuple[float, float]
    unit: str
    scale: float
    dtype: str


@dataclass(frozen=True)
class Air:
    """The air between camera and object; only conditions that the transmittance table holds."""

    air_c: int
    relative_humidity_percent: int
    distance_m: float


@dataclass(frozen=True)
class Window:
    """An infrared window in front of the camera."""

    transmittance: float
    reflectance: float
    temperature_c: float
    ambient_c: float


@cache
def radiance_table(band_um: tuple[float, float]) -> tuple[Field, Field]:
    """Temperatures [°C], −80 to 400 in steps of 0.05 K, and the band radiance [W m⁻² sr⁻¹] of a black body at each.

    Planck's law summed over the band at 48 Gauss–Legendre wavelengths (flat response).  Between two steps a
    straight line errs by less than 1e-5 K.
    """
    low, high = (1e-6 * edge for edge in band_um)
    nodes, weights = np.polynomial.legendre.leggauss(48)
    wavelength = (high + low) / 2 + (high - low) / 2 * nodes
    t_c = np.arange(-80.0, 400.0, 0.05)
    exponent = H * C / (wavelength * K * (t_c[:, None] + 273.15))
    spectral = 2 * H * C**2 / wavelength**5 / np.expm1(exponent)
    return t_c, spectral @ weights * (high - low) / 2


def radiance(t_c: Field | float, band_um: tuple[float, float]) -> Field:
    """Band radiance of a black body [W m⁻² sr⁻¹]."""
    return np.interp(t_c, *radiance_table(band_um))


def apparent(radiance_seen: Field, band_um: tuple[float, float]) -> Field:
    """The temperature [°C] of the black body that is as bright."""
    t_c, radiances = radiance_table(band_um)
    return np.interp(radiance_seen, radiances, t_c)


@cache
def air_transmittance(band_um: tuple[float, float], air: Air) -> float:
    """Transmittance of the air path, read from the table; between its distances linear in the square root of the path.

    (Strong lines absorb with the root of the path.)  No air at distance 0.
    """
    lines = (line for line in AIR_TABLE.read_text(encoding="utf-8").splitlines() if not line.startswith("#"))
    wanted = ("{:g}-{:g}".format(*band_um), str(air.air_c), str(air.relative_humidity_percent))
    rows = [row for row in csv.DictReader(lines) if tuple(row.values())[:3] == wanted]
    if not rows:
        raise ValueError(f"the table holds no air like {wanted}")
    path = [0.0] + [sqrt(float(row["path_m"])) for row in rows]
    return float(np.interp(sqrt(air.distance_m), path, [1.0] + [float(row["transmittance"]) for row in rows]))


def radiance_at_camera(subject: Subject, camera: Camera, air: Air, window: Window | None) -> Field:
    """What arrives at the lens: emitted and reflected radiance, dimmed and refilled by the air, then by the window.

    One transmittance, that for a 20 °C source, serves all terms: over these few metres it differs by less than
    0.001 from that for any other temperature in these frames.
    """
    band = camera.band_um
    tau = air_transmittance(band, air)
    emissivity = subject.emissivities
    leaving = emissivity * radiance(subject.temperature_c, band) + (1 - emissivity) * radiance(
        subject.reflected_c, band
    )
    seen = tau * leaving + (1 - tau) * radiance(air.air_c, band)
    if window is None:
        return seen
    own = 1 - window.transmittance - window.reflectance
    return (
        window.transmittance * seen
        + own * radiance(window.temperature_c, band)
        + window.reflectance * radiance(window.ambient_c, band)
    )


def expose(name: str, arriving: Field, camera: Camera, *, shading_k: float = 0.0, offset_k: float = 0.0) -> Field:
    """Apparent temperatures [°C] as the camera measures them: blurred, darker in the corners, noisy, shifted, clipped.

    `shading_k` is the loss in the corners [K at the frame's median], growing with the fourth power of the distance
    from the centre (cos⁴ law of lenses, in round figures).  Noise is constant in radiance, as in a bolometer.
    """
    band = camera.band_um
    blurred = gaussian_filter(arriving, camera.blur_px, mode="nearest")
    x, y = grid(arriving.shape)
    rows, columns = arriving.shape
    off_axis = ((x - (columns - 1) / 2) ** 2 + (y - (rows - 1) / 2) ** 2) / (((columns - 1) ** 2 + (rows - 1) ** 2) / 4)
    middle_c = float(np.median(apparent(blurred, band)))
    shading = shading_k * slope(middle_c, band) * off_axis**2
    noise = camera.noise_k * slope(30.0, band) * normals(f"{name} noise", arriving.shape)
    return np.clip(apparent(blurred - shading + noise, band) + offset_k, *camera.range_c)


def slope(t_c: float, band_um: tuple[float, float]) -> float:
    """How fast band radiance grows with temperature [W m⁻² sr⁻¹ K⁻¹]."""
    return float(radiance(t_c + 0.5, band_um) - radiance(t_c - 0.5, band_um))


def stored(apparent_c: Field, camera: Camera) -> np.ndarray:
    """The numbers in the camera's file; what lies at an end of the range is never rounded back into it."""
    zero = 273.15 if camera.unit == "K" else 0.0
    numbers = (apparent_c + zero) / camera.scale
    if camera.dtype == "uint16":
        low, high = ((edge + zero) / camera.scale for edge in camera.range_c)
        numbers = np.where(numbers >= high, np.ceil(high), np.where(numbers <= low, np.floor(low), np.rint(numbers)))
    return numbers.astype(camera.dtype)


def saturated(apparent_c: Field, camera: Camera) -> Mask:
    """Pixels at the upper end of the camera's range or beyond it."""
    return apparent_c >= camera.range_c[1]
