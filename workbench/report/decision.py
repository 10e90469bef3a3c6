"""The decision: the methods against the criteria, what the choice costs, what would change it."""

from workbench import texts, wording
from workbench.numbers import percent
from workbench.report import gate, shown
from workbench.report.drawing import inline
from workbench.report.regret import given_up, most, rivalled
from workbench.sensitivity import alternatives

MOST_TOLD = 2
"""Alternatives that the first page tells of."""


def decision(book):
    """What the first section of a report shows."""
    return {
        "answer": book.decision.told[0],
        "reasons": book.decision.told[1:],
        "head": inline(gate.head(book)),
        "bench": [bench_row(book, standing) for standing in in_order(book)],
        "power": book.study.criteria.power is not None,
        "costs": costs(book),
        "changes": changes(book),
        "undefined": any(undefined(one) for one in book.decision.standings),
    }


def in_order(book):
    """Standings: the chosen, the eligible, those still possible, the others; each in the order of the file."""
    return sorted(
        book.decision.standings,
        key=lambda one: (one.name not in book.decision.chosen, not one.eligible, not one.possible),
    )


def undefined(standing):
    """How many results of a method are undefined, over the rows that decide."""
    return int(standing.errors["undefined"].sum() + standing.detections["undefined"].sum())


def bench_row(book, standing):
    """One method against the criteria."""
    name, least = standing.name, standing.least
    found = {
        "label": book.label(name),
        "chosen": name in book.decision.chosen,
        "other_question": not standing.answers,
        "admitted": standing.admitted,
        "undefined": shown.count(undefined(standing)),
        "least": None if least is None else book.detection(least["condition"], name),
        "strip": None,
        "farthest": None,
        "counts": None,
    }
    if standing.errors.empty:
        return found
    row = wording.farthest(book.study, standing.errors)
    return found | {
        "strip": inline(gate.strip(book, standing)),
        "farthest": book.error(row["condition"], name),
        "counts": gate.counts(book, standing),
        "all": len(standing.errors),
    }


def costs(book):
    """[sentence]: what is given up by the choice."""
    findings, found = book.findings, []
    lead = book.lead
    if not lead.counted_in or (lead.size is not None and not lead.possible):
        return [findings.no_cost_without_choice()]
    if not lead.eligible:
        return [findings.cost_open()]
    if not book.targets:
        return [findings.cost_unknown()]
    if not rivalled(book):
        found.append(findings.no_rival_to_lose_to(book.called(lead.name)))
    else:
        worst = most(given_up(book, lead))
        if worst.value > 0:
            amount, kept = shown.points(worst.value, worst.mcse), book.standings[worst.rival].eligible
            rival = book.called(worst.rival)
            found.append(
                findings.costs(book.called(lead.name), amount, book.at(worst.condition), rival, kept)
            )
        else:
            found.append(findings.costs_nothing(book.called(lead.name)))
    if lead.power is not None and lead.power.value == "fails":
        criterion, least = book.study.criteria.power, lead.least
        found_in, place = percent(least["rate"], least["mcse"]), book.at(book.conditions[least["condition"]])
        found.append(findings.misses(found_in, texts.isolated(criterion.at), place))
    return found


def changes(book):
    """[sentence]: what would change the decision."""
    study, outcome = book.study, book.outcome
    found = alternatives(study, outcome.conditions, outcome.tables, book.decision)
    told = {}
    for one in sorted(found, key=lambda one: not one.without):
        if one.gain is None or one.gain > 0:
            told.setdefault((tuple(other.name for other in one.chosen), one.gain), one)
    if told:
        first = sorted(told.values(), key=lambda one: -(one.gain or 0.0))[:MOST_TOLD]
        return [change(book, one) for one in first]
    if not book.varied:
        return [book.findings.nothing_varied()]
    return [book.findings.no_part_changes(bool(book.decision.chosen))]


def change(book, one):
    """The sentence on an Alternative."""
    findings = book.findings
    labels = [book.called(standing.name) for standing in one.chosen]
    part = (findings.without if one.without else findings.only)(one.factor, texts.isolated(one.level))
    if one.gain is None:
        return findings.would_be_chosen(part, labels)
    first = one.chosen[0].least
    digits = max(first["mcse"], one.present.least["mcse"])
    rates = percent(first["rate"], digits), percent(one.present.least["rate"], digits)
    return findings.would_find_more(part, labels, *rates, book.called(one.present.name))
