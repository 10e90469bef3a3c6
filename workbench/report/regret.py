"""Regret: what a method detects less than the best one that keeps its error rate everywhere."""

from dataclasses import dataclass

from workbench.report import shown
from workbench.report.axes import Axis, bottom_axis
from workbench.report.drawing import Drawing, fitted
from workbench.report.figure import Sheet

WIDTH, ROW, LEFT = 340, 50, 2


@dataclass(frozen=True)
class Given:
    """What one method gives up in one condition."""

    condition: object
    value: float
    mcse: float
    rival: str
    trusted: bool
    """Whether the method keeps its error rate in the setting."""


def given_up(book, standing):
    """[Given] of a method over the conditions that count; only rivals not shown to fail anywhere are compared with."""
    rivals = [
        other.name for other in book.decision.standings if other.possible and other.name != standing.name
    ]
    found = []
    for condition in book.targets:
        best = max(
            ((*book.pairs[condition.number, rival, standing.name][:2], rival) for rival in rivals),
            default=None,
        )
        value, mcse, rival = best if best and best[0] > 0 else (0.0, 0.0, "")
        found.append(Given(condition, value, mcse, rival, bool(book.keeps_error(condition, standing.name))))
    return found


def most(given):
    """The largest of what is given up; None where nothing was compared."""
    return max(given, key=lambda one: one.value, default=None)


def rivalled(book):
    """Whether there is a rival to give something up against."""
    return sum(one.possible for one in book.decision.standings) > 1 and bool(book.targets)


def regret(book):
    """The figure of what is given up, as a Sheet; None where there is nothing to compare with."""
    if not rivalled(book):
        return None
    given = {standing.name: given_up(book, standing) for standing in book.decision.standings}
    worst = most(given[book.lead.name])
    lead = book.called(book.lead.name)
    if worst.value > 0:
        amount, place = shown.points(worst.value, worst.mcse), book.at(worst.condition)
        title = book.findings.gives_up(lead, amount, place)
    else:
        title = book.findings.gives_up_nothing(lead)
    return Sheet(book, "regret", title, [("", panel(book, given))], keyed=False, most=len(book.targets))


def panel(book, given):
    """The Drawing: a row a method, a mark a condition, the largest as an upright bar with its number."""
    names = [*given]
    height = ROW * len(names) + 44
    drawing = Drawing(WIDTH, height, label(book, given))
    top = max(max((one.value for one in some), default=0) for some in given.values())
    axis = Axis(0, max(top * 1.04, 0.01), LEFT + 10, WIDTH - 40)
    for place, name in enumerate(names):
        row(book, drawing, axis, ROW * place + 34, name, given[name])
    bottom_axis(drawing, axis, height - 38, book.words.given_up_axis())
    return drawing


def row(book, drawing, axis, y, name, given):
    """One method's marks."""
    bold = name in book.decision.chosen
    drawing.text(LEFT, y - 18, fitted(book.label(name), WIDTH - 60, 11), "ink", 11, bold=bold)
    drawing.line([(axis.start, y), (axis.stop, y)], "rule", 0.8)
    last = {}
    for one in sorted(given, key=lambda one: one.value):
        x = float(axis(one.value))
        lane = next((lane for lane in (0, -6, 6, -12, 12) if x - last.get(lane, -99) >= 7), None)
        if lane is None:
            continue
        last[lane] = x
        if name in book.drawn:
            slot = book.slot(name)
            drawing.mark(slot.mark, x, y + lane, slot.role, 7, hollow=not one.trusted)
        else:
            drawing.disc(x, y + lane, 2.4, "ink2" if one.trusted else "paper", "ink2")
    worst = most(given)
    x = float(axis(worst.value))
    drawing.line([(x, y - 14), (x, y + 14)], "ink", 1.8)
    drawing.text(x + 6, y + 4, shown.rate(worst.value, book.detection_digits), "ink", 10.5, "start", bold)


def label(book, given):
    """What a reader who cannot see the figure is told."""
    told = [
        (book.label(name), shown.rate(most(some).value, book.detection_digits))
        for name, some in given.items()
    ]
    return book.words.regret_panel(told)
