"""Real frames read as their authors stored them: open data, see tests/real/README.md."""

from __future__ import annotations

import csv
import hashlib
from math import floor
from pathlib import Path

import numpy as np
import pytest

REAL = Path(__file__).parents[1] / "real"
SOURCE = REAL / "dunr" / "22-20-28-391-radiometric.tiff"
CROP = np.s_[128:384, 160:480]

FRAMES = {  # lowest and highest stored number as tifffile, numpy.load and numpy.loadtxt give them without this project
    "dunr/22-18-41-880-radiometric.tiff": ((512, 640), "uint16", 3323, 4060),
    "dunr/22-19-24-355-radiometric.tiff": ((512, 640), "uint16", 3867, 4351),
    "dunr/22-20-28-391-radiometric.tiff": ((512, 640), "uint16", 3475, 4383),
    "dunr/22-20-51-085-radiometric.tiff": ((512, 640), "uint16", 3051, 4350),
    "dunr/22-20-55-966-radiometric.tiff": ((512, 640), "uint16", 3028, 4200),
    "dunr/22-21-06-098-radiometric.tiff": ((512, 640), "uint16", 3039, 4203),
    "dunr/22-22-06-364-radiometric.tiff": ((512, 640), "uint16", 3892, 4240),
    "dunr/22-23-16-177-radiometric.tiff": ((512, 640), "uint16", 3907, 4399),
    "uniform/14-23-28-261-radiometric.tiff": ((512, 640), "uint16", 4373, 4435),
    "uniform/14-23-43-270-radiometric.tiff": ((512, 640), "uint16", 4344, 4420),
    "park_tiff/thermal.tif": ((512, 640), "uint16", 6200, 7386),
    "leak_uav/KA1_DJI_0_0095_R.npz": ((512, 640), "float32", np.float32(-3.394965), np.float32(6.9844284)),
    "iris/snap-2022-08-03T13-48-18.19.csv": ((240, 320), "float64", 27.522243276166137, 40.126773714662534),
}

ENCODINGS = {
    # file: (extent, K per stored step, K at 0, tolerance [K] and its reason)
    "22-20-28-391_raw.png": (np.s_[:, :], 0.025, 173.15, 1e-9),  # the same integers; 1e-9: this sum in float64
    "22-20-28-391_centikelvin_u16.tif": (np.s_[:, :], 0.01, 0.0, 0.005 + 1e-9),  # rounded to 0.01 K: half a step
    "22-20-28-391_degC_f32.npy": (np.s_[:, :], 1.0, 273.15, 5e-7),  # float32 below 16 °C: half of 2^-20 K
    "22-20-28-391_degC.npz": (np.s_[:, :], 1.0, 273.15, 5e-7),
    "22-20-28-391_degC_f32_deflate.tif": (np.s_[:, :], 1.0, 273.15, 5e-7),
    "22-20-28-391_K_f32.tif": (CROP, 1.0, 0.0, 3.1e-5),  # °C + 273.15 in float32: twice half of 2^-15 K
    "22-20-28-391_degC_crop.csv": (CROP, 1.0, 273.15, 1e-9),  # steps of 0.025 K are whole in three decimals
    "22-20-28-391_degC_crop_semicolon_decimalcomma.csv": (CROP, 1.0, 273.15, 1e-9),
}


def test_every_real_frame_has_its_case():
    suffixes = (".tif", ".tiff", ".npz", ".npy", ".png", ".csv")
    there = {f"{path.parent.name}/{path.name}" for path in REAL.glob("*/*") if path.suffix in suffixes}
    assert there == FRAMES.keys() | {f"derived/{name}" for name in ENCODINGS} | {"dunr/marker_pixels.csv"}


@pytest.mark.parametrize("file", FRAMES)
def test_a_real_frame_reads_as_stored(file, frame_of):
    shape, dtype, lowest, highest = FRAMES[file]
    frame = frame_of(REAL / file)
    assert frame.stored.shape == shape
    assert frame.stored.dtype == np.dtype(dtype)
    assert frame.stored.dtype.isnative
    assert frame.stored.flags.c_contiguous
    assert frame.stored.flags.writeable
    assert frame.missing is None
    assert (frame.stored.min(), frame.stored.max()) == (lowest, highest)
    assert frame.sha256 == hashlib.sha256((REAL / file).read_bytes()).hexdigest()


@pytest.mark.parametrize("name", ENCODINGS)
def test_the_same_picture_in_its_eight_encodings_reads_to_the_same_array(name, frame_of):
    extent, scale, offset, tolerance = ENCODINGS[name]
    expected = frame_of(SOURCE).stored[extent] * 0.025 + 173.15
    kelvin = frame_of(REAL / "derived" / name).stored.astype(np.float64) * scale + offset
    assert kelvin.shape == expected.shape
    assert np.abs(kelvin - expected).max() <= tolerance


with (REAL / "dunr" / "marker_pixels.csv").open(newline="") as stream:
    MARKERS = list(csv.DictReader(stream))


@pytest.mark.parametrize("marker", MARKERS, ids=lambda row: f"{row['frame'][:12]} {row['marker']}")
def test_survey_markers_carry_the_published_numbers(marker, frame_of):
    """marker_pixels.csv, read with another program than this one."""
    stored = frame_of(REAL / "dunr" / f"{marker['frame']}.tiff").stored
    celsius = stored * 0.025 - 100
    x, y = float(marker["x_px"]), float(marker["y_px"])
    # the coordinates are rounded to 0.1 pixel, so 287.0 may have been 286.95: the pixel before
    candidates = {int(stored[floor(y + dy), floor(x + dx)]) for dy in (-0.05, 0.05) for dx in (-0.05, 0.05)}
    assert int(marker["raw_at_px"]) in candidates
    around = celsius[floor(y) - 4 : floor(y) + 5, floor(x) - 4 : floor(x) + 5]
    half_step = 0.005 + 1e-9  # published with two decimals
    assert np.median(celsius) == pytest.approx(float(marker["frame_median_C"]), abs=half_step)
    assert around.min() == pytest.approx(float(marker["T_app_C_min_9x9"]), abs=half_step)
    assert around.max() == pytest.approx(float(marker["T_app_C_max_9x9"]), abs=half_step)
