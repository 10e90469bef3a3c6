"""A run: the same counts whatever the workers, the order, the interruptions, or what else was asked for."""

import json
import os
import signal
import sqlite3
import subprocess
import sys
import time
from contextlib import closing

import numpy as np
import pytest

from workbench import cli, run
from workbench.errors import WorkbenchError, WorkError
from workbench.ledger import Ledger
from workbench.plan import plan_of
from workbench.records import difference_key
from workbench.study import parse, with_overrides

TEXT = """\
format = 1
[study]
compare = "means"
alpha = [0.05, 0.01]
[vary.sizes]
even = [6, 7, 8]
[vary.shape]
normal = "normal"
skewed = { family = "lognormal", sigma = 0.5 }
[vary.spread]
equal = [1, 1, 1]
rising = [1, 2, 3]
[vary.difference]
none = [0, 0, 0]
some = [0, 0, 1.5]
[vary.disturbance]
clean = []
rounded = [{ kind = "round", to = 0.5 }]
[methods]
use = ["classical_f", "welch_f", "kruskal_wallis", "rule"]
[methods.routes.rule]
check = "levene_median"
if_passed = "classical_f"
if_failed = "welch_f"
[criteria]
power = { at = "some", least = 0.5 }
[simulation]
seed = 11
replications = 5000
"""


def table_of(text, directory, workers=1):
    """The bytes of table.csv of a run of the text in the directory."""
    run.run(parse(text, "x.toml"), directory, workers)
    return (directory / "table.csv").read_bytes()


def counts(outcome):
    """{(level names, method, alpha): (rejections, undefined)}."""
    names = ["sizes", "shape", "spread", "difference", "disturbance", "method", "alpha"]
    return {
        tuple(row[names]): (row["rejections"], row["undefined"]) for _, row in outcome.tables.rates.iterrows()
    }


@pytest.fixture(scope="module")
def once(tmp_path_factory):
    """The bytes of the table of a plain run with one worker."""
    return table_of(TEXT, tmp_path_factory.mktemp("once"))


def test_two_workers_give_the_bytes_of_one(once, tmp_path):
    assert table_of(TEXT, tmp_path, workers=2) == once


def test_a_run_done_again_leaves_every_byte_as_it_was(tmp_path):
    table_of(TEXT, tmp_path)
    before = {path.name: path.read_bytes() for path in tmp_path.iterdir()}
    assert set(before) == {
        *("ledger.sqlite", "table.csv", "differences.csv", "branches.csv", "calibration.csv"),
        *("manifest.json", "experiment.toml"),
    }
    table_of(TEXT, tmp_path)
    del before["ledger.sqlite"]  # opening it for writing is noted in its first bytes
    assert {name: (tmp_path / name).read_bytes() for name in before} == before


def test_a_run_cut_off_is_taken_up_where_it_stopped(once, tmp_path):
    seen = []

    def stop_after_three(progress):
        seen.append(progress.done)
        if len(seen) == 4:
            raise KeyboardInterrupt

    with pytest.raises(KeyboardInterrupt):
        run.run(parse(TEXT, "x.toml"), tmp_path, 1, stop_after_three)
    with Ledger.reading(tmp_path / run.LEDGER) as ledger:
        left = plan_of(parse(TEXT, "x.toml"), run.conditions(parse(TEXT, "x.toml"))).tasks(ledger)
    assert 0 < sum(len(task.chunks) for task in left) < 24
    assert table_of(TEXT, tmp_path) == once


def test_more_replications_extend_a_result(tmp_path):
    short, long = TEXT.replace("= 5000", "= 1500"), TEXT
    first = counts(run.run(parse(short, "x.toml"), tmp_path / "a", 1))
    with Ledger.reading(tmp_path / "a" / run.LEDGER) as ledger:
        setting = run.conditions(parse(short, "x.toml"))[0].setting
        judge = parse(short, "x.toml").judges[0].method
        early = ledger.rejected(setting.key, run_key((0, 0, 0)), judge.key(), 0.05, 1)
    extended = counts(run.run(parse(long, "x.toml"), tmp_path / "a", 1))
    with Ledger.reading(tmp_path / "a" / run.LEDGER) as ledger:
        later = ledger.rejected(setting.key, run_key((0, 0, 0)), judge.key(), 0.05, 3)
    assert extended == counts(run.run(parse(long, "x.toml"), tmp_path / "b", 1))
    assert all(extended[place][0] >= count for place, (count, _) in first.items())
    assert np.array_equal(later[:250], early)


def run_key(difference):
    """The key under which a difference is stored."""
    return difference_key(tuple(float(number) for number in difference))


def test_fewer_replications_count_the_first_of_those_there(tmp_path):
    whole = counts(run.run(parse(TEXT.replace("= 5000", "= 4001"), "x.toml"), tmp_path / "a", 1))
    run.run(parse(TEXT, "x.toml"), tmp_path / "b", 1)
    assert counts(run.run(parse(TEXT.replace("= 5000", "= 4001"), "x.toml"), tmp_path / "b", 1)) == whole


def test_what_else_is_asked_for_changes_no_count(tmp_path):
    """Adding a method, a difference, a level or a spread later leaves the counts that were there."""
    first = counts(run.run(parse(TEXT, "x.toml"), tmp_path, 1))
    more = TEXT.replace('"welch_f", "kru', '"brown_forsythe_f", "welch_f", "kru').replace(
        "0.01]", "0.01, 0.1]"
    )
    more = more.replace("none = [0, 0, 0]", "little = [0, 0, 0.2]\nnone = [0, 0, 0]").replace(
        "equal =", "wide = [3, 3, 3]\nequal ="
    )
    second = counts(run.run(parse(more, "x.toml"), tmp_path, 1))
    assert set(first) < set(second)
    assert {place: second[place] for place in first} == first
    assert second == counts(run.run(parse(more, "x.toml"), tmp_path / "fresh", 1))


def test_another_seed_gives_other_counts_and_is_not_added_to_a_ledger(tmp_path):
    first = counts(run.run(parse(TEXT, "x.toml"), tmp_path / "a", 1))
    other = parse(TEXT.replace("seed = 11", "seed = 12"), "x.toml")
    assert counts(run.run(other, tmp_path / "b", 1)) != first
    with pytest.raises(WorkbenchError, match="seed 11"):
        run.run(other, tmp_path / "a", 1)


def test_overrides_go_into_the_experiment_that_is_kept(tmp_path):
    study = with_overrides(parse(TEXT, "x.toml"), seed=5, replications=2000)
    run.run(study, tmp_path, 1)
    kept = parse((tmp_path / "experiment.toml").read_text(encoding="utf-8"), "x.toml")
    assert (kept.simulation.seed, kept.simulation.replications) == (5, 2000)
    assert kept.key == study.key


def test_a_ledger_that_contradicts_itself_is_refused(tmp_path):
    run.run(parse(TEXT, "x.toml"), tmp_path, 1)
    with closing(sqlite3.connect(tmp_path / run.LEDGER, isolation_level=None)) as db:
        db.execute("DELETE FROM rejection WHERE level = 0.01")
        db.execute("UPDATE rejection SET bits = zeroblob(251) WHERE chunk = 0")
    with pytest.raises(WorkError, match="came out different"):
        run.run(parse(TEXT, "x.toml"), tmp_path, 1)


@pytest.mark.parametrize("blob", ["x'0905'", "x''", "zeroblob(9)"])
def test_damaged_work_is_told_with_a_sentence(blob, tmp_path, capsys):
    run.run(parse(TEXT, "x.toml"), tmp_path, 1)
    with closing(sqlite3.connect(tmp_path / run.LEDGER, isolation_level=None)) as db:
        db.execute(f"UPDATE rejection SET bits = {blob} WHERE chunk = 1")
    assert cli.status_of(cli.workbench, ["decide", str(tmp_path)]) == 1
    assert "damaged or of another version" in capsys.readouterr().err


def test_a_file_that_is_no_ledger_is_refused_with_a_sentence(tmp_path, capsys):
    (tmp_path / run.LEDGER).write_bytes(b"this is no database, it only has the name of one" * 100)
    (tmp_path / "x.toml").write_text(TEXT, encoding="utf-8")
    for words in (
        ["run", str(tmp_path / "x.toml"), "--out", str(tmp_path)],
        ["status", str(tmp_path)],
        ["decide", str(tmp_path)],
    ):
        assert cli.status_of(cli.workbench, words) == 2
        assert "cannot be used as a ledger" in capsys.readouterr().err


def test_reading_commands_write_nothing(tmp_path, capsys):
    run.run(parse(TEXT, "x.toml"), tmp_path, 1)
    before = {path.name: (path.stat().st_mtime_ns, path.stat().st_size) for path in tmp_path.iterdir()}
    assert cli.status_of(cli.workbench, ["status", str(tmp_path), "--json"]) == 0
    assert json.loads(capsys.readouterr().out)["finished"] is True
    assert cli.status_of(cli.workbench, ["decide", str(tmp_path), "--json"]) in (0, 3)
    assert {
        path.name: (path.stat().st_mtime_ns, path.stat().st_size) for path in tmp_path.iterdir()
    } == before


def test_deciding_before_the_work_is_done_gives_no_verdict(tmp_path, capsys):
    def stop(progress):
        if progress.done:
            raise KeyboardInterrupt

    with pytest.raises(KeyboardInterrupt):
        run.run(parse(TEXT, "x.toml"), tmp_path, 1, stop)
    assert cli.status_of(cli.workbench, ["decide", str(tmp_path), "--json"]) == 3
    assert json.loads(capsys.readouterr().out)["status"] == "undecided"
    assert cli.status_of(cli.workbench, ["status", str(tmp_path), "--json"]) == 0
    assert 0 < json.loads(capsys.readouterr().out)["share"] < 1


def command(directory, workers):
    """A run of the text in a process of its own."""
    words = [sys.executable, "-c", "from workbench.cli import main; main()", "run", "x.toml", "--out", "out"]
    return subprocess.Popen(
        [*words, "--workers", str(workers)],
        cwd=directory,
        start_new_session=True,
        stdout=subprocess.DEVNULL,
        stderr=subprocess.DEVNULL,
    )


def members(group):
    """The processes of a process group that are alive."""
    found = subprocess.run(
        ["ps", "-eo", "pid=,pgid=,stat="], capture_output=True, text=True, check=True
    ).stdout
    rows = [line.split() for line in found.splitlines()]
    return [pid for pid, pgid, stat in rows if int(pgid) == group and not stat.startswith("Z")]


def gone(group, seconds=10):
    """Whether no process of a group is left within some seconds."""
    end = time.monotonic() + seconds
    while members(group) and time.monotonic() < end:
        time.sleep(0.1)
    return not members(group)


@pytest.mark.heavy
def test_killed_and_interrupted_runs_end_in_the_same_table(tmp_path):
    """kill -9 of the parent, Ctrl-C and a killed worker: no process is left, and the bytes come out the same."""
    text = TEXT.replace("replications = 5000", "replications = 250000")
    (tmp_path / "x.toml").write_text(text, encoding="utf-8")
    wanted = table_of(text, tmp_path / "plain", workers=2)
    for blow, after in ((signal.SIGKILL, 2.5), (signal.SIGINT, 2.8), (signal.SIGKILL, 3.4)):
        process = command(tmp_path, 2)
        time.sleep(after)
        if blow is signal.SIGINT:
            os.killpg(process.pid, blow)
            assert process.wait(20) == 130
        else:
            process.send_signal(blow)
            process.wait(20)
        assert gone(process.pid)
    process = command(tmp_path, 2)
    time.sleep(2.2)
    workers = [int(pid) for pid in members(process.pid) if int(pid) != process.pid]
    if workers:
        os.kill(max(workers), signal.SIGKILL)
    process.wait(120)
    assert process.returncode in (0, 3)
    assert gone(process.pid)
    assert (tmp_path / "out" / "table.csv").read_bytes() == wanted
