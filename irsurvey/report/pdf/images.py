"""Pictures as the paper carries them: small enough to send, sharp enough to print."""

from __future__ import annotations

import io
from base64 import b64decode
from dataclasses import dataclass

from irsurvey.report.pictures import Picture

_AS_IT_IS = 160_000
"""Bytes of a picture of few colours that is embedded as it is: crisp lines, and 100 of them are 16 MB."""
_LONGER_SIDE = 1000
"""Pixels of a larger one, about 240 to the inch at the width of a sheet's picture."""
_QUALITY = 85  # with full colour resolution, or outlines would blur: 50 to 200 kB


@dataclass(frozen=True, slots=True)
class Image:
    """The bytes of a PNG or JPEG, and its height over its width."""

    data: bytes
    slope: float

    def size(self, width: float, most: float = 1e9) -> tuple[float, float]:
        """Width and height [mm] at that width, or less where it would be higher than `most`."""
        width = min(width, most / self.slope)
        return width, width * self.slope


def image(picture: Picture | None) -> Image | None:
    """A picture of the report; None where there is none."""
    if picture is None:
        return None
    data = b64decode(picture.uri.partition(",")[2])
    slope = picture.height / picture.width
    return Image(data if len(data) <= _AS_IT_IS else _reduced(data), slope)


def _reduced(data: bytes) -> bytes:
    """As a JPEG with no more pixels than its place can show."""
    from PIL import Image as Pillow

    with Pillow.open(io.BytesIO(data)) as opened:
        drawn = opened.convert("RGB")
    drawn.thumbnail((_LONGER_SIDE, _LONGER_SIDE), Pillow.Resampling.LANCZOS)
    stream = io.BytesIO()
    drawn.save(stream, "JPEG", quality=_QUALITY, subsampling=0)
    return stream.getvalue()
