"""Propagation of the uncertainty of a scene through any model of it."""

from __future__ import annotations

from irsurvey.uncertainty.propagate import Budget, propagate

__all__ = ["Budget", "propagate"]
