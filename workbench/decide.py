"""Decide: which methods are eligible, which is chosen, and the reasons as sentences."""

from dataclasses import dataclass, field
from enum import Enum

import numpy as np
import pandas as pd

from workbench import sentences
from workbench.criteria import Verdict
from workbench.grid import answering
from workbench.table import judging, portion
from workbench.texts import bare
from workbench.verdict import advice, settling_total, together


class Status(Enum):
    """How a decision ended."""

    CHOSEN = "chosen"
    TIE = "tie"
    NONE_ELIGIBLE = "none eligible"
    UNDECIDED = "undecided"


@dataclass(frozen=True)
class Standing:
    """One method against the criteria."""

    name: str
    label: str
    hypothesis: str
    answers: bool
    """Whether it answers the question asked."""
    admitted: bool
    size: Verdict | None
    """None where no condition has the null hypothesis true."""
    power: Verdict | None
    errors: pd.DataFrame = field(repr=False)
    """Its rows that the size criterion judges."""
    detections: pd.DataFrame = field(repr=False)
    """Its rows at the difference that must not be missed, or all detections where the file names none."""

    @property
    def counted_in(self):
        """Whether it may be chosen if it keeps its error rate."""
        return self.answers or self.admitted

    @property
    def eligible(self):
        """Whether it is shown to keep its error rate everywhere."""
        return self.counted_in and self.size is Verdict.MEETS

    @property
    def possible(self):
        """Whether it is not shown to break its error rate anywhere."""
        return self.counted_in and self.size is not None and self.size is not Verdict.FAILS

    @property
    def least(self):
        """The row of its least detection; None without alternatives."""
        return None if self.detections.empty else self.detections.loc[self.detections["rate"].idxmin()]


@dataclass(frozen=True)
class Decision:
    """What was decided, and why, as data and as sentences."""

    status: Status
    chosen: list
    eligible: list
    excluded: dict
    plan: str
    digest: str
    told: list
    """The sentences with marks around users' texts, for documents that can isolate them."""
    standings: list = field(repr=False)

    @property
    def sentences(self):
        """What was decided and why, as plain sentences."""
        return [bare(sentence) for sentence in self.told]

    def as_data(self):
        """The decision as plain data."""
        keys = ("chosen", "eligible", "excluded", "plan", "digest", "sentences")
        return {"status": self.status.value} | {key: getattr(self, key) for key in keys}


def decided(study, conditions, tables):
    """The Decision of a study from its tables."""
    answers = answering(study, conditions)
    standings = [standing(study, judge, answers[judge.name], tables.rates) for judge in study.judges]
    excluded = {one.name: bare(sentences.exclusion(study, one)) for one in standings if not one.possible}
    status, chosen = choice(study, standings, tables)
    open_rows = advised(study, conditions, standings, tables)
    rivalry = contests(study, standings, tables)
    told = sentences.decision(study, status.value, chosen, standings, open_rows, rivalry)
    return Decision(
        status,
        [one.name for one in chosen],
        [one.name for one in standings if one.eligible],
        excluded,
        study.key,
        tables.digest,
        told,
        standings,
    )


def standing(study, judge, answers, rates):
    """The Standing of one method."""
    mine = rates[(rates["method"] == judge.name) & (rates["alpha"] == study.levels[0])]
    errors = mine[mine["reading"] == "error"]
    detections = mine[mine["reading"] == "detection"]
    if study.criteria.power is not None:
        detections = detections[detections["difference"] == study.criteria.power.at]
    return Standing(
        judge.name,
        judge.label,
        judge.method.hypothesis,
        answers,
        judge.name in study.criteria.admit,
        None if errors.empty else together(errors["verdict"]),
        None if study.criteria.power is None or detections.empty else together(detections["verdict"]),
        errors,
        detections,
    )


def choice(study, standings, tables):
    """(Status, the Standings chosen or tied)."""
    possible = [one for one in standings if one.possible]
    eligible = [one for one in possible if one.eligible]
    if not possible:
        no_null = any(one.counted_in and one.size is None for one in standings)
        return (Status.UNDECIDED if no_null else Status.NONE_ELIGIBLE), []
    if not eligible:
        return Status.UNDECIDED, []
    if study.criteria.power is None or eligible[0].detections.empty:
        settled = len(possible) == len(eligible)
        return settle(eligible) if settled else (Status.UNDECIDED, [])
    return best(study, eligible, possible, tables)


def settle(leaders):
    """Chosen where one is left, tie where several are."""
    return (Status.CHOSEN if len(leaders) == 1 else Status.TIE), leaders


def best(study, eligible, possible, tables):
    """The eligible method of the largest worst-case detection, with those that tie with it."""
    lead, tied = leader(eligible), []
    for rival in possible:
        if rival is lead:
            continue
        low, high = worst_case_difference(lead, rival, tables.differences)
        if within_margin(study, low, high) and rival.eligible:
            tied.append(rival)
        elif within_margin(study, low, high) or not low > 0:
            return Status.UNDECIDED, []
    return settle([one for one in eligible if one is lead or one in tied])


def leader(eligible):
    """The eligible method of the largest least detection."""
    return max(eligible, key=lambda one: one.detections["rate"].min())


def within_margin(study, low, high):
    """Whether a difference known to lie from low to high counts as none."""
    return -study.criteria.tie <= low and high <= study.criteria.tie


@dataclass(frozen=True)
class Contest:
    """Two methods that are neither apart nor tied."""

    lead: str
    rival: str
    low: float
    high: float
    total: int | None
    """Replications in all that would probably settle it; None where more will hardly do."""


def contests(study, standings, tables):
    """The Contests between the leading method and others that keep their error rate, the hardest first."""
    eligible = [one for one in standings if one.eligible]
    if not eligible or study.criteria.power is None or eligible[0].detections.empty:
        return []
    lead, found = leader(eligible), []
    for rival in eligible:
        low, high = (
            worst_case_difference(lead, rival, tables.differences) if rival is not lead else (1.0, 1.0)
        )
        if not (low > 0 or within_margin(study, low, high)):
            total = settling_total((low, high), study.criteria.tie, study.simulation.replications)
            found.append(Contest(lead.label, rival.label, low, high, total))
    return sorted(found, key=lambda one: np.inf if one.total is None else one.total, reverse=True)


def worst_case_difference(one, other, differences):
    """(low, high) limits of the least detection of one method less that of another.

    Where `other` is least, `one` is at least as high as its own least; so the difference of the two minima is at
    most the paired upper limit in a condition that may be the other's least, and likewise at least the lower
    limit in one that may be the method's own least. Nor can it leave what the limits of the two minima allow. All
    limits hold at once, so nothing further is paid.
    """
    lower, upper = paired_limits(one, other, differences)
    (own_low, own_high), (other_low, other_high) = least_limits(one), least_limits(other)
    low = max(min(lower[may_be_least(one)]), own_low - other_high)
    high = min(max(upper[may_be_least(other)]), own_high - other_low)
    return low, high


def least_limits(one):
    """(low, high) limits of a method's least detection."""
    return one.detections["lower"].min(), one.detections["upper"].min()


def may_be_least(one):
    """(conditions,) bool: by its limits, the method's least detection may be there."""
    return (one.detections["lower"] <= one.detections["upper"].min()).to_numpy()


def paired_limits(one, other, differences):
    """((conditions,) lower, (conditions,) upper) limits of the paired difference of two methods' detections."""
    level = one.detections["alpha"].iloc[0]
    here = differences[
        differences["condition"].isin(one.detections["condition"]) & (differences["alpha"] == level)
    ]
    ahead = here[(here["method"] == one.name) & (here["rival"] == other.name)]
    if len(ahead):
        return ahead["lower"].to_numpy(), ahead["upper"].to_numpy()
    behind = here[(here["method"] == other.name) & (here["rival"] == one.name)]
    return -behind["upper"].to_numpy(), -behind["lower"].to_numpy()


def advised(study, conditions, standings, tables):
    """[(row, limit, Advice)] for the open size rows of methods that may be chosen, the hardest to settle first."""
    criteria = judging(study, conditions)
    rates = tables.rates
    error = portion(1 - study.criteria.confidence, "verdicts", (rates["verdict"] != "").sum())
    found = []
    for one in standings:
        if not one.possible:
            continue
        for _, row in one.errors[one.errors["verdict"] == Verdict.UNDECIDED.value].iterrows():
            limit = nearest_limit(criteria[row["condition"]].band(row["alpha"]), row)
            ends = row["lower"], row["upper"]
            found.append((row, limit, advice(row["rejections"], row["replications"], limit, *ends, error)))
    return sorted(found, key=lambda item: np.inf if item[2].more is None else item[2].more, reverse=True)


def nearest_limit(band, row):
    """The limit of a band that lies within a row's interval, nearest to its rate."""
    within = [limit for limit in band if row["lower"] <= limit <= row["upper"]]
    return min(within, key=lambda limit: abs(limit - row["rate"]))
