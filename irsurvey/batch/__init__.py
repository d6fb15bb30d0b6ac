"""Many frames: one module-level function over frozen, picklable jobs, one process or several."""

from __future__ import annotations

from irsurvey.batch.execute import execute

__all__ = ["execute"]
