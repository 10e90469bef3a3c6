"""The difference of two rates on the same data."""

import numpy as np
from scipy.special import logsumexp

SHARES = np.concatenate([0.001 * 2.0 ** np.arange(10), [0.75, 0.95]])
"""Stakes of the bets, as shares of what may be lost at once."""


def monte_carlo_error(only_first, only_second, replications):
    """Monte Carlo standard error of (b - c) / R: sqrt(b + c - (b - c)^2 / R) / R."""
    b, c, n = (np.asarray(count, dtype=float) for count in (only_first, only_second, replications))
    return np.sqrt(b + c - (b - c) ** 2 / n) / n


def limits(only_first, only_second, replications, error):
    """(lower, upper) limits of the difference of two rates that miss it with chance `error` at most.

    A mixture of constant bets on the counts of discordant pairs (after Waudby-Smith & Ramdas 2024, JRSS B 86,
    1-27): under a difference r the stake is multiplied in each replication by a factor of mean 1, whatever the
    share of discordant pairs, so it reaches 2 / error with chance error / 2 at most (Ville's inequality).
    """
    counts = np.broadcast_arrays(
        *(np.asarray(count, dtype=float) for count in (only_first, only_second, replications, error))
    )
    b, c, n, error = (count[..., None] for count in counts)
    needed = np.log(2 / error[..., 0])
    lower = edge(lambda r: evidence_above(r[..., None], b, c, n) >= needed, needed.shape)
    upper = -edge(lambda r: evidence_above(r[..., None], c, b, n) >= needed, needed.shape)
    return lower, upper


def edge(excluded, shape):
    """The largest r in [-1, 1] that is excluded, where all below it are; -1 where none is."""
    low, high = np.full(shape, -1.0), np.ones(shape)
    for _ in range(50):
        middle = (low + high) / 2
        out = excluded(middle)
        low, high = np.where(out, middle, low), np.where(out, high, middle)
    return low


def evidence_above(r, b, c, n):
    """log of the stake won by betting that the difference is larger than r; arrays end in an axis of length 1."""
    with np.errstate(divide="ignore"):
        u = SHARES / (1 + r)
        won = b * np.log1p(u * (1 - r)) + c * np.log1p(-SHARES) + (n - b - c) * np.log1p(-u * r)
    return logsumexp(won, axis=-1) - np.log(len(SHARES))
