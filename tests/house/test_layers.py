"""Imports go downward: a room imports only rooms that stand before it in this list."""

import ast
from pathlib import Path

import workbench

HOUSE = Path(workbench.__file__).parent

ROOMS = """
errors keys cores texts records registry places streams quadrature population ranks moments groups outliers
relabelled tails limits significance histogram numbers look words
shapes disturbances estimands methods checks measures criteria routes
reader sections factors judges study mechanism grid theory
chunk plan ledger pool
table calibration verdict wording sentences decide sensitivity outcome
report
run documents estimate
cli front
""".split()

OWN_SHELF_ONLY = {"shapes", "disturbances", "estimands", "methods", "checks", "measures", "criteria"}
"""Shelves that import no other shelf; routes may import methods and checks."""

LAZY = {"workbench/cli/__init__.py"}
"""Files that may import inside a function: the command line loads a command when it is called."""


def sources():
    """(path, syntax tree) of every file of the package."""
    return [(path, ast.parse(path.read_text(encoding="utf-8"))) for path in sorted(HOUSE.rglob("*.py"))]


def room_of(path):
    """The room a file belongs to: its folder on the ground of the package, or its own name there."""
    return path.relative_to(HOUSE).parts[0].removesuffix(".py")


def imported(tree):
    """Names of the rooms of this package that a file imports."""
    found = set()
    for node in ast.walk(tree):
        if isinstance(node, ast.ImportFrom) and node.module and node.module.split(".")[0] == "workbench":
            names = node.module.split(".")[1:2] or [alias.name for alias in node.names]
            found |= set(names)
    return found


def test_every_room_has_its_place():
    rooms = {room_of(path) for path, _ in sources()} - {"__init__"}
    assert rooms == set(ROOMS)


def test_imports_go_downward():
    wrong = []
    for path, tree in sources():
        room = room_of(path)
        if room == "__init__":
            continue
        for other in imported(tree) - {room}:
            if ROOMS.index(other) > ROOMS.index(room):
                wrong.append(f"{path.name} of {room} imports {other}")
    assert not wrong


def test_shelves_do_not_import_one_another():
    shelves = OWN_SHELF_ONLY | {"routes"}
    wrong = [
        f"{path.relative_to(HOUSE)} imports {other}"
        for path, tree in sources()
        if room_of(path) in OWN_SHELF_ONLY
        for other in imported(tree) & shelves - {room_of(path)}
    ]
    assert not wrong


def test_no_import_is_deferred():
    wrong = []
    for path, tree in sources():
        if path.relative_to(HOUSE.parent).as_posix() in LAZY:
            continue
        for function in (node for node in ast.walk(tree) if isinstance(node, ast.FunctionDef)):
            inner = [node for node in ast.walk(function) if isinstance(node, ast.Import | ast.ImportFrom)]
            wrong += [f"{path.name}:{node.lineno}" for node in inner]
    assert not wrong


def test_random_numbers_come_from_one_file():
    wrong = []
    for path, _ in sources():
        text = path.read_text(encoding="utf-8")
        if path.name != "streams.py" and any(
            word in text for word in ("numpy.random", "np.random", "default_rng")
        ):
            wrong.append(path.name)
    assert not wrong
