"""Error rates at other levels, and the first dataset of a stream."""

import numpy as np
import pytest

from workbench import chunk, run
from workbench.calibration import COLUMNS, levels
from workbench.histogram import EDGES
from workbench.records import Task, Want
from workbench.study import parse

TEXT = """\
format = 1
[study]
compare = "means"
alpha = [0.05, 0.01]
[vary.sizes]
uneven = [4, 6, 9]
[vary.spread]
equal = [1, 1, 1]
falling = [3, 2, 1]
[vary.difference]
none = [0, 0, 0]
some = [0, 0, 2]
[vary.disturbance]
rounded = [{ kind = "round", to = 0.5 }]
[methods]
use = ["classical_f", "welch_f"]
[simulation]
seed = 3
replications = 4000
"""


@pytest.fixture(scope="module")
def outcome(tmp_path_factory):
    """The small study, run."""
    return run.run(parse(TEXT, "x.toml"), tmp_path_factory.mktemp("result"), 1)


def test_every_level_of_the_curve_is_an_edge_of_a_bin():
    assert set(levels()) <= set(EDGES) and levels()[0] >= 0.002 and levels()[-1] == 0.1


def test_the_curve_meets_the_table_at_its_levels(outcome):
    curve, table = outcome.calibration, outcome.tables.rates
    assert list(curve.columns) == COLUMNS
    for alpha in (0.05, 0.01):
        there = table[(table["alpha"] == alpha) & (table["reading"] == "error")]
        here = curve[curve["alpha"] == alpha]
        assert here["rejections"].tolist() == there["rejections"].tolist()
        assert here["method"].tolist() == there["method"].tolist()


def test_the_curve_never_falls(outcome):
    for _, rows in outcome.calibration.groupby(["condition", "method"]):
        assert rows["rejections"].is_monotonic_increasing and rows["alpha"].is_monotonic_increasing


def test_only_null_conditions_have_a_curve(outcome):
    assert set(outcome.calibration["difference"]) == {"none"}


def test_the_first_dataset_is_the_first_that_the_methods_saw(outcome, monkeypatch):
    condition = next(one for one in outcome.conditions if not one.is_null)
    seen = []

    class Watching:
        """A method that keeps the data it is given."""

        draws = False

        def judge(self, batch, rngs):
            seen.append(batch.columns[:, 0].copy())
            return np.full(batch.replications, 0.5)

        def parts(self):
            return [self]

        def key(self):
            return "watching"

    task = Task(3, condition.setting, (0.05,), (0,), (Want(condition.difference, (Watching(),)),))
    chunk.judged(task)
    assert np.array_equal(chunk.first_dataset(3, condition.setting, condition.difference), seen[0])
