"""Welch's F on logarithms."""

from workbench.methods.log_f import on_logarithms
from workbench.methods.method import METHODS, Method
from workbench.methods.welch_f import welch_tail


@METHODS.add
class WelchLog(Method):
    """Welch's heteroscedastic F of the natural logarithms."""

    name = "welch_log"
    label = "Welch F on logarithms"
    short = "log Welch"
    hypothesis = "geometric means"
    assumes = "logarithms normal; their spreads may differ"
    undefined_when = "a value is 0 or less, all values of some group are equal, or a group has fewer than two"
    cite = (
        "Welch, B. L. (1951). On the comparison of several mean values. Biometrika 38(3/4), 330-336; on the scale of "
        "Bartlett, M. S. (1947). The use of transformations. Biometrics 3(1), 39-52"
    )

    def kernel(self, batch, rng):
        return on_logarithms(welch_tail, batch)
