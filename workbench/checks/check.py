"""What a check is."""

from abc import ABC
from typing import ClassVar

import numpy as np

from workbench.registry import Shelf
from workbench.significance import SignificanceTest

CHECKS = Shelf("check", ready=True)


class Check(SignificanceTest, ABC):
    """A test of an assumption; a two-stage rule goes on by its p-value."""

    hypothesis: ClassVar[str]
    """The assumption that is tested: equal spreads, normality …"""


def by_size(sizes, replications, judge, least=1, most=np.inf):
    """(R,) p-values of datasets judged together with those of equal size: judge(rows, size) gives theirs.

    Sizes are (R,), or (1,) where all are alike; rows is an index of datasets. NaN for sizes beyond least and most.
    """
    p = np.full(replications, np.nan)
    found = np.unique(sizes)
    for size in found[(found >= least) & (found <= most)]:
        rows = slice(None) if len(found) == 1 else np.flatnonzero(sizes == size)
        p[rows] = judge(rows, int(size))
    return p
