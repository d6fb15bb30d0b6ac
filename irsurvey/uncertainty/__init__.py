"""Propagation of the uncertainty of a scene through any model of it."""

from __future__ import annotations

from irsurvey.uncertainty.joint import correlation_matrix
from irsurvey.uncertainty.monte_carlo import Drawn, differ, monte_carlo
from irsurvey.uncertainty.propagate import Budget, Term, propagate

__all__ = ["Budget", "Drawn", "Term", "correlation_matrix", "differ", "monte_carlo", "propagate"]
