"""Calibration: rates at other levels than those asked for, from the counts of p-values in fine bins."""

import numpy as np
import pandas as pd

from workbench.chunk import REPLICATIONS
from workbench.histogram import EDGES
from workbench.measures import rate
from workbench.plan import plan_of
from workbench.records import difference_key
from workbench.table import LEVEL_NAMES

USUAL = (0.001, 0.005, 0.01, 0.025, 0.05, 0.1)
"""Levels that people ask for; each is an edge of a bin."""

LOWEST, HIGHEST = 0.002, 0.1
"""Levels between which a calibration curve is drawn."""

A_DECADE = 6
"""Every so many edges of the 30 a decade carry a point of the curve."""

COLUMNS = ["condition", *LEVEL_NAMES, "method", "alpha", "replications", "rejections", "rate", "mcse"]


def levels():
    """(levels,) nominal levels of the curve: five a decade and the usual ones, all of them edges of bins."""
    decades = np.round(10 ** (-3 + np.arange(0, 61, A_DECADE) / 30), 16)
    wanted = np.union1d(decades, USUAL)
    return wanted[(wanted >= LOWEST) & (wanted <= HIGHEST)]


def calibrated(study, conditions, ledger):
    """DataFrame with the rows of calibration.csv: the error rate of each method at each level of the curve.

    A histogram counts whole chunks, so its replications may be up to 1,999 more than the study asks for.
    """
    places = np.searchsorted(EDGES, levels())
    rows = []
    for condition in conditions:
        if not condition.is_null:
            continue
        chunks = plan_of(study, [condition]).chunks
        for judge in study.judges:
            place = condition.setting.key, difference_key(condition.difference), judge.method.key()
            below = np.cumsum(ledger.histogram(*place, chunks))[places]
            head = [condition.number, *(condition.levels[name] for name in LEVEL_NAMES), judge.name]
            rows += [
                [*head, float(level), chunks * REPLICATIONS, int(count)]
                for level, count in zip(levels(), below, strict=True)
            ]
    table = pd.DataFrame(rows, columns=COLUMNS[:-2])
    table["rate"] = table["rejections"].to_numpy(dtype=float) / table["replications"].to_numpy(dtype=float)
    table["mcse"] = rate.monte_carlo_error(table["rate"], table["replications"])
    return table[COLUMNS]
