"""The house is in order: sizes, names, docstrings, words."""

import ast
import importlib
import re
import subprocess
import sys
from pathlib import Path

import pytest

import workbench
from workbench.checks import CHECKS
from workbench.criteria import CRITERIA
from workbench.disturbances import DISTURBANCES
from workbench.estimands import ESTIMANDS
from workbench.methods import METHODS
from workbench.shapes import SHAPES

HOUSE = Path(workbench.__file__).parent
ROOT = HOUSE.parent
FILES = sorted(HOUSE.rglob("*.py"))
TREES = {path: ast.parse(path.read_text(encoding="utf-8")) for path in FILES}

SHELVES = {
    "shapes": SHAPES,
    "disturbances": DISTURBANCES,
    "estimands": ESTIMANDS,
    "methods": METHODS,
    "checks": CHECKS,
    "criteria": CRITERIA,
}

LONGEST_FILE, LONGEST_FUNCTION = 300, 60


def functions():
    """(path, function) of every function and method of the package."""
    return [
        (path, node)
        for path, tree in TREES.items()
        for node in ast.walk(tree)
        if isinstance(node, ast.FunctionDef | ast.AsyncFunctionDef)
    ]


def lines(node):
    """How many lines a definition takes."""
    return node.end_lineno - node.lineno + 1


def test_files_are_short():
    assert not [path.name for path in FILES if path.read_text(encoding="utf-8").count("\n") > LONGEST_FILE]


def test_functions_are_short():
    sizes = sorted(lines(function) for _, function in functions())
    assert sizes[len(sizes) // 2] <= 10, "half of all functions take ten lines at most"
    assert sizes[int(len(sizes) * 0.9)] <= 45
    assert sizes[-1] <= LONGEST_FUNCTION


def test_every_file_says_in_one_line_what_it_is():
    wrong = [path for path, tree in TREES.items() if not (ast.get_docstring(tree) or "").strip()]
    wrong += [
        path
        for path, tree in TREES.items()
        if len((ast.get_docstring(tree) or "").split("\n\n")[0].split("\n")) > 2
    ]
    assert not wrong


def abstract_names():
    """Names of methods that an abstract class of the package describes."""
    found = set()
    for tree in TREES.values():
        for node in ast.walk(tree):
            if isinstance(node, ast.ClassDef):
                found |= {
                    item.name
                    for item in node.body
                    if isinstance(item, ast.FunctionDef) and ast.get_docstring(item)
                }
    return found


def test_everything_public_has_a_docstring():
    described = abstract_names()
    wrong = []
    for path, tree in TREES.items():
        for node in ast.walk(tree):
            if not isinstance(node, ast.FunctionDef | ast.ClassDef) or node.name.startswith("_"):
                continue
            if not ast.get_docstring(node) and node.name not in described and not is_inner(tree, node):
                wrong.append(f"{path.name}:{node.lineno} {node.name}")
    assert not wrong


def is_inner(tree, node):
    """Whether a function stands within another function, or overrides what a library describes."""
    for outer in ast.walk(tree):
        if isinstance(outer, ast.FunctionDef) and outer is not node and node in ast.walk(outer):
            return True
    return node.name in ("list_commands", "get_command", "resolve_command", "format_commands")


def test_no_class_could_be_taken_for_a_test():
    named = [
        node.name for tree in TREES.values() for node in ast.walk(tree) if isinstance(node, ast.ClassDef)
    ]
    assert not [name for name in named if name.startswith("Test")]


@pytest.mark.parametrize("folder", SHELVES)
def test_every_file_on_a_shelf_puts_one_part_there_under_its_own_name(folder):
    shelf = SHELVES[folder]
    base = {"shape", "disturbance", "estimand", "method", "check", "criterion", "__init__"}
    files = {path.stem for path in (HOUSE / folder).glob("*.py")} - base
    assert files == {name.replace(" ", "_") for name in shelf.names()}
    for name in shelf.names():
        part = shelf[name]
        assert part.__module__ == f"workbench.{folder}.{name.replace(' ', '_')}"
        assert re.search(r"\(\d{4}", part.cite), f"{name} names no dated source"
        assert part.title()


def test_importing_the_package_loads_nothing_heavy():
    code = (
        "import sys, workbench; print([name for name in ('numpy', 'scipy', 'pandas') if name in sys.modules])"
    )
    found = subprocess.run([sys.executable, "-c", code], capture_output=True, text=True, check=True).stdout
    assert found.strip() == "[]"


def test_no_file_speaks_of_machines_or_other_programs():
    words = (
        r"/(work|tmp|home|root)/|localhost:\d|Pr\(>|\bSig\.|signif\. codes|\*{3}|\b(TO[D]O|FIX[M]E|X{3})\b"
    )
    tracked = subprocess.run(
        ["git", "ls-files"], cwd=ROOT, capture_output=True, text=True, check=True
    ).stdout.split("\n")
    wrong = []
    for name in filter(None, tracked):
        path = ROOT / name
        if (
            path.suffix in (".py", ".md", ".toml", ".csv", ".json", ".html", ".jinja", ".css")
            and path.name != Path(__file__).name
        ):
            text = path.read_text(encoding="utf-8")
            wrong += [f"{name}: {match.group()}" for match in re.finditer(words, text)]
    assert not wrong


def test_every_module_imports_by_itself():
    for path in FILES:
        name = ".".join(path.relative_to(ROOT).with_suffix("").parts).removesuffix(".__init__")
        importlib.import_module(name)
