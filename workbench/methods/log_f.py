"""The classical F on logarithms."""

import numpy as np

from workbench.groups import Batch
from workbench.methods.method import METHODS, Method
from workbench.tails import anova_tail


@METHODS.add
class LogF(Method):
    """Classical F of the natural logarithms."""

    name = "log_f"
    label = "F on logarithms"
    short = "log F"
    hypothesis = "geometric means"
    assumes = "logarithms normal, of equal spread"
    undefined_when = "a value is 0 or less, or no value differs from another within its group"
    cite = "Bartlett, M. S. (1947). The use of transformations. Biometrics 3(1), 39-52"

    def kernel(self, batch, rng):
        return on_logarithms(anova_tail, batch)


def on_logarithms(tail, batch):
    """(R,) p-values that tail gives for the batch of logarithms; NaN where a value is 0 or less."""
    return np.where(batch.shared(all_positive), tail(batch.shared(logarithms)), np.nan)


def all_positive(batch):
    """(R,) bool: whether no value is 0 or less."""
    return ~(batch.columns <= 0).any(axis=0)


def logarithms(batch):
    """The batch of natural logarithms, NaN where there is none."""
    return Batch.of_columns(np.log(batch.columns), batch.designed)
