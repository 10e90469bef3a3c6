"""Rank sums of many datasets at once, ties as mid-ranks."""

import numpy as np

ROWS = 256
"""Datasets ranked at a time: few enough to stay in a processor's cache."""


def rank_sums_and_ties(rows, replications, sizes):
    """((R, k) sums of mid-ranks, (R,) sums of t^3 - t over ties) of R datasets; NaN is a missing value.

    rows(slice) gives some of the datasets as a new (r, N) array, without negative zeros. Group numbers are
    written into the lowest bits of the values, which are then sorted in place. A dataset in which that device
    makes a tie of values that differ, or that holds an infinite or missing value, is ranked anew without it, so
    that the result is exact for every dataset.
    """
    labels = np.repeat(np.arange(len(sizes)), sizes)
    sums = np.empty((len(sizes), replications)).T
    ties = np.zeros(replications)
    for start in range(0, replications, ROWS):
        some = slice(start, min(start + ROWS, replications))
        found, tied, doubtful = packed_order(rows(some), labels, len(sizes))
        if tied is None:
            sums[some] = sums_by_label(found, len(sizes))
        else:
            sums[some], ties[some] = tied_sums(found, tied, len(sizes))
            doubtful |= falsely_tied(rows(some), tied)
        if doubtful.any():
            where = np.flatnonzero(doubtful)
            sums[start + where], ties[start + where] = exact_rank_sums(rows(some)[where], labels, len(sizes))
    return sums, ties


def packed_order(values, labels, groups):
    """(labels in the order of the values, neighbours tied or None where none are, datasets that hold a NaN).

    Shapes (R, N), (R, N - 1), (R,); the (R, N) values are used up. Values count as tied that agree in all bits
    above those that a label takes.
    """
    mask = (1 << (groups - 1).bit_length()) - 1
    bits = values.view(np.int64)
    bits &= ~mask
    bits |= labels
    values.sort(axis=1)
    missing = np.isnan(values[:, -1])
    # Neighbours across the end of a row are compared too: one look at all is cheaper than one at each row.
    apart = np.bitwise_xor(bits.reshape(-1)[1:], bits.reshape(-1)[:-1]).view(np.uint64)
    tied = None
    if apart.min(initial=mask + 1) <= mask:
        tied = np.append(apart <= mask, False).reshape(bits.shape)[:, :-1]
    bits &= mask
    return bits, tied, missing


def falsely_tied(values, tied):
    """(R,) bool: datasets of which some neighbours in order differ although they count as tied."""
    values.sort(axis=1)
    return ((values[:, 1:] == values[:, :-1]) != tied).any(axis=1)


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
    sums = [np.add.reduce(twice * (labels == group), axis=0, dtype=whole) / 2 for group in range(groups - 1)]
    sums.append(total * (total + 1) / 2 - sum(sums))
    lengths = (last - first + 1).astype(float)
    return np.stack(sums, axis=1), np.square(lengths, out=lengths).sum(axis=0) - total


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
