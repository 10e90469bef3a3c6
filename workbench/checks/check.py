"""What a check is."""

from abc import ABC
from typing import ClassVar

from workbench.registry import Shelf
from workbench.significance import SignificanceTest

CHECKS = Shelf("check", ready=True)


class Check(SignificanceTest, ABC):
    """A test of an assumption; a two-stage rule goes on by its p-value."""

    hypothesis: ClassVar[str]
    """The assumption that is tested: equal spreads, normality …"""
