"""Criteria: what a measure must satisfy, one a file; a file added here is found by itself."""

from workbench.criteria.criterion import CRITERIA, Criterion, Verdict

__all__ = ["CRITERIA", "Criterion", "Verdict"]

CRITERIA.fill(__name__)
