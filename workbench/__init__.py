"""Workbench: choose the test for comparing several groups before the data come, and prove the choice."""

from importlib import import_module

__all__ = ["Result", "Study", "StudyError", "checks", "methods", "read", "shapes"]

SHELVES = ("checks", "methods", "shapes")


def __getattr__(name):
    """Fetch a name of the Python interface on first use, so that importing the package is fast."""
    if name in SHELVES:
        return import_module(f"workbench.{name}")
    if name not in __all__:
        raise AttributeError(f"module 'workbench' has no attribute '{name}'")
    return getattr(import_module("workbench.front"), name)
