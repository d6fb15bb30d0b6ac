"""The files of one frame: object temperatures and finding labels as TIFF, pictures as PNG."""

from __future__ import annotations

from pathlib import Path

import numpy as np
from numpy.typing import NDArray

from irsurvey import files
from irsurvey.model import FrameReport, Maps
from irsurvey.numbers import SI, Style
from irsurvey.report import change_picture, picture
from irsurvey.report.inks import COLORMAP
from irsurvey.report.links import SHEET

NAMES = (
    *("temperature.tif", "findings.tif", "heat_flux.tif", "u_temperature.tif", "annotated.png", "change.png"),
    SHEET,
)
"""Every file that a run may write into a frame's folder: these here, and the frame's page in a report of many files."""


def write(frame: FrameReport, maps: Maps, out: Path, *, colormap: str = COLORMAP, style: Style = SI) -> Path:
    """Write OUT/frames/<id>/temperature.tif, findings.tif, annotated.png, and the maps made on request.

    change.png: what pressure changed, where an accepted pair of frames left a map of it; the scales of both pictures
    are lettered in the style.
    temperature.tif: float32 °C, NaN where not measurable; findings.tif: uint16, 0 none, k = finding k.  On request
    heat_flux.tif: float32 W m⁻², and u_temperature.tif: float32 K, the standard uncertainty of each pixel of
    temperature.tif, NaN where none exists.  Each file is written whole or not at all; returns the frame's folder."""
    folder = out / "frames" / frame.id
    _write_tiff(folder / "temperature.tif", maps.temperature_c.astype(np.float32, copy=False))
    _write_tiff(folder / "findings.tif", maps.labels.astype(np.uint16, copy=False))
    for name, on_request in (("heat_flux.tif", maps.heat_flux), ("u_temperature.tif", maps.u_temperature)):
        if on_request is None:
            (folder / name).unlink(missing_ok=True)  # one of an earlier run would not belong to this one
        else:
            _write_tiff(folder / name, on_request.astype(np.float32, copy=False))
    with files.whole(folder / "annotated.png") as part:
        picture.save(picture.annotated(frame, maps, colormap=colormap, style=style), part)
    if maps.change is None:
        (folder / "change.png").unlink(missing_ok=True)
    else:
        with files.whole(folder / "change.png") as part:
            picture.save(change_picture.changed(frame, maps.change, style=style), part)
    return folder


def _write_tiff(path: Path, array: NDArray[np.generic]) -> None:
    """One page, deflate without a predictor: every TIFF reader opens it, and a map from a look-up table, whose
    values repeat, shrinks to a fifth."""
    import tifffile

    with files.whole(path) as part:
        tifffile.imwrite(
            part,
            array,
            photometric="minisblack",
            compression="zlib",
            compressionargs={"level": 1},
            metadata=None,
            software="irsurvey",
        )
