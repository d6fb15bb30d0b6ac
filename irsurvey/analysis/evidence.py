"""All that the records of one frame are made from."""

from __future__ import annotations

from collections.abc import Mapping
from dataclasses import dataclass

from irsurvey.analysis.correction import Corrected
from irsurvey.analysis.pairs import Paired
from irsurvey.analysis.planning import Planned
from irsurvey.analysis.propagation import Propagated
from irsurvey.analysis.regions import Screened
from irsurvey.assess.criteria import Criterion
from irsurvey.constants import ZERO_CELSIUS
from irsurvey.model import Estimate, FrameTask, Input


@dataclass(frozen=True, slots=True, eq=False)
class Evidence:
    """A frame, step by step: corrected, screened, planned, its numbers, and what they are judged by."""

    task: FrameTask
    corrected: Corrected
    screened: Screened
    planned: Planned
    numbers: Propagated
    inputs: Mapping[str, Input]
    criteria: tuple[Criterion, ...]
    claim: tuple[str, str] = ("quantitative", "")  # what the frame may claim, and why
    paired: Paired | None = None  # compared with the same view without pressure

    @property
    def is_valid(self) -> bool:
        """Whether anything may be claimed at all."""
        return self.claim[0] != "not valid"


def celsius(estimate: Estimate | None) -> Estimate | None:
    """A temperature [K] as one in °C."""
    if estimate is None:
        return None
    interval = estimate.interval_95
    shifted = None if interval is None else (interval[0] - ZERO_CELSIUS, interval[1] - ZERO_CELSIUS)
    return Estimate(estimate.value - ZERO_CELSIUS, estimate.u, shifted)
