"""Rank sums of many datasets at once, ties as mid-ranks."""

from dataclasses import dataclass
from functools import lru_cache

import numpy as np

RANKED = 131_072
"""Values ranked at a time: few enough to stay in a processor's cache."""

FEW = 0.2
"""Up to this share of datasets with ties at a time, they are ranked one by one."""


MANY = 16
"""More groups than that are summed by counting, fewer one after the other."""


@dataclass(frozen=True)
class Layout:
    """What ranking needs to know of a design of k groups: the same for all datasets."""

    labels: np.ndarray
    """(N,) number of the group that each place belongs to."""
    tiled: np.ndarray
    """(r, N) the same for as many datasets as are ranked at a time, in 32 bits."""
    mask: int
    """The lowest bits, which hold a label."""

    @property
    def groups(self):
        """k, the number of groups."""
        return int(self.labels[-1]) + 1


@lru_cache(maxsize=64)
def layout_of(sizes):
    """The Layout of a design."""
    labels = np.repeat(np.arange(len(sizes)), sizes)
    mask = (1 << (len(sizes) - 1).bit_length()) - 1
    at_once = max(1, RANKED // len(labels))
    tiled = np.ascontiguousarray(np.broadcast_to(labels.astype(np.int32), (at_once, len(labels))))
    return Layout(labels, tiled, mask)


def rank_sums_and_ties(block, replications, sizes):
    """((R, k) sums of mid-ranks, (R,) sums of t^3 - t over ties) of R datasets; NaN is a missing value.

    block(slice) gives some of the datasets as an (N, r) array. Values are shortened to
    32 bits, group numbers are written into the lowest of these, and they are sorted in place. Shortening keeps
    the order but may make ties; a dataset in which it makes a tie of values that differ, or that holds an
    infinite or missing value, is ranked anew without it, so that the result is exact for every dataset.
    """
    layout = layout_of(tuple(sizes))
    sums = np.empty((layout.groups, replications)).T
    ties = np.zeros(replications)
    at_once = len(layout.tiled)
    for start in range(0, replications, at_once):
        some = slice(start, min(start + at_once, replications))
        values = block(some)
        found, tied, doubtful = packed_order(values.T.astype(np.float32, order="C"), layout)
        if tied is None or (uneven := tied.any(axis=1)).mean() <= FEW:
            sums[some] = sums_by_label(found, layout.groups)
            doubtful |= False if tied is None else uneven
        else:
            sums[some], ties[some] = tied_sums(found, tied, layout.groups)
            doubtful |= falsely_tied(values, tied)
        if doubtful.any():
            where = np.flatnonzero(doubtful)
            sums[start + where], ties[start + where] = exact_rank_sums(values.T[where], layout)
    return sums, ties


def packed_order(short, layout):
    """(labels in the order of the values, neighbours tied or None where none are, datasets that hold a NaN).

    Shapes (R, N), (R, N - 1), (R,) for (R, N) values in 32 bits, which are used up. Values count as tied that agree
    in all bits above those that a label takes.
    """
    bits = short.view(np.int32)
    bits &= ~layout.mask
    short += np.float32(0)  # -0.0 becomes 0.0, with which it ties
    bits |= layout.tiled[: len(bits)]
    short.sort(axis=1)
    missing = np.isnan(short[:, -1])
    # Neighbours across the end of a row are compared too: one look at all is cheaper than one at each row.
    apart = np.bitwise_xor(bits.reshape(-1)[1:], bits.reshape(-1)[:-1]).view(np.uint32)
    tied = None
    if apart.min(initial=layout.mask + 1) <= layout.mask:
        tied = np.append(apart <= layout.mask, False).reshape(bits.shape)[:, :-1]
    bits &= layout.mask
    return bits, tied, missing


def falsely_tied(values, tied):
    """(R,) bool: datasets of which some neighbours in order differ although they count as tied."""
    ordered = np.sort(values.T, axis=1)
    return ((ordered[:, 1:] == ordered[:, :-1]) != tied).any(axis=1)


def tied_sums(found, tied, groups):
    """((R, k) sums of mid-ranks by label, (R,) sums of t^3 - t) of (R, N) labels in order, neighbours tied or not.

    The work runs along the replications: first and last place of each value's run of ties by accumulation.
    """
    replications, total = found.shape
    whole = np.int32 if total < 30_000 else np.int64  # sums of twice the mid-ranks reach total * (total + 1)
    places = np.arange(total, dtype=whole)[:, None]
    joined = np.zeros((total + 1, replications), dtype=bool)
    joined[1:-1] = tied.T
    first = np.maximum.accumulate(np.where(joined[:-1], 0, places), axis=0)
    last = np.minimum.accumulate(np.where(joined[1:], total, places)[::-1], axis=0)[::-1]
    twice = first + last + 2
    labels = found.T.astype(np.int16)
    sums = np.empty((groups, replications))
    for group in range(groups - 1):
        sums[group] = np.add.reduce(twice * (labels == group), axis=0, dtype=whole)
    sums[:-1] /= 2
    sums[-1] = total * (total + 1) / 2 - sums[:-1].sum(axis=0)
    lengths = (last - first + 1).astype(float)
    return sums.T, np.square(lengths, out=lengths).sum(axis=0) - total


def sums_by_label(found, groups):
    """(R, k) sums of the positions 1 … N by the label found there, (R, N): whole numbers, exact in any order."""
    replications, total = found.shape
    if groups > MANY:
        cells = found + groups * np.arange(replications)[:, None]
        weights = np.broadcast_to(np.arange(1.0, total + 1), found.shape).ravel()
        return np.bincount(cells.ravel(), weights, groups * replications).reshape(replications, groups)
    # Sums of whole numbers below 2^24 are exact in 32 bits too.
    positions = np.arange(1, total + 1, dtype=np.float32 if total < 5000 else np.float64)
    sums = np.empty((groups, replications))
    for group in range(groups - 1):
        sums[group] = (found == group) @ positions
    sums[-1] = total * (total + 1) / 2 - sums[:-1].sum(axis=0)
    return sums.T


def exact_rank_sums(values, layout):
    """((R, k) sums of mid-ranks, (R,) tie sums) of (R, N) values, by a plain sort."""
    ranks, ties = mid_ranks(values)
    groups = range(layout.groups)
    return np.stack(
        [np.where(layout.labels == group, ranks, 0.0).sum(axis=1) for group in groups], axis=1
    ), ties


def mid_ranks(values):
    """((R, N) mid-ranks in the order of the values, (R,) sums of t^3 - t over ties); 0 where a value is NaN."""
    places = np.argsort(values, axis=1)
    places += np.arange(0, values.size, values.shape[1])[:, None]
    ordered = values.reshape(-1)[places]
    opens = np.ones(values.shape, dtype=bool)
    np.not_equal(ordered[:, 1:], ordered[:, :-1], out=opens[:, 1:])
    middles, ties = middles_and_ties(opens)
    ranks = np.empty(values.shape)
    ranks.reshape(-1)[places] = middles
    if np.isnan(ordered[:, -1]).any():
        ranks[np.isnan(values)] = 0
    return ranks, ties


def middles_and_ties(opens):
    """((R, N) mid-ranks in order, (R,) sums of t^3 - t) from (R, N) bool: whether a run of t equal values starts."""
    replications, total = opens.shape
    starts = np.flatnonzero(opens)
    if len(starts) == opens.size:
        return np.broadcast_to(np.arange(1.0, total + 1), opens.shape), np.zeros(replications)
    lengths = np.diff(starts, append=opens.size)
    middles = np.repeat(starts % total + (lengths + 1) / 2, lengths).reshape(opens.shape)
    # NaN differs from NaN, so every missing value is a run of length 1 and adds nothing.
    ties = np.bincount(starts // total, weights=lengths.astype(float) ** 3 - lengths, minlength=replications)
    return middles, ties
