"""The report says what the tables say: every number is found in them, every figure becomes a file."""

import itertools
import re
from html.parser import HTMLParser

import numpy as np
import pandas as pd
import pytest

from workbench import run
from workbench.documents import write_documents
from workbench.look import STEPS, centre
from workbench.report.drawing import body
from workbench.report.page import Report
from workbench.study import parse
from workbench.texts import bare

TEXT = """\
format = 1
[study]
title = "A small study"
outcome = "yield"
unit = "g"
compare = "means"
alpha = [0.05, 0.01]
[groups]
names = ["A", "B", "C"]
[vary.sizes]
few = [4, 5, 6]
more = [8, 9, 10]
[vary.shape]
normal = "normal"
skewed = { family = "lognormal", sigma = 0.4 }
[vary.spread]
equal = [1, 1, 1]
falling = [3, 2, 1]
[vary.difference]
none = [0, 0, 0]
half = [0, 0, 1.5]
full = [0, 0, 3]
[methods]
use = ["classical_f", "welch_f", "kruskal_wallis", "rule"]
[methods.routes.rule]
check = "levene_median"
if_passed = "classical_f"
if_failed = "welch_f"
[criteria]
size = { lower = 0.0, upper = 0.09 }
power = { at = "full", least = 0.3 }
[simulation]
seed = 11
replications = 2000
"""


@pytest.fixture(scope="module")
def outcome(tmp_path_factory):
    """The small study, run and documented."""
    found = run.run(parse(TEXT, "x.toml"), tmp_path_factory.mktemp("result"), 1)
    write_documents(found)
    return found


@pytest.fixture(scope="module")
def html(outcome):
    """The text of its report."""
    return (outcome.directory / "report.html").read_text(encoding="utf-8")


@pytest.fixture(scope="module")
def page(html):
    """The report, read."""
    return read(html)


SILENT = {"style", "svg", "pre", "code", "title"}
"""Elements whose text is no sentence."""


class Page(HTMLParser):
    """Texts of a page with the elements they stand in; its numbers with full values; its tables row by row."""

    def __init__(self):
        super().__init__()
        self.open, self.texts, self.values, self.tables = [], [], [], []
        self.labels, self.links = [], []

    def handle_starttag(self, tag, attrs):
        """Note an element that opens."""
        given = dict(attrs)
        if tag in ("meta", "wbr"):
            return
        self.open.append(tag)
        if "aria-label" in given:
            self.labels.append(given["aria-label"])
        if "href" in given:
            self.links.append(given["href"])
        if tag == "data":
            self.values.append([float(given["value"]), ""])
        elif tag == "table":
            self.tables.append({"class": given.get("class", ""), "rows": []})
        elif tag == "tr":
            self.tables[-1]["rows"].append([])
        elif tag in ("td", "th"):
            self.tables[-1]["rows"][-1].append("")

    def handle_startendtag(self, tag, attrs):
        """Pass over an element without content."""

    def handle_endtag(self, tag):
        """Note an element that closes."""
        assert self.open.pop() == tag

    def handle_data(self, text):
        """Note a piece of text."""
        if not SILENT & set(self.open):
            self.texts.append(text)
        if "data" in self.open:
            self.values[-1][1] += text
        if ("td" in self.open or "th" in self.open) and "svg" not in self.open:
            self.tables[-1]["rows"][-1][-1] += text


def read(text):
    """The Page of a text."""
    page = Page()
    page.feed(text)
    return page


def tables_of(outcome):
    """The tables as anyone reads them from their files."""
    names = ("table", "differences", "branches", "calibration")
    return {name: pd.read_csv(outcome.directory / f"{name}.csv", keep_default_na=False) for name in names}


def numbers_of(outcome):
    """Every number of the tables, and those of them that follow by their rules: what undefined results would add."""
    found = []
    for table in tables_of(outcome).values():
        columns = [pd.to_numeric(table[name], errors="coerce") for name in table.columns]
        found += [column.dropna().to_numpy(dtype=float) for column in columns]
    return np.unique(np.concatenate(found))


def test_every_number_with_a_full_value_is_in_the_tables(outcome, page):
    known = numbers_of(outcome)
    assert len(page.values) > 100
    counts = {float(n) for n in tables_of(outcome)["table"].groupby("method")["undefined"].sum()}
    for value, text in page.values:
        near = np.abs(known - abs(value)).min()
        assert near < 1e-12 or value in counts, f"{text} ({value!r}) is in no table"


def test_every_number_shows_the_value_it_stands_for(page):
    for value, text in page.values:
        plain = text.replace("\u2212", "-").replace(",", "").replace("\u00a0", " ")
        if " of " in plain:
            assert float(plain.split(" of ")[0]) in (0.0, 2000.0)
        elif plain[0] in "<>":
            assert (value < float(plain[2:])) == (plain[0] == "<")
        elif "." in plain and abs(float(plain)) > 1 >= abs(value):
            assert abs(float(plain) - 100 * value) <= 0.5 * 10.0 ** -len(
                plain.split(".")[1]
            )  # percentage points
        else:
            digits = len(plain.split(".")[1]) if "." in plain else 0
            assert abs(float(plain) - value) <= 10.0**-digits  # ends of intervals are rounded outwards


NUMBER = re.compile(r"(?<![\w.])\d+\.\d+(?![\w.])")


def test_every_number_in_a_sentence_is_in_the_tables_or_in_the_file(outcome, page):
    """Decimals in running text, as proportions or as percentages, against every number of the tables."""
    known = numbers_of(outcome)
    asked = {0.05, 0.01, 0.1, 0.09, 0.3, 0.95, 1.5, 3.0} | {0.4}
    theory = [float(word) for word in NUMBER.findall(outcome.agreement.sentence)]
    legend = {round(centre(step, 0.05), 3) for step in STEPS}
    strange = []
    for text in prose(page):
        for word in NUMBER.findall(text):
            half = 10.0 ** -len(word.split(".")[1])
            near = min(np.abs(known - float(word)).min(), np.abs(100 * known - float(word)).min())
            own = np.abs(100 * (1 - known) - float(word)).min()
            if min(near, own) > half and float(word) not in asked | set(theory) | legend:
                strange.append((word, text))
    assert not strange


def prose(page):
    """Texts of the first two parts of a report: decision and evidence."""
    whole = " ".join(page.texts)
    return [
        whole[whole.index("Decision") : whole.index("A Every number", whole.index("How far to trust it"))]
    ]


def rows_under(page, heading):
    """Rows of the annex's tables whose first heading cell is the given one."""
    for table in page.tables:
        rows = table["rows"]
        if "num" in table["class"] and heading in rows[0]:
            yield from rows[1:]


def test_the_annex_has_every_row_of_the_table_in_its_order(outcome, page):
    table = tables_of(outcome)["table"]
    shown = [row for row in rows_under(page, "Rejections") if len(row) == 8]
    assert len(shown) == len(table) == 24 * 4 * 2
    for cells, row in zip(shown, table.itertuples(), strict=True):
        label, level, rejections, rate, _, interval, undefined, verdict = cells
        assert label.lower() == bare(outcome.study.judge(row.method).label).lower()
        assert float(level) == row.alpha
        assert (
            int(rejections.replace(",", "")) == row.rejections
            and int(undefined.replace(",", "")) == row.undefined
        )
        low, high = (float(end) for end in interval.split(" to "))
        assert low <= row.lower <= low + 2e-4 * 10 and high - 2e-3 <= row.upper <= high
        if row.rejections not in (0, 2000) and rate[0] not in "<>":
            assert abs(float(rate) - row.rate) <= 0.5 * 10.0 ** -len(rate.split(".")[1]) + 1e-12
        assert (row.verdict == "" and not verdict) or row.verdict in verdict


def test_the_annex_has_every_paired_difference_in_its_order(outcome, page):
    table = tables_of(outcome)["differences"]
    table = table[table["alpha"] == 0.05]
    shown = [row for row in rows_under(page, "Only the first") if len(row) == 7]
    assert len(shown) == len(table) == 24 * 6
    for cells, row in zip(shown, table.itertuples(), strict=True):
        assert (
            int(cells[2].replace(",", "")) == row.only_method
            and int(cells[3].replace(",", "")) == row.only_rival
        )
        found = float(cells[4].replace("\u2212", "-"))
        assert abs(found - row.difference) <= 0.5 * 10.0 ** -len(cells[4].split(".")[1]) + 1e-12


def test_the_map_has_the_rate_and_verdict_of_each_condition_and_method(outcome, page):
    table = tables_of(outcome)["table"]
    table = table[(table["alpha"] == 0.05) & (table["reading"] == "error")]
    (shown,) = (one["rows"] for one in page.tables if one["class"] == "map")
    rows = [row for row in shown if len(row) == 5 and row[0] != "Condition"]
    assert len(rows) == 8
    for cells, (number, some) in zip(rows, table.groupby("condition"), strict=True):
        assert cells[0].startswith(str(number))
        for text, row in zip(cells[1:], some.itertuples(), strict=True):
            rate = NUMBER.findall(text)[0] if row.rejections else "0"
            assert abs(float(rate) - row.rate) <= 0.005 and row.verdict in text


def test_the_page_needs_nothing_from_outside(html, page):
    assert "<script" not in html and "@import" not in html and "url(" not in html
    assert all(link.startswith("#") for link in page.links)
    ids = set(re.findall(r'\bid="([^"]+)"', html))
    assert {link[1:] for link in page.links} <= ids


def test_every_figure_of_the_page_is_there_as_svg_and_png(outcome, html):
    numbers = {int(number) for number in re.findall(r'id="fig(\d+)"', html)}
    names = sorted(path.name for path in (outcome.directory / "figures").iterdir())
    assert {int(name[:2]) for name in names} == numbers == set(range(1, len(numbers) + 1))
    assert len(names) == 2 * len(numbers)
    for name in names:
        content = (outcome.directory / "figures" / name).read_bytes()
        assert content.startswith(b"\x89PNG" if name.endswith("png") else b"<?xml")


def test_a_report_is_the_same_bytes_again(outcome, html):
    assert Report(outcome).html() == html
    first, second = Report(outcome).files(), Report(outcome).files()
    assert first == second


def test_figures_of_another_report_are_taken_away_and_strange_files_kept(outcome):
    folder = outcome.directory / "figures"
    (folder / "99_power.svg").write_text("old", encoding="utf-8")
    (folder / "mine.svg").write_text("kept", encoding="utf-8")
    write_documents(outcome)
    assert not (folder / "99_power.svg").exists() and (folder / "mine.svg").exists()
    (folder / "mine.svg").unlink()


def test_references_are_those_of_the_parts_that_ran(html):
    annex = html[html.index('id="annex-e"') :]
    for name in (
        "Welch, B. L. (1951)",
        "Kruskal, W. H.",
        "Robust tests for the equality of variances",
        "Cohen",
    ):
        assert name.replace("&", "&amp;") in annex
    for name in ("Shapiro", "Royston", "The small sample behavior", "Bradley", "Sheppard"):
        assert name not in annex


def test_what_was_not_examined_names_what_the_file_leaves_out(html):
    annex = html[html.index('id="annex-c"') : html.index('id="annex-d"')]
    assert "smaller than 4 or larger than 10" in annex and "more than 3 times" in annex
    assert "brown forsythe f" in annex and "student t" in annex and "round" in annex
    assert "welch f" not in annex and "lognormal" not in annex


def test_a_condition_is_named_in_full_once_and_cut_elsewhere(tmp_path):
    text = TEXT.replace("few =", f'"{"a" * 300}" =').replace("replications = 2000", "replications = 50")
    report = Report(run.run(parse(text, "x.toml"), tmp_path, 1)).html()
    before, after = report.split("<h3>The file as it was run</h3>")
    assert before.count("a" * 300) == 1 and "a" * 300 in after


MANY = """\
uniform = "uniform"
laplace = "laplace"
exponential = "exponential"
heavy = { family = "student_t", df = 5 }
"""


@pytest.fixture(scope="module")
def wide(tmp_path_factory):
    """The report of a study with 18 kinds of data in 108 conditions."""
    text = TEXT.replace('normal = "normal"\n', 'normal = "normal"\n' + MANY)
    text = text.replace("equal = [1, 1, 1]\n", "equal = [1, 1, 1]\nrising = [1, 2, 3]\n")
    text = text.replace("replications = 2000", "replications = 20")
    return Report(run.run(parse(text, "x.toml"), tmp_path_factory.mktemp("wide"), 1))


def test_a_figure_has_at_most_twelve_panels_and_says_how_many_there_are(wide):
    assert all(len(sheet.panels) <= 12 for sheet in wide.sheets)
    html = wide.html()
    first, annex = html.split('id="annex-a"')
    assert "12 of 18, the others are in annex B" in first and "Shown are the 12 of 36 conditions" in first
    assert annex.count('<figure class="pop') == 2 and 'id="fig8"' in annex


def test_every_setting_has_its_populations_drawn_once(wide):
    sheets = [sheet for sheet in wide.sheets if sheet.name.startswith("populations")]
    drawn = [body(drawing, str) for sheet in sheets for _, drawing in sheet.panels]
    assert len(drawn) == len(set(drawn)) == 36


def test_no_heading_skips_a_level(wide):
    levels = [int(level) for level in re.findall(r"<h([1-6])", wide.html())]
    assert levels[0] == 1 and all(later <= before + 1 for before, later in itertools.pairwise(levels))


def test_few_replications_are_called_exploratory(wide, html):
    assert "Exploratory: 20 replications" in wide.html() and "Exploratory" not in html
