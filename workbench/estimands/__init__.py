"""Estimands: what may be compared, one a file; a file added here is found by itself."""

from workbench.estimands.estimand import ESTIMANDS, Estimand

__all__ = ["ESTIMANDS", "Estimand"]

ESTIMANDS.fill(__name__)
