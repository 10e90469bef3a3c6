"""Book: what all sections of a report draw on: rows by place, names, digits, order, the method in question."""

from functools import cached_property

from markupsafe import Markup

from workbench import texts, wording
from workbench.criteria import Verdict
from workbench.grid import equal_as_recorded
from workbench.look import MOST_DRAWN, SLOTS
from workbench.numbers import decimals
from workbench.report import shown
from workbench.report.drawing import fitted
from workbench.words import phrases

MOST_PANELS = 12
"""A figure has at most so many panels."""

POINTWISE = 0.05
"""Error of an interval by itself: of a point of a curve, or of the rate within an end of a rule."""

MOST_LISTED = 1000
"""A table for each condition has at most so many; the CSV files have all."""

NAME_LENGTH = 48
"""Letters of a level's name in a table; the annex of conditions has all of them."""


class Book:
    """An outcome as the sections of a report see it, at the first level of the study."""

    def __init__(self, outcome):
        self.outcome, self.study, self.decision = outcome, outcome.study, outcome.decision
        self.level = self.study.levels[0]
        self.conditions = {condition.number: condition for condition in outcome.conditions}
        self.words, self.findings = phrases("figures"), phrases("findings")
        self.numbered = 0

    def next_figure(self):
        """The number of the next figure."""
        self.numbered += 1
        return self.numbered

    @cached_property
    def rows(self):
        """{(condition number, method): row of the table} at the first level."""
        rates = self.outcome.tables.rates
        here = rates[rates["alpha"] == self.level]
        return {(row.condition, row.method): row for row in here.itertuples()}

    @cached_property
    def pairs(self):
        """{(condition number, method, rival): (difference, mcse, lower, upper)}, both ways round."""
        table = self.outcome.tables.differences
        found = {}
        for row in table[table["alpha"] == self.level].itertuples():
            values = row.difference, row.mcse, row.lower, row.upper
            found[row.condition, row.method, row.rival] = values
            found[row.condition, row.rival, row.method] = -values[0], values[1], -values[3], -values[2]
        return found

    @cached_property
    def nulls(self):
        """Conditions in which what is compared is equal."""
        return [condition for condition in self.outcome.conditions if condition.is_null]

    @cached_property
    def alternatives(self):
        """Conditions in which it is not."""
        return [condition for condition in self.outcome.conditions if not condition.is_null]

    @cached_property
    def targets(self):
        """Conditions with the difference that must not be missed; all alternatives where none is named."""
        power = self.study.criteria.power
        if power is None:
            return self.alternatives
        return [one for one in self.alternatives if one.levels["difference"] == power.at]

    @cached_property
    def equal_as_recorded(self):
        """{number of a null condition: whether what is compared is still equal, or as good as equal, when recorded}."""
        compare = self.study.question.compare
        return {one.number: equal_as_recorded(one, compare) for one in self.nulls}

    @cached_property
    def null_of(self):
        """{setting key: the number of its first null condition}."""
        return {one.setting.key: one.number for one in reversed(self.nulls)}

    @cached_property
    def band(self):
        """(lower, upper) limits of the error rate."""
        return self.study.criteria.size.band(self.level)

    @cached_property
    def error_digits(self):
        """Decimals of error rates."""
        return decimals((self.level * (1 - self.level) / self.study.simulation.replications) ** 0.5)

    @cached_property
    def detection_digits(self):
        """Decimals of detection rates."""
        return decimals((0.25 / self.study.simulation.replications) ** 0.5)

    @cached_property
    def standings(self):
        """{method: Standing} in the order of the file."""
        return {one.name: one for one in self.decision.standings}

    @cached_property
    def lead(self):
        """The Standing the report compares with: the chosen, or the eligible, possible, nearest one."""
        standings = self.decision.standings
        by_choice = [self.standings[name] for name in self.decision.chosen]
        for some in (
            by_choice,
            [one for one in standings if one.eligible],
            [one for one in standings if one.possible],
            [one for one in standings if one.counted_in],
            standings,
        ):
            if some:
                return min(some, key=self.distance)
        raise AssertionError("a study has at least one method")

    def distance(self, standing):
        """How much a method leaves to be wished for: least detection first, then its farthest error."""
        if standing.possible and standing.least is not None:
            return -standing.least["rate"]
        if standing.errors.empty:
            return 0.0
        return wording.excess(self.study, wording.farthest(self.study, standing.errors))

    @cached_property
    def slots(self):
        """{method: Slot} for the first six in the file."""
        return {judge.name: slot for judge, slot in zip(self.study.judges, SLOTS, strict=False)}

    @cached_property
    def drawn(self):
        """Methods that figures of curves show: at most six, the leading one, its rivals, then the file's order."""
        order = sorted(self.decision.standings, key=lambda one: (not one.possible, not one.counted_in))
        names = [self.lead.name, *(one.name for one in order if one is not self.lead)]
        chosen = set(names[:MOST_DRAWN])
        return [judge.name for judge in self.study.judges if judge.name in chosen]

    def slot(self, method):
        """How a method is drawn: by its place in the file, or by the first that is free among those drawn."""
        if method in self.slots:
            return self.slots[method]
        free = [slot for name, slot in self.slots.items() if name not in self.drawn]
        late = [name for name in self.drawn if name not in self.slots]
        return free[late.index(method)]

    def label(self, method):
        """A method's name as a heading."""
        return self.labels[method]

    def cell_label(self, method):
        """A method's name in one of very many cells: in an element of its own only where a user gave it."""
        given = not hasattr(self.study.judge(method).method, "label")
        return Markup("<bdi>{}</bdi>").format(self.labels[method]) if given else self.labels[method]

    @cached_property
    def labels(self):
        """{method: its name as a heading}."""
        names = {judge.name: texts.bare(self.called(judge.name)) for judge in self.study.judges}
        return {method: name[:1].upper() + name[1:] for method, name in names.items()}

    def called(self, method):
        """A method's name within a sentence."""
        return self.study.judge(method).label

    def at(self, condition):
        """A condition within a sentence."""
        return texts.isolated(self.name(condition), 4 * NAME_LENGTH)

    def short(self, method):
        """A method's name where space is short."""
        return fitted(texts.cleaned(self.study.judge(method).short), 50, 10.5)

    def verdict(self, condition, method):
        """meets, high, low, open, or nothing where no criterion applies."""
        row = self.rows[condition, method]
        if row.verdict == Verdict.FAILS.value:
            return "high" if row.rate > self.limits_of(row)[1] else "low"
        return {Verdict.MEETS.value: "meets", Verdict.UNDECIDED.value: "open"}.get(row.verdict, "")

    def limits_of(self, row):
        """The limits a row is judged by."""
        if row.reading == "error":
            return self.band
        return self.study.criteria.power.band(self.level)

    def keeps_error(self, condition, method):
        """Whether a method keeps its error rate in the null condition of the same setting; None where there is none."""
        number = self.null_of.get(condition.setting.key)
        return None if number is None else self.verdict(number, method) == "meets"

    def error(self, condition, method):
        """An error rate as it is printed."""
        row = self.rows[condition, method]
        return shown.rate(row.rate, self.error_digits, row.rejections, row.replications)

    def detection(self, condition, method):
        """A detection rate as it is printed."""
        row = self.rows[condition, method]
        return shown.rate(row.rate, self.detection_digits, row.rejections, row.replications)

    def interval(self, condition, method):
        """A rate's interval as it is printed."""
        row = self.rows[condition, method]
        digits = self.error_digits if row.reading == "error" else self.detection_digits
        return shown.span(row.lower, row.upper, digits)

    @cached_property
    def varied(self):
        """Factors with more than one level, in the order of the file, without the difference."""
        levels = self.study.factors.levels
        return [factor for factor in levels if factor != "difference" and len(levels[factor]) > 1]

    @cached_property
    def null_differences(self):
        """Names of the differences under which what is compared is equal."""
        return list(dict.fromkeys(one.levels["difference"] for one in self.nulls))

    def name(self, condition, factors=None, difference=None):
        """A condition by its levels of the factors that vary; its difference where several are alike otherwise."""
        names = [condition.levels[factor] for factor in (self.varied if factors is None else factors)]
        several = self.null_differences if condition.is_null else self.target_differences
        if len(several) > 1 if difference is None else difference:
            names.append(condition.levels["difference"])
        if not names:
            return self.words.only_condition()
        return ", ".join(texts.shortened(name, NAME_LENGTH) for name in names)

    @cached_property
    def target_differences(self):
        """Names of the differences that must be found."""
        return list(dict.fromkeys(one.levels["difference"] for one in self.targets))

    def deciding(self, conditions, most=MOST_PANELS):
        """The conditions to be shown: all in the file's order where they fit, else the most telling ones first."""
        if len(conditions) <= most:
            return list(conditions)
        return self.telling(conditions)[:most]

    def listed(self, conditions):
        """The conditions that tables list, in the file's order: all, or the most telling ones of very many."""
        return sorted(self.deciding(conditions, MOST_LISTED), key=lambda one: one.number)

    def telling(self, conditions):
        """Conditions by how near they bring each method to its limits, the methods taking turns."""
        order = sorted(self.decision.standings, key=lambda one: (one is not self.lead, not one.possible))
        by_method = [
            sorted(conditions, key=lambda one, m=standing.name: -self.strain(one, m)) for standing in order
        ]
        return list(dict.fromkeys(one for turn in zip(*by_method, strict=True) for one in turn))

    def strain(self, condition, method):
        """How near a method is to its limits of error in the setting of a condition; above 1 is outside."""
        number = self.null_of.get(condition.setting.key)
        if number is None:
            return -self.rows[condition.number, method].rate
        return wording.excess(self.study, self.rows[number, method]._asdict())
