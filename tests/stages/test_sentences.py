"""Sentences of a decision: the templates that hold their words, and the code that chooses among them."""

import ast
import re
import subprocess
import sys
from pathlib import Path
from types import SimpleNamespace

import pytest
from jinja2 import UndefinedError

from workbench import sentences, wording
from workbench.texts import bare
from workbench.words import phrases

NOUNS, SAY = phrases("nouns"), phrases("decision")
ROW = {"rate": "9 %", "limits": "8 to 10 %", "counted": "", "levels": ["few", "wide"], "condition": 3}
TEMPLATES = Path(wording.__file__).parent / "words" / "en"
NASTY = ["{{ 7*7 }}", "<b>wide</b> & deep", "{% raw %}", "{# gone #}", "two  spaces", "no\u00a0\u00a0break"]


def asked_for(name):
    """Names that the code takes from a set of phrases, as in SAY.use."""
    tree = ast.parse(Path(sentences.__file__).read_text(encoding="utf-8"))
    nodes = [node for node in ast.walk(tree) if isinstance(node, ast.Attribute)]
    return {node.attr for node in nodes if isinstance(node.value, ast.Name) and node.value.id == name}


def test_every_sentence_of_the_template_is_said_and_every_one_said_is_there():
    assert asked_for("SAY") == set(vars(SAY))


def test_every_noun_is_used_by_the_sentences():
    text = (TEMPLATES / "decision.jinja").read_text(encoding="utf-8")
    assert not [noun for noun in vars(NOUNS) if f"{{{{ {noun}(" not in text]


@pytest.mark.parametrize("call", [SAY.use, SAY.tie, SAY.rows_open, lambda: SAY.nearest("a", {"rate": "9 %"})])
def test_a_missing_value_is_an_error(call):
    with pytest.raises(UndefinedError):
        call()


def test_a_sentence_that_is_not_there_is_an_error():
    with pytest.raises(AttributeError):
        _ = SAY.shout


@pytest.mark.parametrize("name", NASTY)
def test_what_a_user_wrote_goes_through_unchanged(name):
    assert SAY.use(name) == f"Use the {name}."
    assert SAY.tie([name, "b"]) == f"The {name} and b tie."
    assert SAY.nearest("a", ROW | {"levels": [name]}).endswith(f" at {name}.")


def test_the_level_names_of_a_file_reach_the_sentence_unchanged():
    study = SimpleNamespace(
        factors=SimpleNamespace(levels={"sizes": dict.fromkeys(NASTY, 1), "difference": {"none": 0}})
    )
    for name in NASTY:
        row = {"sizes": name, "rate": 0.09, "lower": 0.08, "upper": 0.1, "mcse": 0.02, "condition": 1}
        told = bare(SAY.nearest("a", sentences.shown(study, row)))
        assert told == f"The nearest is the a: it errs in 9\u00a0% of studies (8.0 to 10.0\u00a0%) at {name}."


def test_line_breaks_of_a_template_leave_no_trace():
    """A sentence of three lines, and one with a no-break space at its very end."""
    told = SAY.asks_otherwise("medians", "means")
    assert told.startswith("tests equal medians, which") and told.endswith("does not let it in")
    assert not re.search(r"\s\s|\n", told)
    assert NOUNS.place({"levels": ["\u00a0a\u00a0"]}) == "\u00a0a\u00a0"


def test_one_is_singular_and_more_are_plural():
    assert [NOUNS.conditions(number) for number in (1, 2, 1500)] == [
        "1 condition",
        "2 conditions",
        "1,500 conditions",
    ]
    assert SAY.rows_open(1, "a", ROW, "0.075").startswith(
        "1 row is open; the hardest is the a at few, wide: 9 %"
    )
    assert SAY.rows_open(2, "a", ROW, "0.075").startswith("2 rows are open; the hardest")


def test_documents_and_terminal_have_the_same_nouns():
    for number in (1, 2, 1500):
        assert NOUNS.conditions(number) == wording.conditions(number)
    for hypothesis in ("means", "mixed"):
        assert NOUNS.tested(hypothesis) == wording.plural(hypothesis)
    for levels in ({"sizes": {"few": 1, "many": 2}}, {"sizes": {"few": 1}}):
        study = SimpleNamespace(factors=SimpleNamespace(levels=levels))
        row = {"sizes": "few", "condition": 3}
        shown = {"levels": wording.levels_at(study, row), "condition": 3}
        assert bare(NOUNS.place(shown)) == wording.place(study, row)


def test_a_side_of_the_band_has_its_own_sentence():
    assert SAY.errs_too_often(ROW, "0.075") == (
        "errs in 9 % of studies (8 to 10 %) at few, wide, more often than the limit of 0.075 allows"
    )
    assert SAY.errs_too_rarely(ROW, "0.025").endswith(
        "at few, wide, less often than the limit of 0.025 allows"
    )


def test_checking_a_file_does_without_templates():
    code = "import sys, workbench.cli.check; print('jinja2' in sys.modules)"
    found = subprocess.run([sys.executable, "-c", code], capture_output=True, text=True, check=True).stdout
    assert found.strip() == "False"
