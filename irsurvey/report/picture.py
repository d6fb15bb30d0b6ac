"""The annotated picture of a frame: temperatures in colour, findings, components and reference in one ink."""

from __future__ import annotations

from io import BytesIO
from math import ceil, floor
from pathlib import Path
from typing import TYPE_CHECKING, Any

import cv2
import numpy as np
from numpy.typing import NDArray

from irsurvey import numbers
from irsurvey.model import FrameReport, Maps
from irsurvey.numbers import SI, Style
from irsurvey.report import outlines, scale
from irsurvey.report.inks import COLORMAP, DARK, LEVELS, LIGHT, UNMEASURABLE, Pixels, palette
from irsurvey.report.labels import Box, Label, Point, component_mark, put, strip_mark
from irsurvey.report.ranking import foremost
from irsurvey.texts import say

if TYPE_CHECKING:
    from PIL import Image

Temperatures = NDArray[np.float32]

LEGIBLE_SIDE = 560
"""A picture whose longer side has fewer pixels is enlarged by a whole factor until it has them."""
MINIMUM_SPAN_K = 2.0
"""A colour scale never spans less, so that noise does not look like a pattern."""
NUMBERED = 30
"""Findings that get a number, the foremost ones: more would hide the picture and stand far from what they name."""
_SAMPLE = 20_000  # pixels that give the display range; its percentiles need no more
_HATCH = 8  # pixels between two lines of the hatching
_CLEARANCE = 2  # pixels between an extreme and a tag
_EXTREME_COST = 100_000  # of hiding an extreme: more than any number of outlined pixels


def annotated(frame: FrameReport, maps: Maps, *, colormap: str = COLORMAP, style: Style = SI) -> Image.Image:
    """The picture as a palette image (mode "P"): temperatures are entries below `LEVELS`, everything drawn is above.

    Each pixel of the frame is a square of whole pixels.  Outlines run just outside a finding; neither they
    nor the numbers cover the hottest or the coldest pixel of the frame, of a finding or of a component.
    Its scale is lettered in the style; what the picture shows is said in words in `info["Description"]`."""
    temperature = maps.temperature_c
    low, high = display_range(temperature, maps.labels)
    factor = enlargement(temperature.shape)
    plain = enlarged(shades(temperature, low, high), factor)
    if (plain == UNMEASURABLE).any():
        hatch(plain)
    canvas = plain.copy()
    extremes = _extremes(frame, maps)
    _draw(canvas, frame, maps, factor=factor, extremes=extremes)
    for x, y in extremes:
        square = slice(y * factor, (y + 1) * factor), slice(x * factor, (x + 1) * factor)
        canvas[square] = plain[square]
    beyond = bool((temperature < low).any()), bool((temperature > high).any())
    height = max(canvas.shape[0], scale.LEAST_HEIGHT)
    image = side_by_side(canvas, scale.strip(height, low, high, beyond, style=style))
    image.putpalette(palette(colormap))
    image.info["Description"] = _in_words(frame, low, high, colormap, style)
    return image


def save(image: Image.Image, path: Path | BytesIO) -> None:
    """Write the picture as PNG, its description with it.

    Level 1: half the time of the usual level for the same size, because noise hardly compresses."""
    from PIL.PngImagePlugin import PngInfo

    words = PngInfo()
    words.add_itxt("Description", str(image.info["Description"]))
    image.save(path, format="PNG", compress_level=1, pnginfo=words)


def display_range(temperature: Temperatures, labels: NDArray[np.uint16]) -> tuple[float, float]:
    """Ends of the colour scale [°C]: the 1st to 99.5th percentile of the frame, widened to the findings' 2nd to 98th.

    Rounded outwards to 0.1 °C, never narrower than `MINIMUM_SPAN_K`; NaN where nothing is measurable."""
    ends = [
        np.percentile(finite[:: max(1, finite.size // _SAMPLE)], percentiles)
        for values, percentiles in ((temperature, (1, 99.5)), (temperature[labels > 0], (2, 98)))
        if (finite := values[np.isfinite(values)]).size
    ]
    if not ends:
        return np.nan, np.nan
    low, high = float(min(end[0] for end in ends)), float(max(end[1] for end in ends))
    missing = max(0.0, MINIMUM_SPAN_K - (high - low)) / 2
    return floor((low - missing) * 10) / 10, ceil((high + missing) * 10) / 10


def shades(temperature: Temperatures, low: float, high: float) -> Pixels:
    """Palette entry of each temperature: 0 at `low` and below, `LEVELS` − 1 at `high` and above, its own where NaN."""
    measurable = np.isfinite(temperature)
    if not measurable.any():
        return np.full(temperature.shape, UNMEASURABLE, dtype=np.uint8)
    level = (temperature - np.float32(low)) * np.float32((LEVELS - 1) / (high - low))
    np.clip(level, 0, LEVELS - 1, out=level)
    level[~measurable] = UNMEASURABLE
    return np.asarray(np.rint(level), dtype=np.uint8)


def enlargement(shape: tuple[int, ...]) -> int:
    """Whole factor that makes a small frame legible; 1 for one that is large enough."""
    return ceil(LEGIBLE_SIDE / max(shape))


def in_colour(sense: str) -> str:
    """What is said of a colour: hot or cold."""
    return say("picture_cold" if sense == "cold" else "picture_hot")


def _draw(canvas: Pixels, frame: FrameReport, maps: Maps, *, factor: int, extremes: list[Point]) -> None:
    """Outlines of the reference, the findings and the components, then the tags that name them."""
    regions = enlarged(maps.labels, factor)
    polygons = [corners(component.polygon, factor) for component in frame.components]
    outlines.dashed(canvas, enlarged(maps.reference.astype(np.uint8), factor))
    outlines.around_regions(canvas, regions)
    for polygon in polygons:
        outlines.along_polygon(canvas, polygon)
    for strip in frame.strips:
        outlines.along_line(canvas, corners((strip.from_, strip.to), factor))

    busy = ((regions > 0) | (canvas >= LEVELS)).astype(np.int32)
    for polygon in polygons:
        cv2.fillPoly(busy, [polygon], 1)
    for x, y in extremes:
        left, top = max(0, x * factor - _CLEARANCE), max(0, y * factor - _CLEARANCE)
        busy[top : (y + 1) * factor + _CLEARANCE, left : (x + 1) * factor + _CLEARANCE] = _EXTREME_COST
    put(canvas, _labels(frame, factor), busy)


def side_by_side(canvas: Pixels, strip: Pixels) -> Image.Image:
    from PIL import Image

    rows, columns = canvas.shape
    sheet = np.full((strip.shape[0], columns + strip.shape[1]), LIGHT, dtype=np.uint8)
    sheet[:rows, :columns] = canvas
    sheet[:, columns:] = strip
    return Image.frombytes("P", (sheet.shape[1], sheet.shape[0]), sheet.tobytes())


def enlarged(array: NDArray[Any], factor: int) -> NDArray[Any]:
    return array if factor == 1 else array.repeat(factor, axis=0).repeat(factor, axis=1)


def hatch(picture: Pixels) -> None:
    """Diagonal lines over what could not be measured, so that it is not taken for a temperature."""
    rows, columns = np.nonzero(picture == UNMEASURABLE)
    lines = (rows + columns) % _HATCH == 0
    picture[rows[lines], columns[lines]] = (LIGHT + DARK) // 2


def _labels(frame: FrameReport, factor: int) -> list[Label]:
    """The foremost findings by number, dark on light; components by letter, strips by Roman number, light on dark."""
    findings = [
        Label(str(finding.label), box(finding.polygon, factor), True, outline(finding.polygon, factor))
        for finding in foremost(frame, NUMBERED)
    ]
    components = [
        Label(component_mark(number), box(component.polygon, factor), False, outline(component.polygon, factor))
        for number, component in enumerate(frame.components, 1)
    ]
    strips = [
        Label(strip_mark(number), box(ends := (strip.from_, strip.to), factor), False, outline(ends, factor))
        for number, strip in enumerate(frame.strips, 1)
    ]
    return components + strips + findings


def _extremes(frame: FrameReport, maps: Maps) -> list[Point]:
    """Pixels (x, y) that stay visible: hottest and coldest of the frame, of each finding and of each component."""
    finite = np.isfinite(maps.temperature_c).astype(np.uint8)
    points = _ends(maps.temperature_c, finite, (0, 0))
    for finding in frame.findings:
        window, corner = _window(finding.polygon, finite.shape)
        points += _ends(maps.temperature_c[window], finite[window] * (maps.labels[window] == finding.label), corner)
        x, y = finding.shape.extreme_at
        points.append((round(x), round(y)))
    for component in frame.components:
        inside = np.zeros_like(finite)
        cv2.fillPoly(inside, [corners(component.polygon, 1)], 1)
        window, corner = _window(component.polygon, finite.shape)
        points += _ends(maps.temperature_c[window], finite[window] * inside[window], corner)
    return list(dict.fromkeys(points))


def _ends(temperature: Temperatures, where: NDArray[Any], corner: Point) -> list[Point]:
    if not where.any():
        return []
    _, _, coldest, hottest = cv2.minMaxLoc(temperature, where.astype(np.uint8))
    return [(x + corner[0], y + corner[1]) for x, y in (coldest, hottest)]


def _window(polygon: tuple[tuple[float, float], ...], shape: tuple[int, ...]) -> tuple[tuple[slice, slice], Point]:
    """The part of a frame around a polygon, and its left top pixel."""
    left, top, right, bottom = box(polygon, 1)
    left, top = min(max(left, 0), shape[1] - 1), min(max(top, 0), shape[0] - 1)
    return (slice(top, max(bottom, top + 1)), slice(left, max(right, left + 1))), (left, top)


def box(polygon: tuple[tuple[float, float], ...], factor: int) -> Box:
    """The pixels of an enlarged picture that a polygon and its outline reach."""
    xs, ys = [x for x, _ in polygon], [y for _, y in polygon]
    return floor(min(xs)) * factor, floor(min(ys)) * factor, (ceil(max(xs)) + 1) * factor, (ceil(max(ys)) + 1) * factor


def corners(polygon: tuple[tuple[float, float], ...], factor: int) -> NDArray[np.int32]:
    """Corner points in pixels of the enlarged picture; pixel centres are integers in both."""
    return np.rint((np.asarray(polygon) + 0.5) * factor - 0.5).astype(np.int32)


def outline(polygon: tuple[tuple[float, float], ...], factor: int) -> tuple[Point, ...]:
    """The same corners as plain numbers."""
    return tuple((int(x), int(y)) for x, y in corners(polygon, factor))


def _in_words(frame: FrameReport, low: float, high: float, colormap: str, style: Style) -> str:
    """What the picture shows, for those who cannot see it."""
    findings = ", ".join(f"{finding.label} ({in_colour(finding.sense)})" for finding in frame.findings)
    components = ", ".join(f"{component_mark(n)} ({c.name[:40]})" for n, c in enumerate(frame.components, 1))
    drawn = [say("picture_findings", listed=findings) if findings else say("picture_no_findings")]
    drawn += [say("picture_components", listed=components)] if components else []
    strips = ", ".join(f"{strip_mark(n)} ({strip.name[:40]})" for n, strip in enumerate(frame.strips, 1))
    drawn += [say("picture_strips", listed=strips)] if strips else []
    drawn += [say("picture_reference")] if frame.reference else []
    low, high = (numbers.converted(end, "min_c", style=style) for end in (low, high))
    first, last = (numbers.decimals(end, 1, style=style) for end in (low, high))
    unit = numbers.unit("min_c", style=style)
    told = {"low": first, "high": last, "unit": unit, "colours": colormap, "drawn": "; ".join(drawn)}
    return say("picture_is", frame=frame.id, **told)
