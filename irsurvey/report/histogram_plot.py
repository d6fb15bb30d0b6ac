"""How many pixels of a frame have which temperature, with its reference and what counts, as a small drawing."""

from __future__ import annotations

from dataclasses import dataclass
from math import floor, log10
from pathlib import Path

import numpy as np
from numpy.typing import NDArray

from irsurvey import numbers
from irsurvey.model import FrameReport
from irsurvey.numbers import SI, Style
from irsurvey.report.axes import BOTTOM, LEFT, RIGHT, TICKS_ACROSS, TOP, Axis, Tick
from irsurvey.texts import say

_BINS = 64
_LEAST_SPAN_K = 2.0
"""The axis of temperatures never spans less, so that noise does not look like a spread."""
_RAISED = str.maketrans("0123456789", "⁰¹²³⁴⁵⁶⁷⁸⁹")
_FLOOR = -0.25
"""Power of ten at the foot of the axis of pixels: a single one still stands above it."""


@dataclass(frozen=True, slots=True)
class Plot:
    """Two outlines to fill, of all pixels and of those in anomalies, upright lines, and the ticks of both axes."""

    all_: str  # path of an SVG
    found: str
    reference: float | None
    limits: tuple[float, ...]  # from where on a deviation counts
    across: tuple[Tick, ...]
    up: tuple[Tick, ...]
    words: str
    across_unit: str = "°C"


def plot(frame: FrameReport, out: Path, *, style: Style = SI) -> Plot | None:
    """The drawing of a frame whose maps are in OUT/frames; None where there are none, or nothing is measurable."""
    maps = _maps(frame, out)
    if maps is None or not np.isfinite(maps[0]).any():
        return None
    measurable = np.isfinite(maps[0])
    values = maps[0][measurable].astype(np.float64)
    found = values[maps[1][measurable] > 0]
    level = frame.reference.median_c if frame.reference else None
    counts_from = frame.detectable.threshold_k if frame.detectable else None
    limits = () if level is None or counts_from is None else (level - counts_from, level + counts_from)
    x = _across([float(values.min()), float(values.max()), *limits])
    edges = np.linspace(x.low, x.high, _BINS + 1)
    to = numbers.scale("extreme_c", style)
    shown = Axis(to.factor * x.low + to.shift, to.factor * x.high + to.shift, LEFT, RIGHT)
    counts, of_found = (np.histogram(part, edges)[0] for part in (values, found))
    y = Axis(_FLOOR, max(log10(int(counts.max())), 1.0) * 1.04, BOTTOM, TOP)
    return Plot(
        all_=_outline(counts, y),
        found=_outline(of_found, y) if found.size else "",
        reference=None if level is None else x.at(level),
        limits=tuple(x.at(limit) for limit in limits),
        across=shown.ticks(TICKS_ACROSS, style=style),
        up=tuple(Tick(y.at(power), _pixels(power)) for power in range(floor(y.high) + 1)),
        words=_in_words(values, found.size, level, counts_from, style),
        across_unit=to.symbol,
    )


def _maps(frame: FrameReport, out: Path) -> tuple[NDArray[np.float32], NDArray[np.uint16]] | None:
    """Temperatures [°C] and labels of the findings as a run left them; None where a file is missing."""
    import tifffile

    folder = out / "frames" / frame.id
    paths = folder / "temperature.tif", folder / "findings.tif"
    if frame.status == "failed" or not all(path.is_file() for path in paths):
        return None
    temperature, labels = (np.asarray(tifffile.imread(path)) for path in paths)
    return temperature, labels


def _across(shown: list[float]) -> Axis:
    missing = max(0.0, _LEAST_SPAN_K - (max(shown) - min(shown))) / 2
    return Axis(min(shown) - missing, max(shown) + missing, LEFT, RIGHT)


def _outline(counts: NDArray[np.intp], y: Axis) -> str:
    """A path around the columns of a histogram, closed along its foot; empty columns lie on it."""
    width = (RIGHT - LEFT) / _BINS
    tops = [y.at(log10(int(count))) if count else float(BOTTOM) for count in counts]
    steps, last = [f"M{LEFT} {BOTTOM}"], float(BOTTOM)
    for number, top in enumerate(tops):
        if top != last:
            steps.append(f"H{round(LEFT + number * width, 1):g}V{top:g}")
        last = top
    return "".join(steps) + f"H{RIGHT}V{BOTTOM}Z"


def _pixels(power: int) -> str:
    """A power of ten as a tick has room for it."""
    return str(10**power) if power < 4 else f"10{str(power).translate(_RAISED)}"


def _in_words(
    values: NDArray[np.float64], found: int, level: float | None, counts_from: float | None, style: Style
) -> str:
    low, high = (
        numbers.decimals(numbers.converted(float(end), "min_c", style=style), 1, style=style)
        for end in (values.min(), values.max())
    )
    high = numbers.with_unit(high, "max_c", style=style)
    told = [say("histogram_pixels", count=numbers.grouped(values.size), low=low, high=high)]
    told += [say("histogram_found", count=numbers.grouped(found))] if found else []
    if level is not None:
        median = numbers.decimals(numbers.converted(level, "median_c", style=style), 1, style=style)
        told.append(say("histogram_reference", value=numbers.with_unit(median, "median_c", style=style)))
    if counts_from is not None and level is not None:
        told.append(say("histogram_counts", value=numbers.least(counts_from, "threshold_k", style=style)))
    return say("histogram_is", told="; ".join(told))
