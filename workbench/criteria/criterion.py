"""What a criterion is."""

from abc import ABC, abstractmethod
from enum import Enum
from typing import ClassVar

from workbench.registry import Part, Shelf

CRITERIA = Shelf("criterion")


class Verdict(Enum):
    """The position of an interval against the limits of a band."""

    MEETS = "meets"
    FAILS = "fails"
    UNDECIDED = "undecided"


class Criterion(Part, ABC):
    """Limits between which a rate must lie."""

    reading: ClassVar[str]
    """The reading of the table that is judged: error or detection."""

    @abstractmethod
    def band(self, level):
        """(lowest, highest) acceptable rate of tests done at the given level."""

    @abstractmethod
    def applies(self, condition):
        """Whether a condition is judged by this criterion."""

    def verdict(self, lower, upper, level):
        """The Verdict on a rate known to lie from lower to upper."""
        lowest, highest = self.band(level)
        if lowest <= lower and upper <= highest:
            return Verdict.MEETS
        if lower > highest or upper < lowest:
            return Verdict.FAILS
        return Verdict.UNDECIDED
