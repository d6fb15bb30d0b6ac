"""Components that nobody has drawn: warm parts found in a frame, with an outline, grouped with their twins."""

from __future__ import annotations

from collections.abc import Collection, Iterator
from dataclasses import replace
from itertools import count
from typing import Final

import numpy as np
from numpy.typing import NDArray

from irsurvey.analysis.correction import Corrected
from irsurvey.analysis.regions import Screened, inspectable, screen, stretch_of
from irsurvey.anomalies.parts import Part, parts
from irsurvey.anomalies.patch import Patch
from irsurvey.geometry.polygons import mask, outline
from irsurvey.model import Component, FrameTask

_LEAST: Final = 1.0
"""Rise above its background [K] from which a part is one [house]: what ANSI/NETA compares begins at 1 K; or five times
the noise, where that is more, as everywhere."""
_LEAST_PIXELS: Final = 9
"""The smallest measurement spot, 3 × 3: what is smaller may be noise."""


def with_found(task: FrameTask, corrected: Corrected) -> FrameTask:
    """The task with the warm parts of its frame as components, where it asks for them; else as it is.

    They carry "found" in their names and groups, no load (so that nothing clears them), and the optics of the surface
    they lie on.  What is drawn counts: a part that overlaps a component of the task is left out.
    """
    if not task.find_components:
        return task
    screened = screen(corrected, task)
    shape = (corrected.t.shape[0], corrected.t.shape[1])
    drawn = np.zeros(shape, np.bool_)
    for component in task.components:
        drawn |= mask(component.polygon, shape)
    found = _with_twins([part for part in _parts(task, corrected, screened) if not part.patch.of(drawn).any()])
    names = _unused({component.name for component in task.components}, (str(k) for k in count(1)))
    letters = _unused({component.group for component in task.components}, (_letters(k) for k in count()))
    groups = dict(zip(dict.fromkeys(part.group for part in found if part.group is not None), letters, strict=False))
    components = tuple(
        _component(part, next(names), None if part.group is None else groups[part.group], corrected) for part in found
    )
    return replace(task, components=(*task.components, *components))


def _parts(task: FrameTask, corrected: Corrected, screened: Screened) -> tuple[Part, ...]:
    """Warm parts against the reference area or, without one, against the median of the frame."""
    open_, blocked = inspectable(corrected, task)
    saturated = corrected.saturated_hot & ~blocked & ~np.isnan(screened.t)
    usable = open_ & ~blocked
    middle = np.float32(np.median(corrected.t[usable])) if usable.any() else np.float32(0)
    delta = screened.t - middle if screened.delta is None else screened.delta
    noise = _noise(corrected, task, screened.noise)
    return parts(
        delta,
        noise,
        usable=usable,
        least=np.maximum(np.float32(_LEAST), 5 * noise),
        min_pixels=_LEAST_PIXELS,
        certain=saturated if saturated.any() else None,
    )


def _noise(corrected: Corrected, task: FrameTask, noise: float) -> NDArray[np.float32]:
    """Noise map [K], amplified where the emissivity is low."""
    stretches = np.array([stretch_of(corrected, task, index) for index in range(len(corrected.optics_names))])
    return np.asarray(noise * np.nan_to_num(stretches / stretches[0], nan=1e3), np.float32)[corrected.optics]


def _with_twins(found: list[Part]) -> list[Part]:
    """The same; what a drawn component took the last twin from stands alone."""
    members = [part.group for part in found]
    return [replace(part, group=None) if members.count(part.group) < 2 else part for part in found]


def _component(part: Part, name: str, group: str | None, corrected: Corrected) -> Component:
    emissivity, reflected = corrected.optics_names[int(np.bincount(part.patch.of(corrected.optics)).argmax())]
    return Component(name, _outline(part.patch), group=group, emissivity=emissivity, reflected=reflected, is_found=True)


def _outline(patch: Patch) -> tuple[tuple[float, float], ...]:
    return tuple((float(x + patch.left), float(y + patch.top)) for x, y in outline(patch.mask))


def _unused(used: Collection[str | None], endings: Iterator[str]) -> Iterator[str]:
    """ "found …" with each ending in turn, but for names that are taken."""
    return (name for ending in endings if (name := f"found {ending}") not in used)


def _letters(number: int) -> str:
    """A … Z, AA, AB …"""
    rest, last = divmod(number, 26)
    return (_letters(rest - 1) if rest else "") + chr(ord("A") + last)
