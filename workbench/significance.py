"""SignificanceTest: a part that gives every dataset of a batch a p-value."""

from abc import abstractmethod
from typing import ClassVar

import numpy as np

from workbench.groups import Batch
from workbench.registry import Part


class SignificanceTest(Part):
    """What methods and checks have in common."""

    assumes: ClassVar[str]
    undefined_when: ClassVar[str]

    @abstractmethod
    def kernel(self, batch, rng):
        """(R,) p-values, NaN where the test gives none; rng is this test's own generator."""

    def p_values(self, values, sizes, rng=None):
        """(R,) p-values of R datasets: values (R, N) with the groups side by side, sizes of k groups."""
        with np.errstate(all="ignore"):
            return self.judge(Batch(values, sizes), {self.key(): rng})

    def judge(self, batch, rngs):
        """(R,) p-values of a batch, worked out once for it; rngs holds a generator for each part that draws."""
        key = self.key()
        if key not in batch.memory:
            batch.memory[key] = self.kernel(batch, rngs.get(key))
        return batch.memory[key]
