"""No number moves unless the version of the part that gives it was raised."""

import importlib.util
import json
from pathlib import Path

SCRIPT = Path(__file__).with_name("make_counts.py")

ALLOWED = 1
"""Another processor may round a p-value the other way and so move a single count."""


def script():
    """The script that made the file."""
    found = importlib.util.spec_from_file_location("make_counts", SCRIPT)
    module = importlib.util.module_from_spec(found)
    found.loader.exec_module(module)
    return module


def test_counts_are_those_that_were_frozen():
    made = script()
    frozen, found = json.loads(made.FILE.read_text(encoding="utf-8")), made.counts()
    assert found["mechanism"] == frozen["mechanism"]
    assert set(found["counts"]) == set(frozen["counts"]), "a version was raised: run the script again"
    for setting, methods in frozen["counts"].items():
        assert set(found["counts"][setting]) == set(methods)
        for method, numbers in methods.items():
            moved = [
                abs(one - other) for one, other in zip(found["counts"][setting][method], numbers, strict=True)
            ]
            assert max(moved) <= ALLOWED, (
                f"{setting}, {method}: {numbers} became {found['counts'][setting][method]}"
            )
