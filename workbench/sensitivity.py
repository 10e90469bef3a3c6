"""Sensitivity: what would be chosen if only some of the conditions had been asked about."""

from dataclasses import dataclass, replace

from workbench.decide import Status, choice
from workbench.grid import answering
from workbench.verdict import together


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
    """Least detection of the first chosen, less that of a method chosen from all that loses there."""
    present: object
    """Standing over that part of a method that is chosen from all but not there; None where none was chosen."""


def alternatives(study, conditions, tables, decision):
    """[Alternative] that lead to another choice, the largest gain in detection first."""
    found = []
    for factor, level, without, some in parts(study, conditions):
        standings = restricted(study, some, decision.standings)
        status, chosen = choice(study, standings, tables)
        names = {one.name for one in chosen}
        if status not in (Status.CHOSEN, Status.TIE) or not is_another(names, set(decision.chosen)):
            continue
        present = next((one for one in standings if one.name in set(decision.chosen) - names), None)
        found.append(Alternative(factor, level, without, status, chosen, gain(chosen[0], present), present))
    return sorted(found, key=lambda one: -(one.gain or 0.0))


def is_another(chosen, before):
    """Whether methods chosen under part of the conditions are another choice than those before: some of them lose."""
    return bool(before - chosen) if before else True


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


def restricted(study, conditions, standings):
    """[Standing] of all methods over some of the conditions."""
    numbers = {one.number for one in conditions}
    answers = answering(study, conditions)
    return [narrowed(one, numbers, answers[one.name]) for one in standings]


def narrowed(one, numbers, answers):
    """A Standing over the conditions of the given numbers."""
    errors = one.errors[one.errors["condition"].isin(numbers)]
    detections = one.detections[one.detections["condition"].isin(numbers)]
    size = None if errors.empty else together(errors["verdict"])
    power = None if one.power is None or detections.empty else together(detections["verdict"])
    return replace(one, answers=answers, size=size, power=power, errors=errors, detections=detections)


def gain(one, present):
    """How much more the first finds at least than the method chosen from all; None where that cannot be said."""
    if present is None or one.least is None or present.least is None:
        return None
    return float(one.least["rate"] - present.least["rate"])
