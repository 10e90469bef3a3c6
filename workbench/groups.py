"""Batch: R datasets of k groups side by side, with what methods share worked out once."""

from functools import cached_property, lru_cache

import numpy as np

from workbench.ranks import mid_ranks, rank_sums_and_ties


class Batch:
    """R datasets of N values in k groups.

    Columns 0 … n1 - 1 are group 1, and so on; a value that is missing is NaN. Values are kept with the
    replications side by side in memory, so that work on all datasets at once runs along whole rows.
    """

    def __init__(self, values, sizes):
        """Take (R, N) values and the k sizes; raises ValueError where they do not fit."""
        self.designed = tuple(int(size) for size in sizes)
        values = np.asarray(values, dtype=float)
        if values.ndim != 2 or values.shape[1] != sum(self.designed):
            wanted = sum(self.designed)
            raise ValueError(
                f"values of shape (R, {wanted}) wanted for sizes {self.designed}; got {values.shape}"
            )
        self.columns = np.ascontiguousarray(values.T)
        self.replications = values.shape[0]
        self._parent, self._root, self.memory = None, self, {}

    @classmethod
    def of_columns(cls, columns, sizes):
        """A batch of (N, R) values, which are not copied."""
        return cls(columns.T, sizes)

    def shifted(self, by):
        """The same datasets with group i moved by by[i]; what no shift changes is shared with them."""
        return self._moved(self._root, 1.0, np.asarray(by, dtype=float))

    def scaled(self, by):
        """The same datasets with all values of group i multiplied by by[i]."""
        return self._moved(None, np.asarray(by, dtype=float), 0.0)

    def _moved(self, root, factors, shifts):
        """A batch of factors * values + shifts, whose values are worked out only where something asks for them."""
        batch = Batch.__new__(Batch)
        batch.designed, batch.replications = self.designed, self.replications
        batch._parent, batch._factors, batch._shifts = self, factors, shifts
        batch._root, batch.memory = root or batch, {}
        return batch

    @cached_property
    def columns(self):
        """(N, R) values, one row for each place in a dataset."""
        if self._root is not self:
            return self._parent.columns + np.repeat(self._shifts, self.designed)[:, None]
        return self._parent.columns * np.repeat(self._factors, self.designed)[:, None]

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

    def rows(self, some):
        """(r, N) values of some replications (a slice), as an array of its own with datasets side by side."""
        if self._parent is None:
            found = self.columns[:, some].T.copy(order="C")
            found += 0.0  # -0.0 becomes 0.0, with which it ties
            return found
        found = self._parent.rows(some)
        if self._root is self:
            found *= np.repeat(self._factors, self.designed)
        else:
            found += np.repeat(self._shifts, self.designed)
        return found

    def shared(self, function):
        """function(batch), worked out once for this batch."""
        if function not in self.memory:
            self.memory[function] = function(self)
        return self.memory[function]

    def shift_free(self, function):
        """function(batch), worked out once for all shifts of these datasets: for what no shift changes."""
        return self._root.shared(function)

    @property
    def moments(self):
        """(sizes, means, variances) of the datasets before they were shifted."""
        return self.shift_free(moments)

    @property
    def origin(self):
        """(R, 1) first value present in each dataset."""
        return self.shared(origin)

    @property
    def sizes(self):
        """(R, k) numbers of values present, or (1, k) where nothing is missing in any dataset."""
        return self.moments[0]

    @property
    def total(self):
        """(R,) or (1,) number of values in a dataset."""
        return self.shift_free(totals)

    @property
    def means(self):
        """(R, k) group means, measured from one value of the dataset.

        Tests see differences of means only; measured so, they keep their digits however far from zero the
        data lie.
        """
        return self.shared(means)

    @property
    def variances(self):
        """(R, k) sample variances in squared units of the values, divisor n - 1.

        Two passes about the mean (Chan, Golub & LeVeque 1983, The American Statistician 37, 242-247). NaN
        where a group has fewer than two values; exactly 0 where all its values are equal.
        """
        return self.moments[2]

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
    def rank_sums(self):
        """(R, k) sums of mid-ranks."""
        return self.shared(rank_state)[0]

    @property
    def tie_sums(self):
        """(R,) sums of t^3 - t over the runs of t equal values."""
        return self.shared(rank_state)[1]


def rank_state(batch):
    """((R, k) rank sums, (R,) tie sums) of a batch."""
    return rank_sums_and_ties(batch.rows, batch.replications, batch.designed)


def ranks(batch):
    """(R, N) mid-ranks of a batch."""
    return mid_ranks(batch.values)[0]


def sum_between(batch):
    """(R,) sum of squares between the groups of a batch."""
    return (batch.sizes * (batch.means - batch.grand_mean) ** 2).sum(axis=1)


def sum_within(batch):
    """(R,) sum of squares within the groups of a batch."""
    return ((batch.sizes - 1) * batch.variances).sum(axis=1)


def totals(batch):
    """(R,) or (1,) number of values in a dataset of a batch."""
    return batch.sizes.sum(axis=1)


def means(batch):
    """(R, k) group means of a batch as Batch describes them."""
    return batch.moments[1] if batch._root is batch else batch._parent.means + batch._shifts


def moments(batch):
    """((1, k) or (R, k) sizes, (R, k) means, (R, k) variances) of a batch that is no shift of another."""
    parent = batch._parent
    if parent is not None:
        sizes, means, variances = parent.moments
        return sizes, (means + parent.origin) * batch._factors, variances * batch._factors**2
    means, variances = np.empty((2, batch.groups, batch.replications))
    places = group_places(batch.designed)
    for group, place in enumerate(places):
        group_moments(batch.columns[place], means[group], variances[group])
    if np.isnan(means).any():
        return gappy_moments(batch)
    sizes = np.array([batch.designed], dtype=float)
    for group, place in enumerate(places[1:], start=1):
        means[group] += batch.columns[place.start] - batch.columns[0]
    return sizes, means.T, variances.T / (sizes - 1)


@lru_cache(maxsize=1024)
def group_places(sizes):
    """The slices of a dataset's places that belong to each group."""
    ends = np.cumsum(sizes).tolist()
    return [slice(end - size, end) for end, size in zip(ends, sizes, strict=True)]


def origin(batch):
    """(R, 1) first value present in each dataset, from which means are measured."""
    return first_values(batch.columns)[:, None]


def first_values(members):
    """(R,) first value present in each column of (n, R) values; NaN where there is none."""
    if not np.isnan(members[0]).any():
        return members[0]
    return members[np.argmax(~np.isnan(members), axis=0), np.arange(members.shape[1])]


def deviations(batch):
    """(N, R) values less the means of their groups: exactly 0 in a constant group, NaN where one is missing."""
    away = [batch.members(group) - first_values(batch.members(group)) for group in range(batch.groups)]
    return np.concatenate(
        [group - np.nansum(group, axis=0) / (~np.isnan(group)).sum(axis=0) for group in away]
    )


def group_moments(members, means, squares):
    """Write the (R,) means, from the first value, and (R,) sums of squares of (n, R) values into the given arrays.

    A group of equal values must come out with variance exactly 0, and the mean of 0.1, 0.1, 0.1 is not 0.1:
    so values are measured from the first of their group before they are averaged.
    """
    away = members - members[0]
    np.add.reduce(away, axis=0, out=means)
    means /= len(members)
    away -= means
    np.multiply(away, away, out=away)
    np.add.reduce(away, axis=0, out=squares)


def gappy_moments(batch):
    """((R, k) sizes, (R, k) means, (R, k) variances) where values may be missing; a group without values has none."""
    parts = [gappy_group(batch.members(group), batch.origin[:, 0]) for group in range(batch.groups)]
    return tuple(np.stack(rows, axis=1) for rows in zip(*parts, strict=True))


def gappy_group(members, start):
    """((R,) sizes, means from the start, variances) of (n, R) values of one group, of which some are NaN."""
    present = ~np.isnan(members)
    sizes = present.sum(axis=0).astype(float)
    firsts = first_values(members)
    away = np.where(present, members - firsts, 0.0)
    means = away.sum(axis=0) / sizes
    squares = (np.where(present, away - means, 0.0) ** 2).sum(axis=0)
    return sizes, firsts - start + means, np.where(sizes > 1, squares / np.maximum(sizes - 1, 1), np.nan)
