"""Axes: where values lie in a panel, their ticks and names."""

import math
from dataclasses import dataclass

import numpy as np
from matplotlib.ticker import MaxNLocator

from workbench.report.drawing import fitted

MINUS = "\u2212"


@dataclass(frozen=True)
class Axis:
    """A straight scale from values to pixels, plain or of logarithms."""

    low: float
    high: float
    start: float
    stop: float
    log: bool = False

    def __call__(self, values):
        """Pixels of values; values outside lie on the nearer end."""
        low, high = self.scaled(self.low), self.scaled(self.high)
        share = (self.scaled(np.clip(values, self.low, self.high)) - low) / (high - low)
        return self.start + share * (self.stop - self.start)

    def scaled(self, values):
        """Values as they are, or their logarithms."""
        return np.log(values) if self.log else np.asarray(values, dtype=float)

    def ticks(self, most=5):
        """Round values for ticks, within the axis."""
        if self.log:
            return log_ticks(self.low, self.high, most)
        found = MaxNLocator(nbins=most, steps=[1, 2, 2.5, 3, 5, 10]).tick_values(self.low, self.high)
        slack = 1e-9 * (self.high - self.low)
        return [float(value) for value in found if self.low - slack <= value <= self.high + slack]


def log_ticks(low, high, most):
    """Ticks on a scale of logarithms: 1, 2, 5 in each decade, or fewer where they are too many."""
    decades = range(math.floor(math.log10(low)), math.ceil(math.log10(high)) + 1)
    for steps in ((1, 2, 5), (1, 3), (1,)):
        found = [step * 10.0**decade for decade in decades for step in steps]
        found = [value for value in found if low * 0.999 <= value <= high * 1.001]
        if len(found) <= most + 2:
            break
    return found[:: -(-len(found) // (most + 2))] if found else [low, high]


def plain(value):
    """A tick's number as people read it."""
    return f"{value:g}".replace("-", MINUS)


def bottom_axis(drawing, axis, y, name, ticks=None, shown=plain):
    """The axis below a panel with its ticks and name."""
    drawing.line([(axis.start, y), (axis.stop, y)], "edge")
    ticks = axis.ticks() if ticks is None else ticks
    drawing.lines([[(axis(value), y), (axis(value), y + 4)] for value in ticks], "edge")
    for value in ticks:
        drawing.text(axis(value), y + 15, shown(value), size=9.5, anchor="middle")
    middle = (axis.start + axis.stop) / 2
    room = 2 * min(middle, drawing.width - middle)
    drawing.text(middle, y + 30, fitted(name, room, 10.5), size=10.5, anchor="middle")


def left_axis(drawing, axis, x, ticks=None, shown=plain):
    """The axis left of a panel with its ticks."""
    drawing.line([(x, axis.start), (x, axis.stop)], "edge")
    ticks = axis.ticks() if ticks is None else ticks
    drawing.lines([[(x, axis(value)), (x - 4, axis(value))] for value in ticks], "edge")
    for value in ticks:
        drawing.text(x - 7, axis(value) + 3.5, shown(value), size=9.5, anchor="end")


def pushed_apart(wanted, gap, low, high):
    """Places near the wanted ones, at least `gap` apart, between low and high, in the same order."""
    order = np.argsort(wanted, kind="stable")
    places = np.array(wanted, dtype=float)[order]
    for _ in range(200):
        places = np.clip(places, low, high)
        close = np.diff(places) < gap - 1e-6
        if not close.any():
            break
        for at in np.flatnonzero(close):
            lack = (gap - (places[at + 1] - places[at])) / 2
            places[at] -= lack
            places[at + 1] += lack
    found = np.empty(len(places))
    found[order] = places
    return found
