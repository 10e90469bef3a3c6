"""Counts of p-values in bins that are fine where levels lie."""

import numpy as np


def _edges():
    """Upper edges: 30 a decade from 1e-7 to 0.1, steps of 0.002 to 0.3, of 0.01 to 1, and the usual levels."""
    decades = np.round(10 ** (-7 + np.arange(181) / 30), 16)
    return np.unique(
        np.concatenate(
            [
                decades,
                [0.001, 0.005, 0.01, 0.025, 0.05, 0.1],
                np.arange(51, 151) * 2 / 1000,
                np.arange(31, 101) / 100,
            ]
        )
    )


EDGES = _edges()
"""Part of the format: bin i counts EDGES[i - 1] < p <= EDGES[i], the first one from 0 on."""


def counts(p):
    """(len(EDGES),) how many of the p-values fall into each bin; undefined ones into none."""
    found = np.searchsorted(np.sort(p), EDGES, side="right")
    found[1:] -= found[:-1].copy()
    return found
