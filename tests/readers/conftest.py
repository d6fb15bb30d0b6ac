"""Reading a file with its options written as keywords, and the fault of one that cannot be read."""

from __future__ import annotations

from collections.abc import Callable
from pathlib import Path
from typing import Any

import pytest

from irsurvey.errors import Fault, FrameError
from irsurvey.model.frame import Frame
from irsurvey.model.survey import ReadOptions
from irsurvey.readers import read


@pytest.fixture(scope="session")
def frame_of() -> Callable[..., Frame]:
    def frame_of(path: Path, **options: Any) -> Frame:
        return read(path, ReadOptions(**options))

    return frame_of


@pytest.fixture(scope="session")
def fault_of() -> Callable[..., Fault]:
    """The one fault, whose every part is filled in and which names the file without its folder."""

    def fault_of(path: Path, pixel_limit: int = 100_000_000, **options: Any) -> Fault:
        with pytest.raises(FrameError) as caught:
            read(path, ReadOptions(**options), pixel_limit=pixel_limit)
        (fault,) = caught.value.faults
        assert fault.where == path.name
        assert fault.expected
        assert fault.got
        assert fault.remedy
        assert str(path.parent) not in str(fault)
        assert "\n" not in str(fault)
        return fault

    return fault_of
