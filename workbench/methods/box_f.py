"""F with Box's corrected degrees of freedom, for groups of unequal spread."""

from scipy.special import fdtrc

from workbench.methods.brown_forsythe_f import mehrotra_df, spread_and_df
from workbench.methods.method import METHODS, Method


@METHODS.add
class BoxF(Method):
    """Classical F over its expected ratio, with both degrees of freedom corrected for unequal spread (Box)."""

    name = "box_f"
    label = "Box F"
    short = "Box"
    hypothesis = "means"
    assumes = "normal groups; spreads may differ"
    undefined_when = "no value differs from another within its group, or a group has fewer than two"
    cite = (
        "Box, G. E. P. (1954). Some theorems on quadratic forms applied in the study of analysis of variance "
        "problems, I. Annals of Mathematical Statistics 25(2), 290-302"
    )

    def kernel(self, batch, rng):
        spread, _ = batch.shift_free(spread_and_df)
        numerator, denominator = batch.shift_free(box_df)
        return fdtrc(numerator, denominator, batch.sum_between / spread)


def box_df(batch):
    """((R,) numerator, (R,) denominator degrees of freedom): of the two sums of squares, by their first two moments.

    The classical F divided by the ratio of their expectations is F*, whose numerator is the same sum of squares; so
    the numerator's degrees of freedom are those that Mehrotra gave F*.
    """
    squares = ((batch.sizes - 1) * batch.variances**2).sum(axis=1)
    return batch.shift_free(mehrotra_df), batch.sum_within**2 / squares
