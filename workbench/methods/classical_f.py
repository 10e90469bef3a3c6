"""The classical one-way F."""

from workbench.methods.method import METHODS, Method
from workbench.tails import anova_tail


@METHODS.add
class ClassicalF(Method):
    """Classical one-way analysis of variance F."""

    name = "classical_f"
    label = "classical F"
    short = "F"
    hypothesis = "means"
    assumes = "normal groups of equal spread"
    undefined_when = "no value differs from another within its group"
    cite = "Fisher, R. A. (1925). Statistical Methods for Research Workers. Oliver & Boyd"

    def kernel(self, batch, rng):
        return anova_tail(batch)
