"""README, contributor's guide, help texts and code say the same."""

import re
from pathlib import Path

import pytest
from click.testing import CliRunner

from workbench import cli
from workbench.checks import CHECKS
from workbench.disturbances import DISTURBANCES
from workbench.methods import METHODS
from workbench.shapes import SHAPES

ROOT = Path(cli.__file__).parents[2]
README = (ROOT / "README.md").read_text(encoding="utf-8")
GUIDE = (ROOT / "DEVELOPERS.md").read_text(encoding="utf-8")


def blocks(text, kind):
    """The code blocks of a kind in a document."""
    return re.findall(rf"```{kind}\n(.*?)```", text, re.DOTALL)


def help_of(*words):
    """What --help prints for a command."""
    result = CliRunner().invoke(cli.workbench, [*words, "--help"], catch_exceptions=False)
    assert result.exit_code == 0
    return result.output


@pytest.mark.parametrize("name", cli.COMMANDS)
def test_every_command_helps_with_what_it_does_and_an_example(name):
    text = help_of(name)
    assert "Example:" in " ".join(text.split())
    assert f"workbench {name}" in text
    assert f"`workbench {name}" in README


def test_help_lists_every_command_with_its_first_sentence():
    listed = " ".join(help_of().split())
    for name, what in cli.COMMANDS.items():
        assert f"{name} {what}" in listed


def test_the_first_two_blocks_of_the_readme_do_all_set_up():
    first, second = blocks(README, "sh")[:2]
    assert first.count("\n") == second.count("\n") == 1
    assert "workbench run experiments/lap_shear.toml" in first
    assert "python -m pytest" in second


def test_ci_runs_exactly_the_test_command_of_the_readme():
    command = blocks(README, "sh")[1].strip()
    assert command in (ROOT / ".ci" / "run").read_text(encoding="utf-8").split("\n")


@pytest.mark.parametrize("shelf", [METHODS, CHECKS, SHAPES, DISTURBANCES], ids=lambda shelf: shelf.kind)
def test_the_readme_names_every_part(shelf):
    assert not [name for name in shelf.names() if f"`{name}`" not in README]


def test_the_guide_names_every_shelf_and_test_folder():
    folders = [path.name for path in (ROOT / "workbench").iterdir() if (path / "__init__.py").exists()]
    folders += [
        path.name for path in (ROOT / "tests").iterdir() if path.is_dir() and not path.name.startswith("_")
    ]
    assert not [name for name in folders if f"`{name}/`" not in GUIDE]


def test_the_python_in_the_documents_is_right():
    for text in (README, GUIDE):
        for block in blocks(text, "python"):
            compile(block, "document", "exec")


def test_every_picture_and_link_of_the_documents_is_there():
    for text in (README, GUIDE):
        plain = re.sub(r"```.*?```", "", text, flags=re.DOTALL)
        places = [place for place in re.findall(r"\]\(([^)#]+)\)", plain) if "://" not in place]
        assert not [place for place in places if not (ROOT / place).exists()]
    assert "results/lap_shear/report.png" in README
