"""What a method is."""

from abc import ABC
from typing import ClassVar

from workbench.registry import Shelf
from workbench.significance import SignificanceTest

METHODS = Shelf("method", ready=True)


class Method(SignificanceTest, ABC):
    """A test of equality of k groups."""

    label: ClassVar[str]
    """What sentences call the method: "use the …"."""
    short: ClassVar[str]
    """What figures call it where space is short: "Welch"."""
    hypothesis: ClassVar[str]
    """What the method tests, in the words of `compare`: means, distributions …"""
