"""Group means and variances of many datasets at once."""

from dataclasses import dataclass
from functools import lru_cache

import numpy as np


@lru_cache(maxsize=1024)
def group_places(sizes):
    """The slices of a dataset's places that belong to each group."""
    ends = np.cumsum(sizes).tolist()
    return [slice(end - size, end) for end, size in zip(ends, sizes, strict=True)]


@dataclass(frozen=True)
class Moments:
    """What tests ask of the groups of R datasets."""

    sizes: np.ndarray
    """(R, k), or (1, k) where nothing is missing in any dataset."""
    means: np.ndarray
    """(R, k), measured from the origin."""
    variances: np.ndarray
    """(R, k), divisor n - 1; NaN where a group has fewer than two values, exactly 0 where they are all equal."""
    origin: np.ndarray
    """(R, 1), one value of each dataset."""


def moments_of(columns, sizes):
    """The Moments of (N, R) values in groups.

    Two passes about the mean (Chan, Golub & LeVeque 1983, The American Statistician 37, 242-247). A group of equal
    values must come out with variance exactly 0, and the mean of 0.1, 0.1, 0.1 is not 0.1; and far from zero a mean
    loses digits. So values are measured from the first of their group, and means from the first of the dataset.
    """
    places = group_places(sizes)
    means, squares = np.empty((2, len(sizes), columns.shape[1]))
    for group, place in enumerate(places):
        group_moments(columns[place], means[group], squares[group])
    if np.isnan(means).any():
        return gappy_moments(columns, places)
    for group, place in enumerate(places[1:], start=1):
        means[group] += columns[place.start] - columns[0]
    numbers = np.array([sizes], dtype=float)
    return Moments(numbers, means.T, squares.T / (numbers - 1), columns[0][:, None])


def group_moments(members, means, squares):
    """Write the (R,) means, from the first value, and (R,) sums of squares of (n, R) values into the given arrays."""
    away = members - members[0]
    np.add.reduce(away, axis=0, out=means)
    means /= len(members)
    away -= means
    np.multiply(away, away, out=away)
    np.add.reduce(away, axis=0, out=squares)


def gappy_moments(columns, places):
    """The Moments where values may be missing; a group without values has no mean."""
    start = first_values(columns)
    parts = [gappy_group(columns[place], start) for place in places]
    return Moments(*(np.stack(rows, axis=1) for rows in zip(*parts, strict=True)), start[:, None])


def gappy_group(members, start):
    """((R,) sizes, means from the start, variances) of (n, R) values of one group, of which some are NaN."""
    present = ~np.isnan(members)
    sizes = present.sum(axis=0).astype(float)
    firsts = first_values(members)
    away = np.where(present, members - firsts, 0.0)
    means = away.sum(axis=0) / sizes
    squares = (np.where(present, away - means, 0.0) ** 2).sum(axis=0)
    return sizes, firsts - start + means, np.where(sizes > 1, squares / np.maximum(sizes - 1, 1), np.nan)


def first_values(members):
    """(R,) first value present in each column of (n, R) values; NaN where there is none."""
    if not np.isnan(members[0]).any():
        return members[0]
    return members[np.argmax(~np.isnan(members), axis=0), np.arange(members.shape[1])]


def deviations_of(columns, sizes):
    """(N, R) values less the means of their groups: exactly 0 in a constant group, NaN where one is missing."""
    away = [columns[place] - first_values(columns[place]) for place in group_places(sizes)]
    return np.concatenate(
        [group - np.nansum(group, axis=0) / (~np.isnan(group)).sum(axis=0) for group in away]
    )
