"""The palette of an annotated picture: temperatures first, the inks of lines and lettering behind them."""

from __future__ import annotations

from functools import cache, lru_cache
from math import ceil
from pathlib import Path
from typing import TYPE_CHECKING

import numpy as np
from numpy.typing import NDArray

if TYPE_CHECKING:
    from PIL import ImageFont

Pixels = NDArray[np.uint8]

COLORMAP = "cividis"
"""Perceptually uniform and the same to colour-blind readers (Nuñez, Anderton & Renslow, 2018)."""

LEVELS = 247
"""Palette entries 0…246 hold temperatures, the coldest first."""
UNMEASURABLE = 247
LIGHT = 248
DARK = 255
"""Entries 248…255 run from the light to the dark ink; those between soften the edges of letters."""

_UNMEASURABLE_RGB = (206, 206, 206)
_LIGHT_RGB = (255, 255, 255)
_DARK_RGB = (18, 24, 33)


@cache
def palette(colormap: str) -> bytes:
    """The 256 colours as bytes R, G, B, …; `colormap` is a name that matplotlib knows."""
    from matplotlib import colormaps

    temperatures = np.rint(colormaps[colormap](np.linspace(0, 1, LEVELS))[:, :3] * 255)
    lettering = np.rint(np.linspace(_LIGHT_RGB, _DARK_RGB, DARK - LIGHT + 1))
    return np.vstack([temperatures, [_UNMEASURABLE_RGB], lettering]).astype(np.uint8).tobytes()


@lru_cache(maxsize=1024)
def lettering(text: str, size: int, *, dark_on_light: bool = True) -> Pixels:
    """A line of text as a block of ink numbers, shape (rows, columns), trimmed to the height of its letters."""
    from PIL import Image, ImageDraw

    font = _font(size)
    image = Image.new("L", (ceil(font.getlength(text)), 2 * size))
    ImageDraw.Draw(image).text((0, size // 2), text, fill=255, font=font)
    coverage = np.asarray(image)
    inked = np.flatnonzero(coverage.any(axis=1))
    coverage = coverage[inked[0] : inked[-1] + 1] if inked.size else coverage[:0]  # the dot of an i stays off its stem
    step = np.rint(coverage * ((DARK - LIGHT) / 255)).astype(np.uint8)
    return LIGHT + step if dark_on_light else DARK - step


@cache
def _font(size: int) -> ImageFont.FreeTypeFont:
    """The sans-serif font that matplotlib ships."""
    import matplotlib
    from PIL import ImageFont

    path = Path(matplotlib.get_data_path()) / "fonts" / "ttf" / "DejaVuSans.ttf"
    return ImageFont.truetype(path, size, layout_engine=ImageFont.Layout.BASIC)
