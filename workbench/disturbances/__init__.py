"""Disturbances: what befalls values on the way to the desk, one a file."""

from workbench.disturbances.disturbance import DISTURBANCES, Disturbance

__all__ = ["DISTURBANCES", "Disturbance"]

DISTURBANCES.fill(__name__)
