"""Grid: a study unrolled into conditions, with their true quantities and what is equal in them."""

from functools import lru_cache

import numpy as np

from workbench import mechanism
from workbench.population import superiority
from workbench.records import Condition, Setting

HYPOTHESES = {
    "means": "mean",
    "medians": "median",
    "trimmed means": "trimmed_mean",
    "geometric means": "geometric_mean",
}
"""Hypotheses about one quantity of each group, by the name of that quantity."""

AS_GOOD_AS_EQUAL = 0.01
"""Recorded quantities this near, in units of the smallest standard deviation, count as equal."""

STOCHASTIC_TOLERANCE = 0.0025
"""The change of a mean rank, as a share, that a shift of a hundredth of a standard deviation makes."""

MOST_PAIRED = 60
"""More different groups than that are not compared pair by pair for equal stochastic size."""


def conditions(study):
    """Every Condition of a study, numbered from 1 in the order of the file."""
    settings = {}
    found = []
    for levels in study.factors.combinations():
        place = tuple(levels[factor] for factor in ("sizes", "shape", "spread", "disturbance"))
        if place not in settings:
            settings[place] = setting(study, levels)
        difference = study.factors.levels["difference"][levels["difference"]]
        truth = truth_of(study.question.compare, settings[place], difference)
        found.append(Condition(len(found) + 1, levels, settings[place], difference, truth))
    return found


def setting(study, levels):
    """The Setting that a combination of level names stands for."""
    chosen = {factor: study.factors.levels[factor][name] for factor, name in levels.items()}
    return Setting(
        shapes=(chosen["shape"],) * len(chosen["sizes"]),
        estimand=study.question.estimand,
        scale=study.question.scale,
        centre=study.question.centre,
        sizes=chosen["sizes"],
        spreads=chosen["spread"],
        disturbances=chosen["disturbance"],
    )


def truth_of(compare, setting, difference):
    """`null` where what is compared is equal in all groups before any disturbance, else `alternative`."""
    alike = len(set(difference)) == 1
    if compare == "distributions":
        alike = alike and len(set(setting.spreads)) == 1 and len(set(setting.shapes)) == 1
    return "null" if alike else "alternative"


@lru_cache(maxsize=2**16)
def quantities(population):
    """The true quantities of a population, worked out once."""
    return population.quantities


def holding(populations, sizes, tolerance=1e-9):
    """Names of the hypotheses that are true of the populations: equal means, medians … stochastic size.

    Quantities count as equal that differ by at most the tolerance, in units of the smallest standard deviation.
    """
    found = [quantities(population) for population in populations]
    unit = smallest_spread(populations)
    names = []
    for hypothesis, quantity in HYPOTHESES.items():
        values = [each[quantity] for each in found]
        if None not in values and max(values) - min(values) <= tolerance * unit:
            names.append(hypothesis)
    if len(set(populations)) == 1:
        return [*names, "distributions", "stochastic size"]
    limit = STOCHASTIC_TOLERANCE if tolerance > 1e-6 else 1e-5
    if len(set(populations)) <= MOST_PAIRED and stochastic_range(populations, sizes) <= limit:
        names.append("stochastic size")
    return names


def smallest_spread(populations):
    """The smallest standard deviation; of a population without one, what its quartiles would give if normal."""
    spreads = []
    for population in populations:
        sd = quantities(population)["sd"]
        if sd is None or not sd > 0:
            sd = float(population.quantile(0.75) - population.quantile(0.25)) / 1.349
        spreads.append(sd)
    return min(spreads)


def stochastic_range(populations, sizes):
    """Largest less smallest mean rank of a group in the pooled population, as shares of it."""
    pairs = {
        (one, other): cached_superiority(one, other) for one in set(populations) for other in set(populations)
    }
    weights = np.array(sizes) / sum(sizes)
    ranks = [
        sum(w * pairs[other, own] for w, other in zip(weights, populations, strict=True))
        for own in populations
    ]
    return max(ranks) - min(ranks)


@lru_cache(maxsize=2**16)
def cached_superiority(one, other):
    """superiority(one, other), worked out once."""
    return 0.5 if one == other else superiority(one, other)


def holds_as_defined(condition):
    """Hypotheses that are true of a condition before any disturbance."""
    return holding(mechanism.populations(condition.setting, condition.difference), condition.setting.sizes)


def holds_as_recorded(condition):
    """Hypotheses that are true of a condition as recorded, or as good as true."""
    populations = mechanism.recorded_populations(condition.setting, condition.difference)
    return holding(populations, condition.setting.sizes, AS_GOOD_AS_EQUAL)


def recorded_quantities(condition):
    """The true quantities of each group as recorded, with its planned size."""
    populations = mechanism.recorded_populations(condition.setting, condition.difference)
    return [
        {"size": size} | quantities(population)
        for size, population in zip(condition.setting.sizes, populations, strict=True)
    ]


def equal_as_recorded(condition, compare):
    """Whether a null condition's compared quantities are still equal, or as good as equal, when recorded."""
    return not condition.is_null or bool({compare, "distributions"} & set(holds_as_recorded(condition)))


def answering(study, found):
    """{name of a method: whether it answers the question asked}: its hypothesis holds in every null condition."""
    nulls = {
        (condition.setting.shapes, condition.setting.spreads, condition.difference): condition
        for condition in found
        if condition.is_null
    }
    held = [set(holds_as_defined(condition)) for condition in nulls.values()]

    def answers(hypothesis):
        if hypothesis == study.question.compare or study.question.compare == "distributions":
            return True
        return all(hypothesis in names or "distributions" in names for names in held)

    return {judge.name: all(answers(tested) for tested in judge.hypotheses) for judge in study.judges}
