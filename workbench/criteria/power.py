"""A least power."""

from typing import Annotated

from annotated_types import Gt, Lt

from workbench.criteria.criterion import CRITERIA, Criterion


@CRITERIA.add
class Power(Criterion):
    """Detection at least as often as the given share, at the difference that must not be missed."""

    name = "power"
    reading = "detection"
    cite = "Cohen, J. (1988). Statistical Power Analysis for the Behavioral Sciences, 2nd ed. Erlbaum"

    at: str
    least: Annotated[float, Gt(0), Lt(1)] = 0.8

    def band(self, level):
        return self.least, 1.0

    def applies(self, condition):
        return not condition.is_null and condition.levels["difference"] == self.at
