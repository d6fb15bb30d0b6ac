"""The picture of what pressure changed: differences of two frames in colour, the changes outlined in one ink."""

from __future__ import annotations

from math import ceil
from typing import TYPE_CHECKING

import cv2
import numpy as np
from numpy.typing import NDArray

from irsurvey import numbers
from irsurvey.model import FrameReport
from irsurvey.numbers import SI, Style
from irsurvey.report import outlines, picture, scale
from irsurvey.report.inks import UNMEASURABLE, palette
from irsurvey.report.labels import Label, change_mark, put
from irsurvey.texts import say

if TYPE_CHECKING:
    from PIL import Image

COLORMAP = "PuOr_r"
"""Diverging, its middle almost white: no change; told apart by colour-blind readers (Brewer & Harrower, 2003)."""
LEAST_SPAN_K = 1.0
"""Either end of a scale is at least this far from nought, so that noise does not look like a change."""


def changed(frame: FrameReport, change: NDArray[np.float32], *, style: Style = SI) -> Image.Image:
    """Differences with pressure minus without [K], NaN where the frames do not overlap, as a palette image.

    Its scale is lettered in the style."""
    end = display_end(change)
    factor = picture.enlargement(change.shape)
    canvas = picture.enlarged(picture.shades(change, -end, end), factor)
    if (canvas == UNMEASURABLE).any():
        picture.hatch(canvas)
    changes = frame.pair.changes if frame.pair else ()
    busy = np.zeros(canvas.shape, dtype=np.int32)
    for one in changes:
        corners = picture.corners(one.polygon, factor)
        cv2.fillPoly(busy, [corners], 1)
        outlines.along_polygon(canvas, corners)
    labels = [
        Label(change_mark(number), picture.box(one.polygon, factor), True, picture.outline(one.polygon, factor))
        for number, one in enumerate(changes[: picture.NUMBERED], 1)
    ]
    put(canvas, labels, busy)
    beyond = bool((change < -end).any()), bool((change > end).any())
    strip = scale.strip(max(canvas.shape[0], scale.LEAST_HEIGHT), -end, end, beyond, unit="K", style=style)
    image = picture.side_by_side(canvas, strip)
    image.putpalette(palette(COLORMAP))
    image.info["Description"] = _in_words(frame, end, style)
    return image


def display_end(change: NDArray[np.float32]) -> float:
    """Either end of the scale [K] from nought: the 99.5th percentile of |change|, rounded up to 0.1 K."""
    finite = np.abs(change[np.isfinite(change)])
    most = float(np.percentile(finite, 99.5)) if finite.size else 0.0
    return max(LEAST_SPAN_K, ceil(most * 10) / 10)


def _in_words(frame: FrameReport, end: float, style: Style) -> str:
    """What the picture shows, for those who cannot see it."""
    with_ = frame.pair.with_ if frame.pair else ""
    changes = frame.pair.changes if frame.pair else ()
    listed = ", ".join(f"{change_mark(n)} ({picture.in_colour(one.sense)})" for n, one in enumerate(changes, 1))
    shown = numbers.converted(end, "change_k", style=style)
    first, last = (numbers.decimals(one, 1, style=style) for one in (-shown, shown))
    drawn = say("change_drawn", listed=listed) if listed else say("change_none")
    unit = numbers.unit("change_k", style=style)
    told = {"low": first, "high": last, "unit": unit, "colours": COLORMAP, "drawn": drawn}
    return say("change_is", before=with_, frame=frame.id, **told)
