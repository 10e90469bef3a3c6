"""Page: the whole report as one HTML file, and its figures as files."""

import json
from concurrent.futures import ThreadPoolExecutor
from functools import cache
from importlib.resources import files

from jinja2 import Environment, PackageLoader, StrictUndefined
from markupsafe import Markup, escape

from workbench import texts
from workbench.look import STEPS, palette
from workbench.report import annexes, evidence
from workbench.report.asked import asked
from workbench.report.book import Book
from workbench.report.calibration import calibration
from workbench.report.decision import decision
from workbench.report.drawing import Drawing, body, variable
from workbench.report.figure import swatch
from workbench.report.pairs import pairs
from workbench.report.populations import Populations
from workbench.report.power import power
from workbench.report.rates import detections, error_map
from workbench.report.regret import regret
from workbench.report.shown import prose

FEW = 1000
"""Below so many replications a report says that it is exploratory."""

LARGE = 1500
"""With more rows in the annexes a browser lays out only the tables in view."""

LONGEST_TITLE = 200

ON_A_PAGE = 6
"""A figure of at most so many panels fits a printed page."""

FONTS = (
    '--text:system-ui,-apple-system,"Segoe UI",Roboto,"Noto Sans","Liberation Sans",Arial,sans-serif;'
    '--mono:ui-monospace,"Cascadia Mono","DejaVu Sans Mono",monospace;'
)


@cache
def environment():
    """The Jinja environment of pages: everything is escaped, and a value that is missing is an error."""
    made = Environment(
        loader=PackageLoader("workbench", "words/en/report"),
        autoescape=True,
        undefined=StrictUndefined,
        trim_blocks=True,
        lstrip_blocks=True,
    )
    made.filters |= {
        "prose": prose,
        "short": texts.shortened,
        "ranges": evidence.ranges,
        "sizes": sizes,
        "whole": whole,
        "breakable": breakable,
    }
    made.globals["swatch"] = swatch_element
    return made


def sizes(numbers):
    """Sizes of groups as one text."""
    return " / ".join(map(str, numbers[:12])) + (" / …" if len(numbers) > 12 else "")


def whole(sheet):
    """A class for figures that fit a printed page and are not to be broken."""
    return " whole" if len(sheet.panels) <= ON_A_PAGE else ""


def breakable(label):
    """A name that may be broken behind its dashes."""
    return Markup("–<wbr>").join(escape(label).split("–"))


def swatch_element(slot, leads):
    """A piece of a method's line with its mark, for the key of a figure."""
    drawing = Drawing(36, 13)
    swatch(drawing, 0, 6.5, slot, leads)
    return Markup(
        f'<svg width="36" height="13" viewBox="0 0 36 13" aria-hidden="true">{body(drawing, variable)}</svg>'
    )


def style(title, plan, digest):
    """The page's style sheet: colours by role for light, dark and print, then everything else."""
    light, dark = (
        "".join(f"--{name}:{colour};" for name, colour in palette(is_dark).items())
        for is_dark in (False, True)
    )
    steps = "".join(f".k{k}{{background:var(--s{k});color:var(--t{k})}}" for k in STEPS)
    foot = f"plan {plan} · counts {digest}"
    corners = {"top-left": title, "top-right": "Workbench report", "bottom-left": foot}
    margin = "".join(f"@{place}{{content:{css_text(text)};{CORNER}}}" for place, text in corners.items())
    margin += f'@bottom-right{{content:counter(page) " / " counter(pages);{CORNER}}}'
    page = f"@page{{size:A4;margin:20mm 17mm;{margin}}}"
    return (
        f":root{{color-scheme:light dark;{FONTS}{light}}}"
        f"@media screen and (prefers-color-scheme:dark){{:root{{{dark}}}}}"
        f"@media print{{:root{{color-scheme:light}}}}{page}"
        f"{files('workbench.report').joinpath('style.css').read_text(encoding='utf-8')}{steps}"
    )


CORNER = "font:8pt sans-serif;color:#4a565f"


def css_text(text):
    """A text within a style sheet, none of its letters able to end it."""
    kept = "".join(letter if letter.isalnum() or letter in " .,:;()–-·%" else "\u2009" for letter in text)
    return json.dumps(kept, ensure_ascii=False)


class Report:
    """A report made of an outcome: its page and its figures."""

    def __init__(self, outcome):
        self.outcome, self.book = outcome, Book(outcome)
        populations = Populations(self.book)
        self.parts = {"populations": populations.sheet, "map": error_map(self.book)}
        for part in (calibration, power, pairs, regret):
            self.parts[part.__name__] = part(self.book)
        self.parts["further"] = populations.further()

    @property
    def sheets(self):
        """Every figure, in the order of the page."""
        shown = self.parts["map"] and self.parts["map"]["sheet"]
        named = [self.parts[name] for name in ("calibration", "power", "pairs", "regret")]
        first = [self.parts["populations"], shown, *named]
        return [sheet for sheet in first if sheet is not None] + self.parts["further"]

    @property
    def rows(self):
        """How many rows the tables of the first annex have."""
        return len(self.outcome.tables.rates) + len(self.outcome.tables.differences)

    def values(self):
        """Everything the page's templates need."""
        book, study = self.book, self.book.study
        title = texts.shortened(study.title, LONGEST_TITLE)
        plan, digest = study.key, self.outcome.tables.digest[:16]
        return self.parts | {
            "title": title,
            "plan": plan,
            "digest": digest,
            "style": style(texts.shortened(study.title, 70), plan, digest),
            "groups": study.factors.groups,
            "scale": study.question.scale,
            "lead": book.label(book.lead.name),
            "large": self.rows > LARGE,
            "all": len(book.conditions),
            "listed": len(book.listed(self.outcome.conditions)),
            "few": study.simulation.replications < FEW,
            "asked": asked(book),
            "decision": decision(book),
            "detections": detections(book),
            "hypotheses": evidence.hypotheses(book),
            "theory": evidence.theory(book),
            "undefined": evidence.undefined(book),
            "branches": evidence.branches(book),
            "every_number": annexes.every_number(book),
            "every_difference": annexes.every_difference(book),
            "settings": annexes.settings(book),
            "unexamined": annexes.not_examined(book),
            "repeat": annexes.repeat(book),
            "references": annexes.references(book),
        }

    def html(self):
        """The page as text."""
        return environment().get_template("report.html").render(self.values())

    def files(self):
        """{name: bytes} of every figure as SVG and PNG; one is packed while the next is painted."""
        with ThreadPoolExecutor(1) as pool:
            made = {name: pool.submit(pack) for sheet in self.sheets for name, pack in sheet.files()}
        return {name: waiting.result() for name, waiting in made.items()}
