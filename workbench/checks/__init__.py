"""Checks: tests of assumptions, one a file, with which two-stage rules begin."""

from workbench.checks.check import CHECKS, Check

__all__ = ["CHECKS", "Check"]

CHECKS.fill(__name__)
