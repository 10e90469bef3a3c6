"""Speed and memory as ratios: python tests/benchmarks/speed.py [--long]. Not collected by pytest.

Each ratio is the median over rounds in which both sides are timed one after the other, because the speed of a shared
machine drifts. --long adds two workers against one, and memory at 12,000,000 replications.
"""

import resource
import statistics
import subprocess
import sys
import tempfile
import time
from pathlib import Path

import numpy as np
from scipy import stats

from workbench import run
from workbench.estimands import ESTIMANDS
from workbench.ledger import Ledger
from workbench.methods import METHODS
from workbench.plan import Plan
from workbench.records import Setting
from workbench.shapes import SHAPES
from workbench.streams import Lane, stream
from workbench.study import parse

SIZES, SPREADS = (10, 20, 30), (3.0, 2.0, 1.0)
THREE = ("classical_f", "welch_f", "brown_forsythe_f")
FOUR = (*THREE, "kruskal_wallis")
ROUNDS = 7
LONG = 10_000_000


def setting():
    """Three normal groups of unequal sizes and spreads."""
    means = ESTIMANDS.make("means")
    return Setting((SHAPES.make("normal"),) * 3, means, "additive", 0.0, SIZES, SPREADS, ())


def plan(methods, levels, replications):
    """The plan of one setting under so many differences."""
    differences = tuple((0.0, 0.0, 0.1 * place) for place in range(levels))
    return Plan(1, replications, (0.05,), tuple(map(METHODS.make, methods)), {setting(): differences})


def whole_run(methods, levels=1, replications=400_000):
    """Seconds of a run with one worker, from drawing to the ledger on disk."""
    with tempfile.TemporaryDirectory() as folder, Ledger.writing(Path(folder) / "l", {"format": 1}) as ledger:
        work = plan(methods, levels, replications)
        start = time.perf_counter()
        run.simulate(work, ledger, 1, lambda progress: None)
        return time.perf_counter() - start


def drawing(replications=100_000):
    """Seconds NumPy needs to draw the same normals."""
    rng = stream(1, Lane.DATA, 0, "0" * 16)
    start = time.perf_counter()
    for _ in range(replications // 1000):
        rng.standard_normal((sum(SIZES), 1000))
    return time.perf_counter() - start


def scipy_loop(replications=100):
    """Seconds of a plain loop over SciPy's functions: F, Welch, Kruskal–Wallis, and F* worked out by hand."""
    rng = stream(1, Lane.DATA, 0, "0" * 16)
    start = time.perf_counter()
    for _ in range(replications):
        groups = [spread * rng.standard_normal(size) for size, spread in zip(SIZES, SPREADS, strict=True)]
        stats.f_oneway(*groups), stats.f_oneway(*groups, equal_var=False), stats.kruskal(*groups)
        brown_forsythe(groups)
    return time.perf_counter() - start


def brown_forsythe(groups):
    """F* of one dataset, as one would write it in a notebook."""
    total = sum(map(len, groups))
    centre = np.concatenate(groups).mean()
    between = sum(len(group) * (group.mean() - centre) ** 2 for group in groups)
    parts = np.array([(1 - len(group) / total) * group.var(ddof=1) for group in groups])
    df = parts.sum() ** 2 / (parts**2 / (np.array(SIZES) - 1)).sum()
    return stats.f.sf(between / parts.sum(), len(groups) - 1, df)


def scipy_vectorised(replications=2000):
    """Seconds of SciPy's functions over an axis: F, Welch, Kruskal–Wallis (F* has no such function)."""
    rng = stream(1, Lane.DATA, 0, "0" * 16)
    start = time.perf_counter()
    drawn = [
        spread * rng.standard_normal((replications, size))
        for size, spread in zip(SIZES, SPREADS, strict=True)
    ]
    for test in (
        stats.f_oneway,
        lambda *groups, axis: stats.f_oneway(*groups, axis=axis, equal_var=False),
        stats.kruskal,
    ):
        test(*drawn, axis=1)
    return time.perf_counter() - start


def ratio(one, other):
    """Median over rounds of seconds of one by seconds of the other, each a pair (function, replications)."""
    found = []
    for _ in range(ROUNDS):
        first, second = one[0]() / one[1], other[0]() / other[1]
        found.append(first / second)
    return statistics.median(found)


def report(what, found, wanted, at_most=True):
    """Print one line of the table."""
    good = found <= wanted if at_most else found >= wanted
    print(
        f"{what:66s} {found:9.2f}  {'at most' if at_most else 'at least'} {wanted:7.2f}  {'yes' if good else 'NO'}"
    )


def commands():
    """Seconds of whole commands."""

    def seconds(*words):
        start = time.perf_counter()
        subprocess.run(
            [sys.executable, "-c", "from workbench.cli import main; main()", *words], capture_output=True
        )
        return time.perf_counter() - start

    with tempfile.TemporaryDirectory() as folder:
        wrong = Path(folder) / "wrong.toml"
        wrong.write_text("format = 2\n", encoding="utf-8")
        report("workbench --help, seconds", min(seconds("--help") for _ in range(7)), 0.3)
        report(
            "workbench check of a wrong file, seconds",
            min(seconds("check", str(wrong)) for _ in range(7)),
            0.5,
        )


STUDY = """format = 1
study.compare = "means"
vary.sizes.a = [10, 20, 30]
vary.spread.a = [3, 2, 1]
methods.use = ["classical_f", "welch_f", "brown_forsythe_f", "kruskal_wallis"]
simulation.replications = {replications}
"""


LARGE = """format = 1
study.compare = "means"
methods.use = ["classical_f", "welch_f", "brown_forsythe_f", "kruskal_wallis", "one", "other"]
methods.routes.one = { check = "levene_median", if_passed = "classical_f", if_failed = "welch_f" }
methods.routes.other = { check = "shapiro_residuals", if_passed = "welch_f", if_failed = "kruskal_wallis" }
criteria = { size = { upper = 0.08 }, power = { at = "d3", least = 0.5 } }
simulation.replications = 2000
[vary.shape]
normal = "normal"
uniform = "uniform"
laplace = "laplace"
exponential = "exponential"
skewed = { family = "lognormal", sigma = 0.3 }
"""


def large_study():
    """The text of a study of 400 conditions and six methods."""
    sizes = [f"vary.sizes.s{place} = [{4 + place}, {6 + place}, {9 + place}]" for place in range(5)]
    spreads = [f"vary.spread.r{place} = [1, {1 + place / 2}, {1 + place}]" for place in range(4)]
    differences = [f"vary.difference.d{place} = [0, 0, {place / 2}]" for place in range(4)]
    return "\n".join([*sizes, *spreads, *differences, LARGE])


def reports():
    """Seconds that documents of a finished result take as a whole command, and the size of the page."""
    demonstration = (Path(__file__).parents[2] / "experiments" / "lap_shear.toml").read_text(encoding="utf-8")
    cases = {
        "report of the demonstration, seconds": (demonstration, 5),
        "report of 400 conditions and six methods, seconds": (large_study(), 20),
    }
    for name, (text, wanted) in cases.items():
        with tempfile.TemporaryDirectory() as folder:
            run.run(parse(text, "x.toml"), folder, 2)
            words = [sys.executable, "-c", "from workbench.cli import main; main()", "report", folder]
            start = time.perf_counter()
            subprocess.run(words, capture_output=True, check=True)
            report(name, time.perf_counter() - start, wanted)
            page = (Path(folder) / "report.html").stat().st_size / 1e6
    report("its page, MB", page, 15)


def long_run(workers):
    """Seconds of a long run, from experiment to decision, once the program is loaded."""
    with tempfile.TemporaryDirectory() as folder:
        start = time.perf_counter()
        run.run(parse(STUDY.format(replications=LONG), "x.toml"), folder, workers)
        return time.perf_counter() - start


def memory(workers):
    """Largest resident memory of any process of a long run, in MB."""
    with tempfile.TemporaryDirectory() as folder:
        path = Path(folder) / "x.toml"
        path.write_text(STUDY.format(replications=LONG), encoding="utf-8")
        words = [
            sys.executable,
            "-c",
            "from workbench.cli import main; main()",
            "run",
            str(path),
            "--out",
            folder,
        ]
        subprocess.run([*words, "--workers", str(workers), "--quiet"], capture_output=True, check=False)
    return resource.getrusage(resource.RUSAGE_CHILDREN).ru_maxrss / 1024


def main():
    """Print the table."""
    draw = (drawing, 100_000)
    report(
        "F, Welch, Brown–Forsythe: whole run by drawing alone",
        ratio((lambda: whole_run(THREE), 400_000), draw),
        2.1,
    )
    report("the same with Kruskal–Wallis", ratio((lambda: whole_run(FOUR), 400_000), draw), 2.8)
    ten = (lambda: whole_run(THREE, 10), 400_000)
    report(
        "ten differences by one: F, Welch, Brown–Forsythe",
        ratio(ten, (lambda: whole_run(THREE), 400_000)),
        2.5,
    )
    four = (lambda: whole_run(FOUR), 400_000)
    report("loop over SciPy by whole run, four methods", ratio((scipy_loop, 100), four), 800, at_most=False)
    report(
        "SciPy over an axis by whole run, four methods",
        ratio((scipy_vectorised, 2000), four),
        5,
        at_most=False,
    )
    commands()
    reports()
    if "--long" in sys.argv:
        report(f"one worker by two, {LONG:,} replications", long_run(1) / long_run(2), 1.8, at_most=False)
        report(f"largest process at {LONG:,} replications, MB", memory(2), 300)


if __name__ == "__main__":
    main()
