"""What several stage tests share: a small outcome, and ways to tell it with rates set by hand."""

from dataclasses import replace

import numpy as np
import pytest

from workbench import run
from workbench.decide import decided
from workbench.report.book import Book
from workbench.study import parse
from workbench.table import add_verdicts, judging

SMALL = """\
format = 1
[study]
compare = "means"
unit = "mm"
[vary.sizes]
few = [5, 5, 5]
[vary.spread]
even = [1, 1, 1]
rising = [1, 2, 3]
falling = [3, 2, 1]
[vary.difference]
none = [0, 0, 0]
half = [0, 0.5, 1]
full = [0, 1, 2]
double = [0, 2, 4]
[methods]
use = ["welch_f", "brown_forsythe_f", "classical_f", "kruskal_wallis", "sop"]
[methods.routes.sop]
check = "levene_median"
if_passed = "classical_f"
if_failed = "welch_f"
[criteria]
size = "liberal"
power = { at = "full", least = 0.8 }
tie = 0.01
[simulation]
replications = 400
"""

SPREADS = ("even", "rising", "falling")

USUAL = {"none": 0.05, "half": 0.3, "full": 0.85, "double": 0.99}
"""The rate of a method under each difference where a test says nothing else."""

REPLICATIONS = 10_000

HALF_WIDTH = 0.005
"""How far the interval of a rate, or of a difference of two, goes to either side."""


@pytest.fixture(scope="session")
def small_outcome(tmp_path_factory):
    """Five methods over three spreads and four differences in one direction, run once."""
    return run.run(parse(SMALL, "x.toml"), tmp_path_factory.mktemp("small"), 1)


@pytest.fixture
def told(small_outcome):
    """told(welch_f=…, sop=…): a Book of the small outcome as if these methods had such rates and no others competed."""
    return lambda **settings: Book(retold(small_outcome, **settings))


def retold(outcome, spreads=SPREADS, differences=(), undefined=0, ratios=None, criteria=None, **rates):
    """An Outcome with rates set by hand and everything else worked out from them.

    Each method of `rates` has {difference: a rate, or one for each spread}. `differences` are the levels of that factor
    that are kept, all where there are none; `undefined` the results without a p-value in every row; `ratios` {level:
    error rate over level, one for all spreads or one for each}; `criteria` those that are others than in the file.
    """
    study = part_of(outcome.study, rates, spreads, differences, criteria or {})
    levels = study.factors.levels
    kept = [one for one in outcome.conditions if all(one.levels[name] in levels[name] for name in levels)]
    values = {
        (one.number, method): at_spread(
            mine.get(level := one.levels["difference"], USUAL[level]), one, spreads
        )
        for one in kept
        for method, mine in rates.items()
    }

    def own(table, *names):
        """The rows of a table on the conditions and methods that are kept."""
        among = [table["condition"].isin([one.number for one in kept])]
        among += [table[name].isin(list(rates)) for name in names]
        return table[np.logical_and.reduce(among)].reset_index(drop=True)

    tables = replace(
        outcome.tables,
        rates=with_rates(study, kept, own(outcome.tables.rates, "method"), values, undefined),
        differences=with_differences(own(outcome.tables.differences, "method", "rival"), values),
        branches=own(outcome.tables.branches, "route"),
    )
    ratio = {
        one.number: lambda level, one=one: at_spread((ratios or {}).get(level, 1), one, spreads)
        for one in kept
    }
    curves = own(outcome.calibration, "method").assign(replications=100 * REPLICATIONS)
    curves["rejections"] = [
        row.replications * row.alpha * ratio[row.condition](row.alpha) for row in curves.itertuples()
    ]
    told = {"tables": tables, "calibration": curves, "decision": decided(study, kept, tables)}
    return replace(outcome, study=study, conditions=kept, **told)


def part_of(study, methods, spreads, differences, criteria):
    """A study with some of its methods, spreads and differences, and with other criteria."""
    levels = dict(study.factors.levels)
    for factor, names in (("spread", spreads), ("difference", differences or levels["difference"])):
        levels[factor] = {name: levels[factor][name] for name in names}
    return replace(
        study,
        judges=tuple(judge for judge in study.judges if judge.name in methods),
        factors=replace(study.factors, levels=levels),
        criteria=replace(study.criteria, **criteria),
        simulation=replace(study.simulation, replications=REPLICATIONS),
    )


def at_spread(values, condition, spreads):
    """The value for a condition's spread, out of one for all or one for each."""
    return float(np.broadcast_to(values, len(spreads))[spreads.index(condition.levels["spread"])])


def with_rates(study, kept, table, values, undefined):
    """Rows of rates with other values, their intervals and the verdicts that follow."""
    rate = np.array([values[row.condition, row.method] for row in table.itertuples()])
    table = table.assign(
        replications=REPLICATIONS,
        rejections=np.rint(rate * REPLICATIONS).astype(int),
        undefined=undefined,
        rate=rate,
        mcse=np.sqrt(rate * (1 - rate) / REPLICATIONS),
        lower=np.maximum(rate - HALF_WIDTH, 0),
        upper=np.minimum(rate + HALF_WIDTH, 1),
    )
    add_verdicts(study, judging(study, kept), table)
    return table


def with_differences(table, values):
    """Rows of paired differences that agree with the rates, and their intervals."""
    pairs = [((row.condition, row.method), (row.condition, row.rival)) for row in table.itertuples()]
    apart = np.array([values[one] - values[other] for one, other in pairs])
    ends = {"lower": apart - HALF_WIDTH, "upper": apart + HALF_WIDTH}
    return table.assign(difference=apart, mcse=HALF_WIDTH / 4, **ends)
