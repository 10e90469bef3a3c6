"""Rank sums of many datasets at once, ties as mid-ranks."""

import numpy as np

ROWS = 256
"""Datasets ranked at a time: few enough to stay in a processor's cache."""


def rank_sums_and_ties(rows, replications, sizes):
    """((R, k) sums of mid-ranks, (R,) sums of t^3 - t over ties) of R datasets; NaN is a missing value.

    rows(slice) gives some of the datasets as a new (r, N) array, without negative zeros. Group numbers are
    written into the lowest bits of the values, which are then sorted in place. A dataset in which two neighbours
    agree in all other bits, or that holds an infinite or missing value, is ranked anew without that device, so
    that the result is exact for every dataset.
    """
    labels = np.repeat(np.arange(len(sizes)), sizes)
    sums = np.empty((len(sizes), replications)).T
    ties = np.zeros(replications)
    for start in range(0, replications, ROWS):
        some = slice(start, min(start + ROWS, replications))
        sums[some], doubtful = packed_rank_sums(rows(some), labels, len(sizes))
        if doubtful.any():
            where = np.flatnonzero(doubtful)
            sums[start + where], ties[start + where] = exact_rank_sums(rows(some)[where], labels, len(sizes))
    return sums, ties


def packed_rank_sums(values, labels, groups):
    """((R, k) rank sums, (R,) bool: datasets in which they cannot be trusted) of (R, N) values, which are used up."""
    mask = (1 << (groups - 1).bit_length()) - 1
    bits = values.view(np.int64)
    bits &= ~mask
    bits |= labels
    values.sort(axis=1)
    doubtful = np.isnan(values[:, -1])
    # Neighbours across the end of a row are compared too: one look at all is cheaper than one at each row.
    apart = np.bitwise_xor(bits.reshape(-1)[1:], bits.reshape(-1)[:-1]).view(np.uint64)
    if apart.min(initial=mask + 1) <= mask:
        doubtful |= (np.bitwise_xor(bits[:, 1:], bits[:, :-1]).view(np.uint64) <= mask).any(axis=1)
    bits &= mask
    return sums_by_label(bits, groups), doubtful


def sums_by_label(found, groups):
    """(R, k) sums of the positions 1 … N by the label found there, (R, N).

    Sums of whole numbers: several of them are packed side by side into one double, where they stay exact.
    """
    replications, total = found.shape
    width = (total * (total + 1) // 2).bit_length()
    together = 52 // width
    positions = np.arange(1.0, total + 1)
    sums = np.empty((groups, replications))
    for first in range(0, groups - 1, together):
        members = range(first, min(first + together, groups - 1))
        worth = np.zeros(1 << (groups - 1).bit_length())
        worth[first : members.stop] = 2.0 ** (width * np.arange(len(members)))
        packed = (worth.take(found) @ positions).astype(np.int64)
        for member in members:
            sums[member] = packed & ((1 << width) - 1)
            packed >>= width
    sums[-1] = total * (total + 1) / 2 - sums[:-1].sum(axis=0)
    return sums.T


def exact_rank_sums(values, labels, groups):
    """((R, k) sums of mid-ranks, (R,) tie sums) of (R, N) values, by a plain sort."""
    ranks, ties = mid_ranks(values)
    sums = [np.where(labels == group, ranks, 0.0).sum(axis=1) for group in range(groups)]
    return np.stack(sums, axis=1), ties


def mid_ranks(values):
    """((R, N) mid-ranks in the order of the values, (R,) sums of t^3 - t over ties); 0 where a value is NaN."""
    order = np.argsort(values, axis=1, kind="stable")
    ordered = np.take_along_axis(values, order, axis=1)
    present = ~np.isnan(ordered)
    replications, total = values.shape
    opens = np.ones(values.shape, dtype=bool)
    opens[:, 1:] = ordered[:, 1:] != ordered[:, :-1]
    starts = np.flatnonzero(opens)
    lengths = np.diff(starts, append=values.size)
    middles = np.repeat(starts % total + (lengths + 1) / 2, lengths).reshape(values.shape)
    ranks = np.empty(values.shape)
    np.put_along_axis(ranks, order, np.where(present, middles, 0.0), axis=1)
    # NaN differs from NaN, so every missing value is a run of length 1 and adds nothing.
    ties = np.bincount(starts // total, weights=lengths.astype(float) ** 3 - lengths, minlength=replications)
    return ranks, ties
