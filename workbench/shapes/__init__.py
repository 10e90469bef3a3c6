"""Shapes: populations in standard form, one a file; a file added here is found by itself."""

from workbench.shapes.shape import SHAPES, Shape

__all__ = ["SHAPES", "Shape"]

SHAPES.fill(__name__)
