"""Bartlett's test of equal variances."""

import numpy as np

from workbench.checks.check import CHECKS, Check
from workbench.tails import chi_square_tail


@CHECKS.add
class Bartlett(Check):
    """Bartlett's likelihood ratio test of equal variances, with his correction."""

    name = "bartlett"
    hypothesis = "equal spreads"
    assumes = "normal groups"
    undefined_when = "all values of some group are equal, or a group has fewer than two"
    cite = (
        "Bartlett, M. S. (1937). Properties of sufficiency and statistical tests. Proceedings of the Royal "
        "Society of London A 160(901), 268-282"
    )

    def kernel(self, batch, rng):
        return batch.shift_free(likelihood_ratio)


def likelihood_ratio(batch):
    """(R,) p-values of the corrected likelihood ratio, by chi-square."""
    k, freedoms = batch.groups, batch.sizes - 1
    freedom = freedoms.sum(axis=1)
    logs = np.log(np.where(batch.variances > 0, batch.variances, np.nan))
    ratio = freedom * np.log(batch.sum_within / freedom) - (freedoms * logs).sum(axis=1)
    correction = 1 + ((1 / freedoms).sum(axis=1) - 1 / freedom) / (3 * (k - 1))
    # Where all variances are equal, rounding may leave the ratio a little below 0.
    return chi_square_tail(k - 1, np.maximum(ratio / correction, 0.0))
