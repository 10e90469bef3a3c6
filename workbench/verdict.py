"""Verdict: what a method's rows come to, and what would settle an open one."""

from dataclasses import dataclass

import numpy as np
from scipy.special import ndtr, ndtri

from workbench.criteria import Verdict

HARDLY, AFFORDABLE = 20, 1_000_000
"""An open row that needs more than so many times the replications done, and more than so many in all, will hardly be
settled by more."""


def together(verdicts):
    """The Verdict on all of several rows: one that fails decides, then one that is undecided."""
    verdicts = set(verdicts)
    for verdict in (Verdict.FAILS, Verdict.UNDECIDED):
        if verdict.value in verdicts:
            return verdict
    return Verdict.MEETS


@dataclass(frozen=True)
class Advice:
    """How many more replications would probably settle an open row."""

    more: int | None
    """None where more replications will hardly settle it."""
    within: float
    """How near the limit the rate lies at most, with the table's confidence."""


def advice(rejections, replications, limit, lower, upper, error):
    """The Advice for a row whose interval (lower, upper), of error `error`, reaches across the limit.

    The smallest number of further replications that settles the row with a predictive chance of 0.8: the rate
    after them is normal about the rate so far, and the row is settled when the limit lies more than the
    half-width of the new interval away.
    """
    within = max(upper - limit, limit - lower)
    q = (rejections + 0.5) / (replications + 1)
    ceiling = max(HARDLY * replications, AFFORDABLE)
    if chance(ceiling, q, replications, limit, error) < 0.8:
        return Advice(None, within)
    low, high = 0, ceiling
    while high - low > max(1, high // 1000):
        middle = (low + high) // 2
        low, high = (low, middle) if chance(middle, q, replications, limit, error) >= 0.8 else (middle, high)
    return Advice(high, within)


def chance(more, q, replications, limit, error):
    """Predictive chance that a row with rate q is settled after so many more replications."""
    variance, distance = q * (1 - q), abs(q - limit)
    half_width = -ndtri(error / 2) * np.sqrt(variance / (replications + more))
    moved = np.sqrt(variance * more / (replications * (replications + more)))
    if moved == 0:
        return float(distance > half_width)
    return float(ndtr((distance - half_width) / moved) + ndtr((-distance - half_width) / moved))


def settling_total(limits, margin, replications):
    """Replications in all after which a difference with these limits is probably above 0 or within the margin.

    Limits close in on their middle with the root of the replications. None where even many more would hardly do.
    """
    middle, half = (limits[0] + limits[1]) / 2, (limits[1] - limits[0]) / 2
    rooms = [room for room in (middle, margin - abs(middle)) if room > 0]
    if not rooms:
        return None
    total = int(np.ceil(replications * (half / max(rooms)) ** 2))
    return total if total <= max(HARDLY * replications, AFFORDABLE) else None
