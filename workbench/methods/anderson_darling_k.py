"""The Anderson–Darling test of k groups."""

from dataclasses import dataclass

import numpy as np

from workbench.limits import anderson_darling_tail
from workbench.methods.method import METHODS, Method

AT_ONCE = 16_384
"""Values worked on at a time: few enough to stay in a processor's cache."""


@METHODS.add
class AndersonDarlingK(Method):
    """Anderson–Darling test of k groups on mid-ranks, standardised, by its limit law."""

    name = "anderson_darling_k"
    label = "Anderson–Darling test"
    short = "A–D"
    hypothesis = "distributions"
    assumes = (
        "nothing but equal distributions under the null hypothesis; sizes large enough for the limit law"
    )
    undefined_when = (
        "all values are equal, a group is empty, no group has two values, or there are fewer than four"
    )
    cite = (
        "Scholz, F. W. & Stephens, M. A. (1987). K-sample Anderson-Darling tests. Journal of the American Statistical "
        "Association 82(399), 918-924"
    )

    def kernel(self, batch, rng):
        mean = batch.groups - 1
        deviation = np.sqrt(2 * mean * (np.pi**2 / 3 - 3))
        return anderson_darling_tail(batch.groups, mean + deviation * standardised(batch))


def standardised(batch):
    """(R,) values of A2 less their mean, in the paper's standard deviations for these sizes."""
    return (distances(batch) - (batch.groups - 1)) / np.sqrt(variance(batch.sizes, batch.total))


@dataclass(frozen=True)
class Runs:
    """The J runs of equal values of R datasets, one dataset after the other."""

    ends: np.ndarray
    """(J,) place of the last value of each run among all R * N, each dataset in order."""
    opens: np.ndarray
    """(R,) number of the first run of each dataset."""
    lengths: np.ndarray
    """(J,) how many values each has, as a float."""
    twice_below: np.ndarray
    """(J,) twice the number of values below it, half of its own included, as a float; -1 for missing values."""
    labels: np.ndarray
    """(R, N) group numbers of the values in order, k where one is missing."""

    def of(self, per_dataset):
        """(J,) or (1,): an (R,) or (1,) array told for each run."""
        if len(per_dataset) == 1:
            return per_dataset
        return np.repeat(per_dataset, np.diff(self.opens, append=len(self.ends)))

    def twice_below_within(self, group):
        """(J,) like twice_below, among the values of one group."""
        through = np.cumsum(self.labels == group, axis=1, dtype=np.int32).ravel()
        if len(self.ends) < len(through):
            through = through[self.ends]
        twice = through.astype(float)
        twice[1:] += through[:-1]
        twice[self.opens] = through[self.opens]
        return twice


def runs_of(ranks, designed):
    """The Runs of (R, N) mid-ranks: twice the rank and the group number of each are sorted as one whole number."""
    groups = len(designed)
    bits = groups.bit_length()
    whole = np.int32 if 2 * ranks.shape[1] < 1 << (31 - bits) else np.int64
    keys = (ranks * (2 << bits)).astype(whole)
    keys |= np.repeat(np.arange(groups, dtype=whole), designed)
    keys[ranks == 0] = groups
    keys.sort(axis=1)
    twice = keys >> bits
    last = np.ones(keys.shape, dtype=bool)
    last[:, :-1] = twice[:, 1:] != twice[:, :-1]
    ends = np.flatnonzero(last)
    opens = np.searchsorted(ends, np.arange(0, last.size, last.shape[1]))
    lengths = ends + 1.0
    lengths[1:] -= lengths[:-1].copy()
    below = twice.ravel()[ends] - 1.0
    return Runs(ends, opens, lengths, below, keys & ((1 << bits) - 1))


def distances(batch):
    """(R,) values of A2 with mid-ranks, equation 7 of the paper; NaN where all values of a dataset are equal."""
    step = max(1, AT_ONCE // sum(batch.designed))
    parts = []
    for start in range(0, batch.replications, step):
        some = slice(start, start + step)
        sizes = batch.sizes if len(batch.sizes) == 1 else batch.sizes[some]
        parts.append(distance(runs_of(batch.ranks[some], batch.designed), sizes))
    return np.concatenate(parts)


def distance(runs, sizes):
    """(R,) values of A2 from the Runs and the (R, k) or (1, k) sizes of R datasets."""
    totals = sizes.sum(axis=1)
    total, below = runs.of(totals), runs.twice_below
    squares = rest = 0.0
    for group, size in enumerate(map(runs.of, sizes.T[:-1])):
        away = total * runs.twice_below_within(group) - size * below
        rest = rest - away
        squares = squares + np.square(away, out=away) / size
    squares += np.square(rest, out=rest) / runs.of(sizes[:, -1])
    squares *= runs.lengths / (below * (2 * total - below) - total * runs.lengths)
    squares[below < 0] = 0
    return np.add.reduceat(squares, runs.opens) * (totals - 1) / totals**2


def variance(sizes, total):
    """(R,) or (1,) variance of A2 over all arrangements of untied values, as the paper has it; NaN where it is 0.

    It is that of the form without mid-ranks; the paper uses it for both.
    """
    k = sizes.shape[1]
    harmonic, double = harmonic_sums(total)
    inverse = (1 / sizes).sum(axis=1)
    a = (4 * double - 6) * (k - 1) + (10 - 6 * double) * inverse
    b = (2 * double - 4) * k**2 + 8 * harmonic * k + (2 * double - 14 * harmonic - 4) * inverse
    b += 4 * double - 8 * harmonic - 6
    c = (6 * harmonic + 2 * double - 2) * k**2 + (4 * harmonic - 4 * double + 6) * k
    c += (2 * harmonic - 6) * inverse + 4 * harmonic
    d = (2 * harmonic + 6) * k**2 - 4 * harmonic * k
    found = (((a * total + b) * total + c) * total + d) / ((total - 1) * (total - 2) * (total - 3))
    return np.where((total > 3) & (total > k), found, np.nan)


def harmonic_sums(total):
    """Two arrays like the whole numbers N in total: the sums of 1/i over i < N, and of 1/((N - i) j) over i < j < N.

    The second is the sum of 1/i^2 less 2/N times the sum of 1/i, since the sum of 1/j times the (N - j)th harmonic
    number over j < N is the square of the Nth less the sum of 1/i^2 over i <= N.
    """
    inverse = 1 / np.arange(1, total.max() + 1)
    places = np.maximum(total.astype(int) - 1, 0)
    harmonic, squares = (np.append(0, np.cumsum(inverse**power))[places] for power in (1, 2))
    return harmonic, squares - 2 * harmonic / total
