"""What a pair of frames, with and without pressure, may be said to show: leaks, construction, or neither."""

from __future__ import annotations

from dataclasses import dataclass

from irsurvey.analysis.pairs import LEAST_AIR_DIFFERENCE
from irsurvey.model import FrameReport, FrameTask, PairReport

_CUE = "changed_with_pressure"


@dataclass(frozen=True, slots=True)
class Told:
    """Findings by id, and how a leak would show at this pressure on the side seen.

    `construction`: a leak would have shown, and pressure did not change them.  `open`: neither can be said.
    `leak` is "hot" or "cold", what air that comes through makes the surface; "" where it leaves no trace; None where
    the side seen or the air temperatures are not known.
    """

    construction: tuple[str, ...]
    open: tuple[str, ...]
    leak: str | None

    def is_leak(self, sense: str) -> bool:
        """Whether a change of that sense is what air leakage would make."""
        return self.leak == sense


def told(frame: FrameReport, task: FrameTask | None) -> Told:
    """What the pair of a frame shows of its findings; nothing without one that was accepted."""
    if frame.pair is None or not frame.pair.accepted:
        return Told((), (), None)
    changed = {change.finding for change in frame.pair.changes}
    rest = [finding for finding in frame.findings if finding.pressure_change_k and finding.id not in changed]
    built = [one.id for one in rest if one.indication and one.indication.evidence.get(_CUE) == 0]
    return Told(tuple(built), tuple(one.id for one in rest if one.id not in built), leak_sense(frame, task))


def leak_sense(frame: FrameReport, task: FrameTask | None) -> str | None:
    """What air that the pressure drives through a leak makes the surface seen: "cold", "hot", "" or None as in `Told`.

    Air of the other side has to come through towards the side seen: from inside at lower pressure inside, from outside
    at higher; and be of another temperature."""
    airs = [frame.inputs.get(f"{side}_air_c") for side in ("indoor", "outdoor")]
    if frame.pair is None or task is None or task.viewed_from is None or not all(airs):
        return None
    indoor, outdoor = (air.value for air in airs if air)
    if not _comes_through(frame.pair, task.viewed_from) or abs(indoor - outdoor) < LEAST_AIR_DIFFERENCE:
        return ""
    return "cold" if (outdoor < indoor) == (task.viewed_from == "inside") else "hot"


def _comes_through(pair: PairReport, viewed_from: str) -> bool:
    return pair.pressure_pa < 0 if viewed_from == "inside" else pair.pressure_pa > 0
