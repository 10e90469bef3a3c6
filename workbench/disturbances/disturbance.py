"""What a disturbance is."""

from abc import ABC, abstractmethod

from workbench.registry import Part, Shelf

DISTURBANCES = Shelf("disturbance")


class Disturbance(Part, ABC):
    """Something that happens to values after they arise."""

    @abstractmethod
    def apply(self, columns, sizes, rng):
        """(N, R) values as recorded of (N, R) values, which are left alone; NaN where one is lost.

        Sizes are those of the k groups, whose rows follow one another; rng is the disturbance's own generator.
        """

    @abstractmethod
    def recorded(self, population):
        """The Population of recorded values, given that of the values before."""
