"""What an estimand is."""

from abc import ABC, abstractmethod
from typing import ClassVar

from workbench.registry import Part, Shelf

ESTIMANDS = Shelf("estimand")


class Estimand(Part, ABC):
    """The quantity of a group that the null hypothesis says is equal in all groups."""

    quantity: ClassVar[str]
    """Its name among a population's true quantities."""

    @abstractmethod
    def additive(self, shape):
        """The quantity of the shape itself, which is put at zero on the additive scale; NaN: there is none."""

    @abstractmethod
    def multiplicative(self, shape, spread):
        """The quantity of exp(spread * value), which is put at one; NaN or infinite: there is none."""
