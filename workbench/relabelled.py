"""Relabelled: how often a statistic of freely permuted datasets reaches the one observed."""

import numpy as np

CLOSE = 1e-12
"""A permuted statistic so near the observed one, relatively, is the same: sums of equal terms differ in rounding."""

ROWS = 64
"""Datasets worked on at a time, so that their sums stay near the processor."""


def share_reaching(values, sizes, statistic, permutations, rng):
    """(R,) p-values (1 + number of permuted statistics that reach the observed one) / (permutations + 1).

    Phipson & Smyth 2010, Statistical Applications in Genetics and Molecular Biology 9(1), 39. values (R, N) hold the
    groups side by side, sizes (R, k) or (1, k) say how many of each are present, NaN being absent. All datasets see
    the same relabellings, but each after a shuffle of its own, which makes its permutations its own. The statistic
    is a function of (sums, squares, sizes), groups along the first axis, larger where they differ more; squares()
    gives the sums of squares and costs nothing where it is not called. A statistic that is NaN for permuted data
    counts as reached; where it is NaN for the data themselves, p is NaN.
    """
    p = np.full(len(values), np.nan)
    present = np.broadcast_to(sizes, (len(values), np.shape(sizes)[1])).astype(int)
    for pattern in np.unique(present, axis=0):
        rows = np.flatnonzero((present == pattern).all(axis=1))
        if (pattern > 0).all():
            kept = values[rows]
            kept = kept[~np.isnan(kept)].reshape(len(rows), -1)
            p[rows] = of_one_pattern(kept, pattern, statistic, permutations, rng)
    return p


def of_one_pattern(values, sizes, statistic, permutations, rng):
    """(R,) p-values of complete datasets (R, N) with groups of the given k sizes."""
    scaled = standardised(values)
    observed = statistic(*group_sums(scaled, sizes), sizes)
    labels = rng.permuted(np.tile(np.repeat(np.arange(len(sizes)), sizes), (permutations, 1)), axis=1)
    members = [(labels == group).T.astype(float) for group in range(len(sizes) - 1)]
    shuffled = rng.permuted(scaled, axis=1)
    reached = np.empty(len(values))
    for start in range(0, len(values), ROWS):
        some = slice(start, start + ROWS)
        found = statistic(*relabelled_sums(shuffled[some], members), sizes)
        limit = observed[some, None] * (1 - CLOSE)
        reached[some] = permutations - np.count_nonzero(found < limit, axis=1)
    return np.where(np.isnan(observed), np.nan, (1 + reached) / (permutations + 1))


def standardised(values):
    """(R, N) values less the mean of their dataset, in units of its root mean square; as they are where all are equal.

    Measured from the first value before they are averaged, so that equal values give exactly 0.
    """
    away = values - values[:, :1]
    away = away - away.mean(axis=1, keepdims=True)
    size = np.sqrt((away**2).mean(axis=1, keepdims=True))
    return away / np.where(size > 0, size, 1.0)


def group_sums(values, sizes):
    """((k, R) sums, function that gives (k, R) sums of squares) of the groups as they are."""
    starts = np.concatenate([[0], np.cumsum(sizes)[:-1]])
    columns = np.ascontiguousarray(values.T)
    return np.add.reduceat(columns, starts, axis=0), lambda: np.add.reduceat(columns**2, starts, axis=0)


def relabelled_sums(values, members):
    """((k, R, B) sums, function that gives (k, R, B) sums of squares) under B relabellings.

    members holds the (N, B) memberships of all groups but the last. The order in which a matrix product adds up does
    not matter here: CLOSE is far above what it can change.
    """
    return sums_by_group(values, members), lambda: sums_by_group(values**2, members)


def sums_by_group(values, members):
    """(k, R, B) sums of (R, N) values under B relabellings."""
    sums = np.empty((len(members) + 1, len(values), members[0].shape[1]))
    sums[-1] = values.sum(axis=1, keepdims=True)
    for group, member in enumerate(members):
        np.matmul(values, member, out=sums[group])
        sums[-1] -= sums[group]
    return sums
