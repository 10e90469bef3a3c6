"""Sensitivity: what would be chosen if only some of the conditions had been asked about."""

from dataclasses import dataclass

from workbench.decide import Status, choice, standing
from workbench.grid import answering


@dataclass(frozen=True)
class Alternative:
    """Another choice, and the part of the conditions under which it would be made."""

    factor: str
    level: str
    without: bool
    """Whether the level is taken out; else nothing but the level is left."""
    status: Status
    chosen: list
    """Standings over that part of the conditions."""
    gain: float | None
    """Least detection of the first chosen, less that of the method chosen from all, over that part."""
    present: object
    """Standing of the method chosen from all over that part; None where none was."""


def alternatives(study, conditions, tables, decision):
    """[Alternative] that lead to another choice, the largest gain in detection first."""
    found = []
    for factor, level, without, some in parts(study, conditions):
        standings = restricted(study, some, tables)
        status, chosen = choice(study, standings, tables)
        if status not in (Status.CHOSEN, Status.TIE) or {one.name for one in chosen} & set(decision.chosen):
            continue
        present = next((one for one in standings if one.name in decision.chosen), None)
        found.append(Alternative(factor, level, without, status, chosen, gain(chosen[0], present), present))
    return sorted(found, key=lambda one: -(one.gain or 0.0))


def parts(study, conditions):
    """(factor, level, whether it is taken out, the conditions left) for every factor that varies."""
    for factor, levels in study.factors.levels.items():
        names = [name for name in levels if any(one.levels[factor] == name for one in conditions)]
        if factor == "difference" or len(names) < 2:
            continue
        for level in names:
            yield factor, level, False, [one for one in conditions if one.levels[factor] == level]
            if len(names) > 2:
                yield factor, level, True, [one for one in conditions if one.levels[factor] != level]


def restricted(study, conditions, tables):
    """[Standing] of all methods over some of the conditions."""
    numbers = {one.number for one in conditions}
    rates = tables.rates[tables.rates["condition"].isin(numbers)]
    answers = answering(study, conditions)
    return [standing(study, judge, answers[judge.name], rates) for judge in study.judges]


def gain(one, present):
    """How much more the first finds at least than the method chosen from all; None where that cannot be said."""
    if present is None or one.least is None or present.least is None:
        return None
    return float(one.least["rate"] - present.least["rate"])
