"""Mechanism: what turns a setting and a difference into datasets."""

from functools import lru_cache

import numpy as np

from workbench.groups import Batch
from workbench.keys import content_key
from workbench.population import Additive, Multiplicative

VERSION = 1
"""Raised by whoever changes the numbers drawn."""


@lru_cache(maxsize=1024)
def stream_key(setting):
    """Content key of the data streams of a setting, given its key."""
    return content_key([setting, VERSION])


def draw(setting, rng, replications):
    """A Batch of data before difference and disturbance, with the quantity compared not yet put in place."""
    standard = Batch.of_columns(standard_columns(setting, rng, replications), setting.sizes)
    spread_out = standard.scaled(setting.spreads)
    if setting.scale == "additive":
        return spread_out
    return Batch.of_columns(np.exp(spread_out.columns), setting.sizes)


def standard_columns(setting, rng, replications):
    """(N, R) values of the standard shapes."""
    drawn = [
        shape.draw(rng, (stop - start, replications))
        for start, stop, shape in runs(setting.sizes, setting.shapes)
    ]
    return drawn[0] if len(drawn) == 1 else np.concatenate(drawn)


def runs(sizes, values):
    """[(first row, row behind the last, value)], neighbouring groups of equal value taken together."""
    found = []
    start = 0
    for size, value in zip(sizes, values, strict=True):
        if found and found[-1][2] == value:
            found[-1] = (found[-1][0], start + size, value)
        else:
            found.append((start, start + size, value))
        start += size
    return found


def recorded(setting, base, difference, rngs):
    """The Batch as it reaches the desk: base with its locations and the difference, after all disturbances."""
    batch = located(setting, base, difference)
    if not setting.disturbances:
        return batch
    columns = batch.columns
    for disturbance, rng in zip(setting.disturbances, rngs, strict=True):
        columns = disturbance.apply(columns, setting.sizes, rng)
    return Batch.of_columns(columns, setting.sizes)


def located(setting, base, difference):
    """Base data moved so that the compared quantity of group i is centre + (or times) difference i."""
    where = locations(setting, difference)
    if setting.scale == "additive":
        return base.shifted(where)
    return Batch.of_columns(base.columns * np.repeat(where, setting.sizes)[:, None], setting.sizes)


def locations(setting, difference):
    """(k,) what is added to spread * shape, or multiplied onto exp(spread * shape), in each group."""
    estimand = setting.estimand
    shapes, spreads = setting.shapes, setting.spreads
    if setting.scale == "additive":
        aligned = [spread * estimand.additive(shape) for shape, spread in zip(shapes, spreads, strict=True)]
        return setting.centre + np.array(difference) - np.array(aligned)
    aligned = [estimand.multiplicative(shape, spread) for shape, spread in zip(shapes, spreads, strict=True)]
    return setting.centre * np.array(difference) / np.array(aligned)


def populations(setting, difference):
    """The k Populations of a condition before any disturbance."""
    kind = Additive if setting.scale == "additive" else Multiplicative
    where = locations(setting, difference)
    return [
        kind(shape, float(location), spread)
        for shape, location, spread in zip(setting.shapes, where, setting.spreads, strict=True)
    ]


def recorded_populations(setting, difference):
    """The k Populations of a condition as recorded."""
    found = populations(setting, difference)
    for disturbance in setting.disturbances:
        found = [disturbance.recorded(population) for population in found]
    return found
