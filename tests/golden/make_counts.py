"""Make counts.json: what every shape and disturbance gives under every method. python tests/golden/make_counts.py

Run it again only after the version of a part, or of the mechanism, was raised on purpose.
"""

import json
from pathlib import Path

import numpy as np

from workbench import mechanism
from workbench.checks import CHECKS
from workbench.chunk import judged
from workbench.disturbances import DISTURBANCES
from workbench.estimands import ESTIMANDS
from workbench.methods import METHODS
from workbench.outliers import RULES
from workbench.records import Setting, Task, Want
from workbench.routes.dropping import Dropping
from workbench.routes.route import Route
from workbench.routes.smallest import Smallest
from workbench.shapes import SHAPES

SHAPE_SETTINGS = {
    "lognormal": {"sigma": 0.6},
    "skew_normal": {"skewness": 0.7},
    "student_t": {"df": 5.0},
    "gamma": {"shape": 2.0},
    "contaminated_normal": {"fraction": 0.1, "factor": 4.0},
}
DISTURBANCE_SETTINGS = {"round": {"to": 0.5}}

FILE = Path(__file__).with_name("counts.json")


METHOD_SETTINGS = {
    "permutation_f": {"permutations": 99},
    "permutation_welch": {"permutations": 99},
    "kruskal_wallis_permuted": {"permutations": 99},
    "parametric_bootstrap_f": {"resamples": 50},
}
"""Few resamples: it is the numbers that must not move, not their precision."""


def methods():
    """Every method, a route through every check, and the other procedures, by name and version."""
    made = [METHODS.make(name, METHOD_SETTINGS.get(name)) for name in METHODS.names()]
    found = {f"{method.name} {method.version}": method for method in made}
    f, welch = METHODS.make("classical_f"), METHODS.make("welch_f")
    for check in map(CHECKS.make, CHECKS.names()):
        found[f"route by {check.name} {check.version}"] = Route(check, 0.1, f, welch)
    found["smallest of two"] = Smallest((f, METHODS.make("kruskal_wallis")))
    for name, rule in RULES.items():
        found[f"without outliers by {name}"] = Dropping(rule, welch)
    return found


def settings():
    """Name to Setting: every shape on the additive scale, one on the other, every disturbance."""
    made = {name: SHAPES.make(name, SHAPE_SETTINGS.get(name)) for name in SHAPES.names()}
    found = {f"{name} {shape.version}": setting(shape) for name, shape in made.items()}
    found["normal multiplicative"] = setting(made["normal"], "multiplicative")
    for name in DISTURBANCES.names():
        part = DISTURBANCES.make(name, DISTURBANCE_SETTINGS.get(name))
        found[f"{name} {part.version}"] = setting(made["normal"], disturbances=(part,))
    return found


def setting(shape, scale="additive", disturbances=()):
    """Three groups of unequal sizes and spreads of one shape."""
    estimand, centre = ESTIMANDS.make("medians"), 8.0
    return Setting((shape,) * 3, estimand, scale, centre, (4, 7, 9), (0.5, 1.0, 1.5), disturbances)


def counts():
    """{"mechanism": version, "counts": {setting: {method: [rejections, undefined]}}}."""
    told = {}
    for name, one in settings().items():
        difference = (1.0, 1.0, 1.0) if one.scale == "multiplicative" else (0.0, 0.0, 0.0)
        judges = methods()
        task = Task(99, one, (0.05,), (0, 7), (Want(difference, tuple(judges.values())),))
        tallies = judged(task)
        told[name] = {
            word: [
                sum(ones(tally.rejected[0.05]) for tally in tallies if tally.method == method.key()),
                sum(ones(tally.undefined) for tally in tallies if tally.method == method.key()),
            ]
            for word, method in judges.items()
        }
    return {"mechanism": mechanism.VERSION, "counts": told}


def ones(bits):
    """How many bits are set."""
    return int(np.bitwise_count(np.frombuffer(bits, dtype=np.uint8)).sum())


if __name__ == "__main__":
    FILE.write_text(json.dumps(counts(), indent=1) + "\n", encoding="utf-8")
