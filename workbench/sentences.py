"""Sentences: which sentences tell a decision, with the values they need."""

from workbench.numbers import percent
from workbench.texts import isolated
from workbench.wording import excess, farthest, levels_at, rate_with_limits, thousands
from workbench.words import phrases

SAY = phrases("decision")

FEW = 2
"""Of more methods that tie, the reasons are given once for all."""

CURIOSITY = 0.001
"""Up to this share of results without a p-value no sentence is lost on them; tables count them all."""


def exclusion(study, standing):
    """Why a method is not eligible, as one sentence."""
    if not standing.counted_in:
        return SAY.asks_otherwise(standing.hypothesis, study.question.compare)
    if standing.size is None:
        return SAY.not_judged()
    row = farthest(study, standing.errors)
    low, high = study.criteria.size.band(study.levels[0])
    if row["rate"] > high:
        return SAY.errs_too_often(shown(study, row), f"{high:g}")
    return SAY.errs_too_rarely(shown(study, row), f"{low:g}")


def shown(study, row):
    """A row as templates know it: rate and limits as percentages, names of its levels, number of its condition."""
    return rate_with_limits(row) | {"levels": levels_at(study, row), "condition": row["condition"]}


def decision(study, status, chosen, standings, open_rows, rivalry):
    """The sentences of a decision: what, why, what would change it."""
    if status == "undecided":
        return undecided_sentences(study, standings, open_rows, rivalry)
    told = {"chosen": chosen_sentences, "tie": tie_sentences, "none eligible": none_sentences}
    return told[status](study, chosen, standings)


def chosen_sentences(study, chosen, standings):
    """Sentences for one chosen method."""
    one = chosen[0]
    return [
        SAY.use(one.label),
        *reasons(study, one),
        *rivals(study, one, standings),
        *power_shortfall(study, chosen),
    ]


def tie_sentences(study, chosen, standings):
    """Sentences for methods that cannot be told apart by the criteria."""
    sentences = [SAY.tie([one.label for one in chosen])]
    if study.criteria.power is None:
        sentences.append(SAY.not_ranked())
    elif not chosen[0].detections.empty:
        sentences.append(SAY.within_margin(f"{study.criteria.tie:g}"))
    if len(chosen) > FEW:
        low, high = study.criteria.size.band(study.levels[0])
        sentences.append(SAY.all_kept(len(chosen[0].errors), study.question.compare, f"{low:g}", f"{high:g}"))
    for one in chosen:
        sentences += reasons(study, one) if len(chosen) <= FEW else valueless(study, one)
    return [*sentences, *power_shortfall(study, chosen)]


def none_sentences(study, chosen, standings):
    """Sentences where every method is shown to break its error rate, or answers another question."""
    judged = [one for one in standings if one.counted_in and not one.errors.empty]
    if not judged:
        return [SAY.none_eligible(), SAY.all_ask_otherwise()]
    nearest = min(judged, key=lambda one: excess(study, farthest(study, one.errors)))
    row = farthest(study, nearest.errors)
    return [SAY.none_eligible(), SAY.nearest(nearest.label, shown(study, row)), SAY.may_help()]


def undecided_sentences(study, standings, open_rows, rivalry):
    """Sentences where the intervals leave the choice open, with what would settle it."""
    if any(one.counted_in and one.size is None for one in standings):
        return [SAY.undecided(), SAY.no_null()]
    sentences = [SAY.undecided()]
    if open_rows:
        sentences += openness(study, standings, open_rows)
    if rivalry:
        sentences += contest(study, rivalry[0])
    return sentences


def openness(study, standings, open_rows):
    """How many rows are open, and what would settle the hardest."""
    row, limit, hardest = open_rows[0]
    label = next(one.label for one in standings if one.name == row["method"])
    return [
        SAY.rows_open(len(open_rows), label, shown(study, row), f"{limit:g}"),
        settling(hardest, row["replications"]),
    ]


def settling(advice, done):
    """What would settle an open row."""
    if advice.more is None:
        return SAY.row_hardly_settled(f"{advice.within:.4f}")
    return SAY.row_settled_by(thousands(done + advice.more))


def contest(study, hardest):
    """Sentences on two methods that are neither apart nor tied."""
    ends = (f"{100 * end:.1f}".replace("-", "−") for end in (hardest.low, hardest.high))
    apart = SAY.neither_apart_nor_tied(hardest.lead, hardest.rival, *ends, f"{study.criteria.tie:g}")
    if hardest.total is None:
        return [apart, SAY.rivalry_hardly_settled()]
    return [apart, SAY.rivalry_settled_by(thousands(hardest.total))]


def reasons(study, one):
    """Why a method is eligible and what it detects."""
    found = [kept(study, one)]
    if not one.answers:
        found.append(SAY.admitted(one.hypothesis, study.question.compare))
    if one.least is not None and study.criteria.power is not None:
        found.append(
            SAY.finds(isolated(study.criteria.power.at), shown(study, one.least), len(one.detections))
        )
    return found + valueless(study, one)


def valueless(study, one):
    """A warning where a method had no p-value for a share of datasets that is more than a curiosity."""
    rows = [row for some in (one.errors, one.detections) for _, row in some.iterrows()]
    worst = max(rows, key=lambda row: row["undefined"] / row["replications"])
    share = worst["undefined"] / worst["replications"]
    if share <= CURIOSITY:
        return []
    spread = (share * (1 - share) / worst["replications"]) ** 0.5
    return [SAY.no_value(one.label, percent(share, spread), shown(study, worst))]


def kept(study, one):
    """The sentence that a method keeps its error rate, with its smallest and largest."""
    row, rates = farthest(study, one.errors), one.errors["rate"]
    low, high = study.criteria.size.band(study.levels[0])
    return SAY.kept(
        one.label,
        study.question.compare,
        number=len(rates),
        least=percent(rates.min(), row["mcse"]),
        most=percent(rates.max(), row["mcse"]),
        low=f"{low:g}",
        high=f"{high:g}",
        row=shown(study, row),
    )


def rivals(study, one, standings):
    """How a chosen method compares with the other eligible ones."""
    if one.least is None or study.criteria.power is None:
        return []
    others = [
        f"{other.label} {percent(other.least['rate'], other.least['mcse'])}"
        for other in standings
        if other is not one and other.eligible
    ]
    return [SAY.others_find(others)] if others else []


def power_shortfall(study, chosen):
    """A sentence where the power asked for is not reached: sizes must change, not the test."""
    power = study.criteria.power
    if power is None or chosen[0].power is None or any(one.power.value == "meets" for one in chosen):
        return []
    missed = all(one.power.value == "fails" for one in chosen)
    return [(SAY.power_missed if missed else SAY.power_open)(f"{power.least:g}")]
