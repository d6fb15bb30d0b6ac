"""The pixels behind a number as a short histogram, so that the browser can work it out again without a mask."""

from __future__ import annotations

from dataclasses import dataclass
from typing import Any, Final

import numpy as np
from numpy.typing import NDArray

from irsurvey.anomalies import reference as references
from irsurvey.anomalies.patch import cropped
from irsurvey.anomalies.reference import Reference
from irsurvey.anomalies.shape import extreme_spot
from irsurvey.constants import ZERO_CELSIUS
from irsurvey.geometry.polygons import mask
from irsurvey.model import FrameReport, FrameTask

_NODES: Final = 24
"""Temperatures an area is merged to: over 20 K 0.9 K apart, where the curvature of a correction moves a mean by less
than 1 mK (dT'/dT changes by about 1 % over 20 K)."""

Indices = NDArray[np.intp]
Json = dict[str, Any]


@dataclass(frozen=True, slots=True, eq=False)
class Pixels:
    """The maps of a frame that areas are read from: t [K] with NaN, labels of findings, optics; (rows, columns)."""

    t: NDArray[np.float32]
    labels: NDArray[np.uint16]
    optics: NDArray[np.uint8]


def area(pixels: Pixels, rows: Indices, columns: Indices, weights: NDArray[np.float64] | None = None) -> list[Json]:
    """Parts of an area, one for each optics in it: temperatures `t` [K] and the weights `w` (f lists) they carry.

    weights (f, n) of f linear functionals; None: the mean.  The pixels must be measurable."""
    shares = np.full((1, rows.size), 1 / max(rows.size, 1)) if weights is None else weights
    optics = pixels.optics[rows, columns]
    parts = []
    for index in np.unique(optics):
        here = optics == index
        t, merged = _merged(pixels.t[rows, columns][here].astype(np.float64), shares[:, here])
        parts.append({"optics": int(index), "t": _figures(t, 7), "w": [_figures(row, 6) for row in merged]})
    return parts


def whole_and_spot(pixels: Pixels, inside: NDArray[np.bool_], sense: str, spot_pixels: int) -> Json | None:
    """The area of all measurable pixels of a region and that of its measurement spot, each with its centre [px].

    None where no pixel of it can be measured."""
    patch = cropped(inside & np.isfinite(pixels.t))
    spot = extreme_spot(pixels.t, patch, sense, spot_pixels) if patch else None
    if patch is None or spot is None:
        return None
    rows, columns = patch.positions()
    return {
        "whole": area(pixels, rows, columns),
        "whole_at": [float(columns.mean()), float(rows.mean())],
        "spot": area(pixels, spot.rows, spot.columns),
        "spot_at": list(spot.centre),
    }


def reference(pixels: Pixels, frame: FrameReport, task: FrameTask) -> Json | None:
    """Level [K] and plane of the reference area as reported, and the area they come from; None without one."""
    reported = frame.reference
    fitted = None if reported is None else _fitted(pixels, frame, task)
    if reported is None or fitted is None:
        return None
    level = reported.median_c + ZERO_CELSIUS
    is_level = reported.gradient_k == 0
    weights = fitted.weights
    if is_level and fitted.gradient > 0:  # an automatic area with holes, filled here: keep to what was reported
        weights = np.outer([1.0, 0.0, 0.0], np.full(fitted.rows.size, 1 / fitted.rows.size))
    return {
        "level": level,
        "slope": [0.0, 0.0] if is_level else list(fitted.slope),
        "centre": list(fitted.centre),
        "box": list(fitted.box),
        "parts": area(pixels, fitted.rows, fitted.columns, weights),
    }


def _fitted(pixels: Pixels, frame: FrameReport, task: FrameTask) -> Reference | None:
    """The reference area fitted again, as the analysis did it, to the map and the outline that were reported."""
    assert frame.reference is not None
    shape = (pixels.t.shape[0], pixels.t.shape[1])
    drawn = mask(frame.reference.polygon, shape) & np.isfinite(pixels.t)
    if frame.reference.how == "polygon":
        for surface in task.surfaces:
            if surface.role == "ignore":
                drawn &= ~mask(surface.polygon, shape)
    else:  # its outline encloses what lies in it, too
        drawn &= pixels.labels == 0
        for component in frame.components:
            drawn &= ~mask(component.polygon, shape)
    noise = frame.detectable.noise_k if frame.detectable and frame.detectable.noise_k else 0.0
    return references.fit(pixels.t, drawn, noise)


def _merged(t: NDArray[np.float64], weights: NDArray[np.float64]) -> tuple[NDArray[np.float64], NDArray[np.float64]]:
    """At most `_NODES` temperatures and the weights (f, v) they carry: a pixel's are shared by its two neighbours in
    proportion, so that a functional of anything linear between nodes stays exact."""
    distinct, index = np.unique(t, return_inverse=True)
    if distinct.size <= _NODES:
        return distinct, np.stack([np.bincount(index, row, distinct.size) for row in weights])
    nodes = np.linspace(distinct[0], distinct[-1], _NODES)
    place = (t - nodes[0]) / (nodes[1] - nodes[0])
    left = np.minimum(place.astype(np.intp), _NODES - 2)
    right = place - left
    merged = [
        np.bincount(left, row * (1 - right), _NODES) + np.bincount(left + 1, row * right, _NODES) for row in weights
    ]
    return nodes, np.stack(merged)


def _figures(values: NDArray[np.float64], figures: int) -> list[float]:
    return [float(f"{value:.{figures}g}") for value in values]
