"""What the commands print, and how they end."""

import json
import subprocess
import sys
from pathlib import Path

import numpy as np
import pandas as pd
import pytest

import workbench as wb
from workbench import cli
from workbench import run as running
from workbench.cli.progress import Reporter
from workbench.errors import WorkbenchError
from workbench.methods import METHODS
from workbench.run import Progress
from workbench.study import parse
from workbench.theory import exact

TEXT = """\
format = 1
[study]
compare = "means"
[groups]
names = ["A", "B", "C"]
[vary.sizes]
uneven = [5, 8, 12]
[vary.spread]
equal = [1, 1, 1]
falling = [3, 2, 1]
[vary.difference]
none = [0, 0, 0]
some = [0, 0, 2]
[methods]
use = ["classical_f", "welch_f", "kruskal_wallis", "rule"]
[methods.routes.rule]
check = "levene_median"
if_passed = "classical_f"
if_failed = "welch_f"
[criteria]
size = { upper = 0.07 }
power = { at = "some", least = 0.3 }
[simulation]
seed = 3
replications = 20000
"""


@pytest.fixture
def folder(tmp_path, monkeypatch):
    """A folder with the experiment x.toml, made the working directory."""
    (tmp_path / "x.toml").write_text(TEXT, encoding="utf-8")
    monkeypatch.chdir(tmp_path)
    return tmp_path


def told(capsys, *words):
    """(exit status, the JSON document on standard output) of a command."""
    status = cli.status_of(cli.workbench, [*words, "--json"])
    return status, json.loads(capsys.readouterr().out)


def test_check_tells_conditions_truths_and_cost(folder, capsys):
    status, found = told(capsys, "check", "x.toml")
    assert status == 0 and found["seconds"] > 0 and found["bytes"] > 0
    assert [one["condition"] for one in found["conditions"]] == [1, 2, 3, 4]
    first, last = found["conditions"][0], found["conditions"][-1]
    assert set(first["holds"]) == {"means", "medians", "trimmed means", "distributions", "stochastic size"}
    assert first["truth"] == "null" and last["truth"] == "alternative" and last["spread"] == "falling"
    assert last["groups"][2] == {
        **{"size": 12, "mean": 2.0, "median": 2.0, "sd": 1.0, "skewness": 0.0},
        **{"excess_kurtosis": 0.0, "trimmed_mean": 2.0, "geometric_mean": None},
    }
    assert sorted(path.name for path in folder.iterdir()) == ["x.toml"]


def test_what_rounding_makes_unequal_is_told(folder, capsys):
    """A coarse grid off the common mean moves the means of narrow and wide groups apart."""
    coarse = TEXT.replace(
        "[methods]", '[vary.disturbance]\ncoarse = [{ kind = "round", to = 2 }]\n[methods]', 1
    )
    coarse = coarse.replace('compare = "means"', 'compare = "means"\ncentre = 0.6').replace(
        "[3, 2, 1]", "[3, 2, 0.4]"
    )
    (folder / "y.toml").write_text(coarse, encoding="utf-8")
    found = told(capsys, "check", "y.toml")[1]["conditions"]
    assert [one["equal_as_recorded"] for one in found] == [True, True, False, True]
    assert "means" not in found[2]["holds"] and found[2]["truth"] == "null"
    assert cli.status_of(cli.workbench, ["check", "y.toml"]) == 0
    assert (
        "Not equal as recorded: the null holds, but not after the disturbances, in 3."
        in capsys.readouterr().out
    )


def test_run_and_decide_tell_the_decision(folder, capsys):
    status, found = told(capsys, "run", "x.toml", "--workers", "1")
    assert status == 0
    assert found["status"] == "chosen" and found["chosen"] == found["eligible"] == ["welch_f"]
    assert set(found["excluded"]) == {"classical_f", "kruskal_wallis", "rule"}
    assert len(found["plan"]) == 16 and len(found["digest"]) == 64
    assert told(capsys, "decide", "results/x") == (0, found)
    assert told(capsys, "status", "results/x")[1]["finished"] is True


def test_the_table_has_the_columns_that_are_promised(folder):
    result = wb.read("x.toml").run(workers=1)
    table = pd.read_csv(folder / "results" / "x" / "table.csv", keep_default_na=False)
    wanted = "condition sizes shape spread difference disturbance groups total truth method hypothesis alpha reading "
    wanted += "replications rejections undefined rate mcse lower upper exact exact_error verdict"
    assert [name for name in table.columns if name in wanted.split()] == wanted.split()
    assert set(table["verdict"]) <= {"meets", "fails", "undecided", ""}
    assert list(result.table.columns) == list(table.columns) and len(result.table) == len(table) == 16
    known = table[(table["method"] == "classical_f") & (table["difference"] == "none")]
    assert float(known[known["spread"] == "equal"]["exact"].iloc[0]) == 0.05
    assert table[table["method"] == "welch_f"]["exact"].eq("").all()
    route = table[table["method"] == "rule"].set_index("condition")["rejections"]
    branches = pd.read_csv(folder / "results" / "x" / "branches.csv")
    assert branches.groupby("condition")["taken"].sum().eq(20000).all()
    assert branches.groupby("condition")["rejections"].sum().eq(route).all()


def test_a_notebook_has_the_same_reach(folder):
    study = wb.read("x.toml")
    assert list(study.conditions["condition"]) == [1, 2, 3, 4]
    assert study.conditions.loc[3, "mean of C"] == 2.0
    assert "<table" in study._repr_html_()
    result = study.run(workers=1, replications=4000, out="out")
    assert result.decision.status.value in ("chosen", "tie", "undecided")
    assert result.differences["only_method"].sum() > 0
    assert "<p>" in result._repr_html_()
    with pytest.raises(wb.StudyError) as caught:
        (folder / "y.toml").write_text("format = 2\n", encoding="utf-8")
        wb.read("y.toml")
    assert len(caught.value.mistakes) > 1
    p = wb.methods["welch_f"].p_values([[1.2, 2.5, 0.7, 2.2, 4.6, 3.9]], [3, 3])
    assert p.shape == (1,) and "Welch" in wb.methods["welch_f"].cite
    assert wb.checks["levene_median"].p_values([[1.0, 2, 4, 2, 4, 9]], [3, 3])[0] > 0
    assert wb.shapes["lognormal"](sigma=0.6).true_quantities()["skewness"] == pytest.approx(2.2600839)


def test_methods_are_listed_with_their_sources(capsys):
    assert cli.status_of(cli.workbench, ["methods", "--json"]) == 0
    found = json.loads(capsys.readouterr().out)
    assert [one["name"] for one in found] == sorted(wb.methods)
    assert all(set(one) >= {"title", "hypothesis", "assumes", "undefined_when", "cite"} for one in found)


def test_disagreement_with_theory_ends_with_1_and_names_the_row(folder, capsys, monkeypatch):
    monkeypatch.setattr(exact, "remembered", lambda sizes, spreads, means, level: (0.06, 0.0))
    assert cli.status_of(cli.workbench, ["run", "x.toml", "--workers", "1", "--quiet"]) == 1
    message = capsys.readouterr().err
    assert "disagree" in message and "condition 1 classical_f" in message
    report = (folder / "results" / "x" / "report.html").read_text(encoding="utf-8")
    assert "Simulation and theory disagree in 4 rates, so this report must not be used." in report
    assert cli.status_of(cli.workbench, ["report", "results/x", "--quiet"]) == 1


def test_report_writes_the_documents_again_from_the_ledger(folder, capsys):
    assert cli.status_of(cli.workbench, ["run", "x.toml", "--quiet"]) == 0
    place = folder / "results" / "x"
    before = {
        path: path.read_bytes()
        for path in [*place.glob("*.csv"), place / "report.html", *place.glob("figures/*")]
    }
    for path in before:
        path.unlink()
    capsys.readouterr()
    status, found = told(capsys, "report", "results/x")
    assert status == 0 and found["report"] == "results/x/report.html" and len(found["figures"]) >= 6
    assert {path: path.read_bytes() for path in before} == before
    assert cli.status_of(cli.workbench, ["report", "results/x"]) == 0
    assert capsys.readouterr().out == "results/x/report.html\n"


def test_report_of_nothing_or_of_half_a_result_writes_nothing(folder, capsys, monkeypatch):
    (folder / "empty").mkdir()
    assert cli.status_of(cli.workbench, ["report", "empty"]) == 2
    assert "there is no ledger here" in capsys.readouterr().err and not list((folder / "empty").iterdir())

    def stop(progress):
        if progress.done:
            raise KeyboardInterrupt

    with pytest.raises(KeyboardInterrupt):
        running.run(parse(TEXT, "x.toml"), folder / "half", 1, stop)
    assert cli.status_of(cli.workbench, ["report", "half"]) == 3
    assert "No verdict yet" in capsys.readouterr().err
    assert [path.name for path in (folder / "half").iterdir()] == ["ledger.sqlite"]


def test_a_notebook_writes_its_report_where_it_likes(folder):
    result = wb.read("x.toml").run(workers=1, replications=400, out="out")
    assert not (folder / "out" / "report.html").exists()
    result.report("mine.html")
    assert (folder / "mine.html").read_text(encoding="utf-8").startswith("<!DOCTYPE html>")
    with pytest.raises(WorkbenchError, match="cannot be written"):
        result.report("no/such/folder/mine.html")


def test_a_count_is_impossible_only_beyond_five_standard_errors():
    """2,000,000 tables' worth of chance: 3e-7 on a side is 5 standard errors where counts are large."""
    n, p = np.full(2, 100_000), np.full(2, 0.05)
    spread = np.sqrt(0.05 * 0.95 * 100_000)
    assert not exact.too_far(5000 + np.array([4.8, -4.8]) * spread, n, p, np.zeros(2)).any()
    assert exact.too_far(5000 + np.array([5.4, -5.4]) * spread, n, p, np.zeros(2)).all()
    assert not exact.too_far(5000 + np.array([5.4, -5.4]) * spread, n, p, np.full(2, 1e-3)).any()
    assert not exact.too_far(np.array([3.0]), np.array([2000]), np.array([0.0001]), np.zeros(1)).any()


@pytest.mark.parametrize(
    ("words", "status"),
    [
        (["--help"], 0),
        (["--version"], 0),
        (["simulate"], 2),
        (["run"], 2),
        (["run", "x.toml", "--workers", "0"], 2),
        ([], 2),
    ],
)
def test_the_command_line_itself_ends_as_promised(words, status, folder, capsys):
    assert cli.status_of(cli.workbench, words) == status
    assert "Traceback" not in capsys.readouterr().err


def test_a_closed_pipe_leaves_no_traceback(folder):
    command = f"{sys.executable} -c 'from workbench.cli import main; main()' methods | head -1"
    found = subprocess.run(command, shell=True, capture_output=True, text=True, check=True, cwd=folder)
    assert found.stdout == f"{METHODS.names()[0]}\n" and found.stderr == ""


def test_an_output_that_cannot_be_written_is_refused_with_a_sentence(folder, capsys):
    (folder / "file").write_text("no folder", encoding="utf-8")
    assert cli.status_of(cli.workbench, ["run", "x.toml", "--out", "file"]) == 2
    assert "file: cannot be made a result directory" in capsys.readouterr().err


class Screen:
    """What a terminal, or a file, is given to show."""

    def __init__(self, terminal):
        self.terminal, self.text = terminal, ""

    def isatty(self):
        return self.terminal

    def write(self, text):
        self.text += text

    def flush(self):
        pass


@pytest.mark.parametrize("terminal", [True, False])
def test_progress_tells_share_rate_and_time_left(terminal, monkeypatch):
    clock = iter(np.arange(0, 1000, 40.0))
    monkeypatch.setattr("workbench.cli.progress.time.monotonic", lambda: next(clock))
    screen = Screen(terminal)
    report = Reporter(2000, screen)
    for done in (0, 25, 100):
        report(Progress(done, 100))
    assert " 25 %  1,250 tests a second, about 2\u00a0min left" in screen.text
    assert screen.text.endswith("100 %  2,500 tests a second, 80\u00a0s in all\n")
    assert ("\r" in screen.text) is terminal


def test_the_demonstrations_pass_check(capsys):
    for path in sorted((Path(cli.__file__).parents[2] / "experiments").glob("*.toml")):
        assert cli.status_of(cli.workbench, ["check", str(path)]) == 0
        assert "Nothing was run." in capsys.readouterr().out
