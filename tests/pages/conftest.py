"""Reports made from small runs, for every test of this folder."""

import json
from dataclasses import dataclass
from pathlib import Path

import pytest

from workbench.documents import write_documents
from workbench.run import run
from workbench.study import parse

ORDINARY = """\
format = 1
[study]
title = "Yield of four rations"
outcome = "milk yield"
unit = "kg"
compare = "means"
centre = 20.0
alpha = [0.05, 0.01]
note = "Invented."
[groups]
names = ["hay", "silage", "maize", "pasture"]
[vary.sizes]
equal = [10, 10, 10, 10]
falling = [15, 12, 9, 7]
[vary.shape]
skewed = { family = "skew_normal", skewness = 0.3 }
[vary.spread]
equal = [2.0, 2.0, 2.0, 2.0]
rising = [1.0, 1.0, 2.0, 6.0]
[vary.difference]
none = [0.0, 0.0, 0.0, 0.0]
half = [0.0, 0.0, 1.0, 2.0]
relevant = [0.0, 0.0, 2.0, 4.0]
double = [0.0, 0.0, 4.0, 8.0]
[vary.disturbance]
exact = []
rounded = [{ kind = "round", to = 0.5 }]
[[leave_out]]
spread = "rising"
disturbance = "exact"
[methods]
use = ["classical_f", "welch_f", "kruskal_wallis", "first_look"]
[methods.routes.first_look]
check = "shapiro_residuals"
level = 0.001
if_passed = "classical_f"
if_failed = "welch_f"
[criteria]
power = { at = "relevant", least = 0.5 }
size = { lower = 0.02, upper = 0.09 }
tie = 0.03
[simulation]
seed = 11
replications = 2000
"""

LOGARITHMIC = """\
format = 1
[study]
outcome = "nitrate"
unit = "mg/kg"
compare = "geometric means"
scale = "multiplicative"
centre = 6.0
[groups]
names = ["fallow", "rye", "vetch"]
[vary.sizes]
only = [9, 7, 8]
[vary.spread]
equal = [0.7, 0.7, 0.7]
falling = [0.9, 0.7, 0.5]
[vary.difference]
none = [1.0, 1.0, 1.0]
half = [1.0, 1.2, 1.5]
relevant = [1.0, 1.5, 2.3]
[methods]
use = ["welch_f", "log_f", "kruskal_wallis"]
[criteria]
admit = ["kruskal_wallis"]
power = { at = "relevant", least = 0.5 }
[simulation]
replications = 1000
"""


def small(methods, sizes, replications=2000, more="", criteria=""):
    """An experiment of three groups, its text put together."""
    return (
        f'format = 1\n[study]\ntitle = "Small"\ncompare = "means"\n[vary.sizes]\nonly = {sizes}\n{more}\n'
        f"[methods]\nuse = {json.dumps(methods)}\n[criteria]\n{criteria}\n"
        f"[simulation]\nseed = 3\nreplications = {replications}\n"
    )


DIFFERENCES = "[vary.difference]\nnone = [0, 0, 0]\nsome = [0, 0, 1.5]"

UNEQUAL = '[vary.spread]\nwide = [1, 2, 5]\n[vary.shape]\nnormal = "normal"\nskewed = "exponential"'

ATTACKS = [
    "<script>alert(1)</script>",
    "</style><img src=x onerror=alert(2)>",
    "</svg></title></pre></bdi><iframe src=//example.invalid>",
    '" onload="alert(3)" \' onfocus=\'alert(4)',
    "{{ 7*7 }} {% raw %} {# gone #} &lt; &amp;#60;",
    "$x^2$ \\frac12 _a_",
    "שלום עולם مرحبا",
    "\u202eoverridden\u202c \u2067turned\u2069 \u2066kept",
    "日本語の題名と水準の名前",
    "nothing\u0000 and\u0007 bell",
    "-->]]><!--",
    "👩\u200d🔬 e\u0301\u0302 \ue000\u2028",
]
"""Texts that would break a page, a style sheet, a drawing or a template if they were taken for one."""

LONG = "long " * 1000
UNBROKEN = "x" * 5000

UNPRINTABLE = "no \u0085 letter \u009b here \ufdd0 nor here \U0001fffe"
"""Characters that TOML lets through as they are, and HTML does not."""


def hostile():
    """An experiment in which every text of a user's own choice is an attack."""

    def quoted(text):
        return json.dumps(text, ensure_ascii=False)

    every = " ".join(ATTACKS)
    names = [*ATTACKS[:4], UNBROKEN]
    route = quoted(ATTACKS[0] + ATTACKS[7])
    zeros, some = [0.0] * 5, [0.0, 0.0, 0.0, 1.0, 2.0]
    differences = {"none " + ATTACKS[2]: zeros, "half" + every: [0.5 * step for step in some], every: some}
    levels = "".join(f"{quoted(name)} = {steps}\n" for name, steps in differences.items())
    return (
        f"format = 1\n# {ATTACKS[0]} {ATTACKS[2]}\n[study]\ntitle = {quoted(every + LONG)}\n"
        f"outcome = {quoted(ATTACKS[1] + every)}\nunit = {quoted(ATTACKS[8] + ATTACKS[3] + UNBROKEN)}\n"
        f'note = {quoted(every + LONG + UNBROKEN)}\ncompare = "means"\n'
        f"[groups]\nnames = [{', '.join(map(quoted, names))}]\n"
        f"[vary.sizes]\n{quoted(ATTACKS[4])} = [7, 6, 5, 7, 8]\n{quoted(UNBROKEN)} = [9, 9, 9, 9, 9]\n"
        f'[vary.shape]\n{quoted(ATTACKS[6])} = "normal"\n{quoted(ATTACKS[9])} = "laplace"\n'
        f"[vary.spread]\n{quoted(ATTACKS[5])} = [1, 1, 1, 1, 1]\n{quoted(ATTACKS[10])} = [1, 1, 2, 2, 2]\n"
        f"[vary.difference]\n{levels}"
        f"[vary.disturbance]\n{quoted(LONG)} = [{{ kind = 'round', to = 0.1 }}]\n"
        f"[[leave_out]]\nshape = {quoted(ATTACKS[9])}\nspread = {quoted(ATTACKS[10])}\n"
        f"[[leave_out]]\nshape = {quoted(ATTACKS[9])}\nsizes = {quoted(UNBROKEN)}\n"
        f"[methods]\nuse = ['welch_f', 'classical_f', {route}, {quoted(UNBROKEN)}]\n"
        f"[methods.routes.{route}]\n{WAYS}[methods.routes.{quoted(UNBROKEN)}]\n{WAYS}"
        f"[criteria]\npower = {{ at = {quoted(every)}, least = 0.4 }}\n"
        "[simulation]\nreplications = 400\n"
    )


WAYS = "check = 'levene_median'\nif_passed = 'classical_f'\nif_failed = 'welch_f'\n"

TEXTS = {
    "ordinary": ORDINARY,
    "logarithmic": LOGARITHMIC,
    "none_eligible": small(["classical_f"], [20, 9, 4], more=f"{UNEQUAL}\n{DIFFERENCES}"),
    "undecided": small(["classical_f", "welch_f"], [6, 5, 4], 300, DIFFERENCES),
    "tie": small(["classical_f", "welch_f"], [12, 12, 12], 4000, DIFFERENCES),
    "zero_rejections": small(["kruskal_wallis"], [2, 2, 2], 500, DIFFERENCES, 'admit = ["kruskal_wallis"]'),
    "all_undefined": small(
        ["classical_f", "welch_f"],
        [5, 5, 5],
        300,
        "[vary.difference]\nnone = [0, 0, 0]\nsome = [0, 0, 1.5]\n"
        '[vary.disturbance]\ncoarse = [{ kind = "round", to = 1000 }]',
    ),
    "no_null": small(
        ["classical_f", "welch_f"],
        [8, 7, 6],
        500,
        "[vary.difference]\nsome = [0, 0, 1]\nmore = [0, 0, 2]",
        'power = { at = "some", least = 0.5 }',
    ),
    "unprintable": small(["welch_f"], [5, 5, 5], 300, DIFFERENCES.replace("some", f'"{UNPRINTABLE}"')),
    "hostile": hostile(),
}


@dataclass(frozen=True)
class Made:
    """A report that was written: what it is of, where it lies, and its text."""

    outcome: object
    path: Path
    text: str


class Reports:
    """Reports by name, each made when it is first asked for."""

    def __init__(self, folder):
        self.folder, self.made = folder, {}

    def __getitem__(self, name):
        if name not in self.made:
            outcome = run(parse(TEXTS[name], "x.toml"), self.folder / name, 1)
            write_documents(outcome)
            path = self.folder / name / "report.html"
            self.made[name] = Made(outcome, path, path.read_text(encoding="utf-8"))
        return self.made[name]


@pytest.fixture(scope="session")
def reports(tmp_path_factory):
    """Every report of TEXTS by its name."""
    return Reports(tmp_path_factory.mktemp("reports"))


@pytest.fixture(params=TEXTS)
def report(request, reports):
    """Each report in turn."""
    return reports[request.param]
