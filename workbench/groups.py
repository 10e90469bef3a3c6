"""Batch: R datasets of k groups side by side, with what methods share worked out once."""

from dataclasses import replace
from functools import cached_property

import numpy as np

from workbench.moments import Moments, deviations_of, group_places, moments_of
from workbench.ranks import mid_ranks, rank_sums_and_ties


class Batch:
    """R datasets of N values in k groups.

    Columns 0 … n1 - 1 are group 1, and so on; a value that is missing is NaN. Values are kept with the
    replications side by side in memory, so that work on all datasets at once runs along whole rows.
    """

    def __init__(self, values, sizes):
        """Take (R, N) values and the k sizes; raises ValueError where they do not fit."""
        values = np.asarray(values, dtype=float)
        sizes = tuple(int(size) for size in sizes)
        if values.ndim != 2 or values.shape[1] != sum(sizes):
            wanted = f"values of shape (R, {sum(sizes)}) wanted for sizes {sizes}"
            raise ValueError(f"{wanted}; got {values.shape}")
        self.columns = np.ascontiguousarray(values.T)
        self.begin(sizes, len(values))

    def begin(self, designed, replications, root=None):
        """Set what every batch has: designed sizes, R, and an empty memory; root is the batch this is a shift of."""
        self.designed, self.replications = designed, replications
        self._root, self.memory = root, {}

    @property
    def root(self):
        """The batch that this is a shift of, or itself; not kept, since a circle would keep the memory from reuse."""
        return self._root or self

    @classmethod
    def of_columns(cls, columns, sizes):
        """A batch of (N, R) values, which are not copied."""
        return cls(columns.T, sizes)

    def shifted(self, by):
        """The same datasets with group i moved by by[i]; what no shift changes is shared with them."""
        return Shifted(self, np.asarray(by, dtype=float))

    def scaled(self, by):
        """The same datasets with all values of group i multiplied by by[i]."""
        return Scaled(self, np.asarray(by, dtype=float))

    def shared(self, function):
        """function(batch), worked out once for this batch."""
        if function not in self.memory:
            self.memory[function] = function(self)
        return self.memory[function]

    def shift_free(self, function):
        """function(batch), worked out once for all shifts of these datasets: for what no shift changes."""
        return self.root.shared(function)

    @property
    def values(self):
        """(R, N) values."""
        return self.columns.T

    @property
    def groups(self):
        """k, the number of groups."""
        return len(self.designed)

    def members(self, group):
        """(n, R) values of one group."""
        return self.columns[group_places(self.designed)[group]]

    def block(self, some):
        """(N, r) values of some replications (a slice), a new array; a shift common to all groups may be left out."""
        return self.columns[:, some].copy()

    @cached_property
    def moments(self):
        """The Moments of the groups."""
        return moments_of(self.columns, self.designed)

    @property
    def sizes(self):
        """(R, k) numbers of values present, or (1, k) where nothing is missing in any dataset."""
        return self.moments.sizes

    @property
    def means(self):
        """(R, k) group means, measured from `moments.origin`.

        Tests see differences of means only; measured from a value near them, they keep their digits.
        """
        return self.moments.means

    @property
    def variances(self):
        """(R, k) sample variances in squared units of the values, divisor n - 1.

        NaN where a group has fewer than two values; exactly 0 where all its values are equal.
        """
        return self.moments.variances

    @property
    def total(self):
        """(R,) or (1,) number of values in a dataset."""
        return self.shift_free(total)

    @property
    def grand_mean(self):
        """(R, 1) mean of all values, measured like `means`."""
        return (self.sizes / self.total[:, None] * self.means).sum(axis=1, keepdims=True)

    @property
    def sum_between(self):
        """(R,) sum of squares between the groups."""
        return self.shared(sum_between)

    @property
    def sum_within(self):
        """(R,) sum of squares within the groups."""
        return self.shift_free(sum_within)

    @property
    def deviations(self):
        """(N, R) values less the means of their groups: exactly 0 in a constant group, NaN where one is missing."""
        return self.shift_free(deviations)

    @property
    def ranks(self):
        """(R, N) mid-ranks of all values of a dataset; 0 where a value is missing."""
        return self.shared(ranks)

    @property
    def ranked(self):
        """The batch of mid-ranks, of which means and variances are those of the ranks."""
        return self.shared(ranked)

    @property
    def rank_sums(self):
        """(R, k) sums of mid-ranks."""
        return self.shared(rank_state)[0]

    @property
    def tie_sums(self):
        """(R,) sums of t^3 - t over the runs of t equal values."""
        return self.shared(rank_state)[1]


class Shifted(Batch):
    """Datasets of another batch with each group moved; values are worked out only where something asks for them."""

    def __init__(self, of, by):
        """Move group i by by[i]."""
        self.begin(of.designed, of.replications, of.root)
        self._of, self._by = of, by
        self._column = np.repeat(by, of.designed)[:, None]

    @cached_property
    def columns(self):
        """(N, R) values."""
        return self._of.columns + self._column

    def block(self, some):
        """(N, r) values of some replications, but for a shift common to all groups."""
        found = self._of.block(some)
        for place, by in zip(group_places(self.designed), self._by - self._by[0], strict=True):
            if by:
                found[place] += by
        return found

    @cached_property
    def moments(self):
        """The Moments, of which a shift changes only the means."""
        return replace(self._of.moments, means=self._of.moments.means + self._by)


class Scaled(Batch):
    """Datasets of another batch with each group multiplied; values are worked out only where something asks."""

    def __init__(self, of, by):
        """Multiply group i by by[i]."""
        self.begin(of.designed, of.replications)
        self._of, self._by = of, by
        self._column = np.repeat(by, of.designed)[:, None]

    @cached_property
    def columns(self):
        """(N, R) values."""
        return self._of.columns * self._column

    def block(self, some):
        """(N, r) values of some replications, which must not lack a common shift: groups stretch apart."""
        found = self._of.columns[:, some].copy()
        for place, by in zip(group_places(self.designed), self._by, strict=True):
            if by != 1:
                found[place] *= by
        return found

    @cached_property
    def moments(self):
        """The Moments; groups stretch apart, so means are measured from zero."""
        before = self._of.moments
        means = (before.means + before.origin) * self._by
        return Moments(before.sizes, means, before.variances * self._by**2, np.zeros_like(before.origin))


def rank_state(batch):
    """((R, k) rank sums, (R,) tie sums) of a batch."""
    return rank_sums_and_ties(batch.block, batch.replications, batch.designed)


def ranks(batch):
    """(R, N) mid-ranks of a batch."""
    return mid_ranks(batch.values)[0]


def ranked(batch):
    """The Batch of the mid-ranks of a batch; NaN where a value is missing."""
    ranks = batch.ranks
    return Batch(np.where(ranks > 0, ranks, np.nan), batch.designed)


def total(batch):
    """(R,) or (1,) number of values in a dataset of a batch."""
    return batch.sizes.sum(axis=1)


def sum_between(batch):
    """(R,) sum of squares between the groups of a batch."""
    return (batch.sizes * (batch.means - batch.grand_mean) ** 2).sum(axis=1)


def sum_within(batch):
    """(R,) sum of squares within the groups of a batch."""
    squares = (batch.sizes - 1) * batch.variances
    if (batch.sizes <= 1).any():
        squares = np.where(batch.sizes > 1, squares, 0.0)  # a single value does not vary
    return squares.sum(axis=1)


def deviations(batch):
    """(N, R) values less the means of their groups, of a batch."""
    return deviations_of(batch.columns, batch.designed)
