"""Methods: the competing tests, one a file; a file added here is found by itself."""

from workbench.methods.method import METHODS, Method

__all__ = ["METHODS", "Method"]

METHODS.fill(__name__)
