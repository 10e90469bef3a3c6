"""Table: tallies turned into rates with Monte Carlo standard error, interval and verdict."""

import hashlib
from dataclasses import dataclass
from itertools import combinations

import numpy as np
import pandas as pd

from workbench.measures import paired, rate
from workbench.plan import plan_of
from workbench.records import difference_key
from workbench.theory.exact import exact_rate

SHARES = {"verdicts": 0.70, "pairs": 0.20, "others": 0.10}
"""How the error that a report may make is shared out, by what the statements are for."""

LEVEL_NAMES = ("sizes", "shape", "spread", "difference", "disturbance")


@dataclass(frozen=True)
class Tables:
    """What a study's ledger comes to."""

    rates: pd.DataFrame
    """The rows of table.csv."""
    differences: pd.DataFrame
    """The rows of differences.csv."""
    branches: pd.DataFrame
    """The rows of branches.csv: how often a route came to each of its ends, and the rate there."""
    digest: str
    """Hash of all counts."""


def tabulated(study, conditions, ledger):
    """The Tables of a study whose work is in the ledger."""
    rates, differences, branches = [], [], []
    for condition in conditions:
        counted = Counted(study, condition, ledger)
        rates += counted.rates()
        differences += counted.differences()
        branches += counted.branches()
    rates, differences = pd.DataFrame(rates), pd.DataFrame(differences, columns=DIFFERENCE_COLUMNS)
    criteria = judging(study, conditions)
    add_intervals(study, criteria, rates, differences)
    add_exact(study, conditions, rates)
    add_verdicts(study, criteria, rates)
    return Tables(
        rates[list(RATE_COLUMNS)],
        differences,
        branch_table(study, branches),
        digest(study, conditions, rates, differences),
    )


RATE_COLUMNS = (
    "condition",
    *LEVEL_NAMES,
    "groups",
    "total",
    "truth",
    "method",
    "hypothesis",
    "alpha",
    "reading",
    "replications",
    "rejections",
    "undefined",
    "rate",
    "mcse",
    "lower",
    "upper",
    "rate_if_undefined_rejected",
    "exact",
    "exact_error",
    "verdict",
)

# Here `difference` is that of the two rates, so the level of that name goes by another.
DIFFERENCE_COLUMNS = [
    "condition",
    *("difference_level" if name == "difference" else name for name in LEVEL_NAMES),
    "alpha",
    "reading",
    "method",
    "rival",
    "only_method",
    "only_rival",
    "difference",
    "mcse",
    "lower",
    "upper",
]


class Counted:
    """The bits of one condition, counted."""

    def __init__(self, study, condition, ledger):
        self.study, self.condition, self.ledger = study, condition, ledger
        self.replications = study.simulation.replications
        self.chunks = plan_of(study, [condition]).chunks
        self.bits = {
            (judge.name, level): self.cut(ledger.rejected(*self.place(judge), level, self.chunks))
            for judge in study.judges
            for level in study.levels
        }

    def place(self, judge):
        """The keys under which a method's tallies of this condition are stored."""
        return self.condition.setting.key, difference_key(self.condition.difference), judge.method.key()

    def cut(self, bits):
        """The bits of the first replications that the study asks for."""
        whole, rest = divmod(self.replications, 8)
        bits = bits[: whole + bool(rest)].copy()
        if rest:
            bits[-1] &= 0xFF << (8 - rest) & 0xFF
        return bits

    def head(self):
        """The entries that all rows of the condition share."""
        levels = {name: self.condition.levels[name] for name in LEVEL_NAMES}
        return {"condition": self.condition.number} | levels

    @property
    def reading(self):
        """What a rejection is called here."""
        return "error" if self.condition.is_null else "detection"

    def rates(self):
        """A row for each method and level."""
        setting = self.condition.setting
        shared = self.head() | {
            "groups": setting.groups,
            "total": setting.total,
            "truth": self.condition.truth,
        }
        rows = []
        for judge in self.study.judges:
            undefined = ones(self.cut(self.ledger.undefined(*self.place(judge), self.chunks)))
            for level in self.study.levels:
                rows.append(
                    shared
                    | {
                        "method": judge.name,
                        "hypothesis": judge.method.hypothesis,
                        "alpha": level,
                        "reading": self.reading,
                        "replications": self.replications,
                        "rejections": ones(self.bits[judge.name, level]),
                        "undefined": undefined,
                    }
                )
        return rows

    def differences(self):
        """A row for each pair of methods and level."""
        rows = []
        for level in self.study.levels:
            for judge, rival in combinations(self.study.judges, 2):
                first, second = self.bits[judge.name, level], self.bits[rival.name, level]
                row = {"alpha": level, "reading": self.reading, "method": judge.name, "rival": rival.name}
                row |= {"only_method": ones(first & ~second), "only_rival": ones(second & ~first)}
                rows.append({"difference_level": self.condition.levels["difference"]} | self.head() | row)
        return rows

    def branches(self):
        """A row for each route, end and level."""
        rows = []
        for judge in self.study.judges:
            if not hasattr(judge.method, "ends"):
                continue
            taken = self.ledger.ends(*self.place(judge), self.chunks)[: self.replications]
            for level in self.study.levels:
                rejected = np.unpackbits(self.bits[judge.name, level])[: self.replications].astype(bool)
                for number, (path, method) in enumerate(judge.method.ends()):
                    here = (taken & 127) == number
                    row = {"route": judge.name, "end": path, "method": method.name, "alpha": level}
                    row |= {
                        "reading": self.reading,
                        "replications": self.replications,
                        "taken": int(here.sum()),
                    }
                    row |= {
                        "unchecked": int((here & (taken > 127)).sum()),
                        "rejections": int((here & rejected).sum()),
                    }
                    rows.append(self.head() | row)
        return rows


def ones(bits):
    """How many bits of an array of bytes are set."""
    return int(np.bitwise_count(bits).sum(dtype=np.int64))


def branch_table(study, rows):
    """branches.csv: share of each end with its Monte Carlo standard error, and the rate within it."""
    columns = [
        "condition",
        *LEVEL_NAMES,
        "route",
        "end",
        "method",
        "alpha",
        "reading",
        "replications",
        "taken",
    ]
    table = pd.DataFrame(rows, columns=[*columns, "unchecked", "rejections"])
    taken = table["taken"].to_numpy(dtype=float)
    with np.errstate(invalid="ignore", divide="ignore"):
        table["share"] = taken / table["replications"].to_numpy(dtype=float)
        table["rate_within"] = table["rejections"].to_numpy(dtype=float) / taken
        table["mcse_within"] = rate.monte_carlo_error(table["rate_within"].to_numpy(), taken)
    return table


def add_intervals(study, criteria, rates, differences):
    """Fill in rates, differences, their standard errors and intervals, which all hold at once."""
    n, x = rates["replications"], rates["rejections"]
    rates["rate"] = x / n
    rates["mcse"] = rate.monte_carlo_error(rates["rate"], n)
    rates["rate_if_undefined_rejected"] = (x + rates["undefined"]) / n
    judged = (rates["condition"].isin(criteria) & (rates["alpha"] == study.levels[0])).to_numpy(dtype=bool)
    detection = differences["reading"] == "detection"
    decisive = (detection & (differences["alpha"] == study.levels[0])).to_numpy(dtype=bool)
    spent = 1 - study.criteria.confidence
    others = (~judged).sum() + (~decisive).sum()
    error = np.where(judged, portion(spent, "verdicts", judged.sum()), portion(spent, "others", others))
    rates["lower"], rates["upper"] = rate.clopper_pearson(x, n, error)
    counts = differences["only_method"].to_numpy(float), differences["only_rival"].to_numpy(float)
    differences["difference"] = (counts[0] - counts[1]) / study.simulation.replications
    differences["mcse"] = paired.monte_carlo_error(*counts, study.simulation.replications)
    error = np.where(decisive, portion(spent, "pairs", decisive.sum()), portion(spent, "others", others))
    differences["lower"], differences["upper"] = paired.limits(*counts, study.simulation.replications, error)


def portion(spent, purpose, statements):
    """The error that each of so many statements of one purpose may make."""
    return spent * SHARES[purpose] / max(int(statements), 1)


def judging(study, conditions):
    """{condition number: the criterion that judges its rows at the first level}, where there is one."""
    return {
        condition.number: criterion
        for condition in conditions
        for criterion in study.criteria.fixed
        if criterion.applies(condition)
    }


def add_exact(study, conditions, rates):
    """Fill in the rates that theory gives, with their numerical errors."""
    known = {condition.number: condition for condition in conditions}
    methods = {judge.name: judge.method for judge in study.judges}
    found = [
        exact_rate(known[row.condition], methods[row.method], row.alpha)
        for row in rates[["condition", "method", "alpha"]].itertuples()
    ]
    rates["exact"] = [value for value, _ in found]
    rates["exact_error"] = [error for _, error in found]


def add_verdicts(study, criteria, rates):
    """Fill in the verdicts; empty where no criterion applies."""
    verdicts = []
    for row in rates[["condition", "alpha", "lower", "upper"]].itertuples():
        criterion = criteria.get(row.condition) if row.alpha == study.levels[0] else None
        verdicts.append(criterion.verdict(row.lower, row.upper, row.alpha).value if criterion else "")
    rates["verdict"] = verdicts


def digest(study, conditions, rates, differences):
    """Hash of all counts, by the content of what was counted and not by names."""
    keys = {
        condition.number: f"{condition.setting.key} {difference_key(condition.difference)}"
        for condition in conditions
    }
    methods = {judge.name: judge.method.key() for judge in study.judges}
    lines = [
        f"{keys[row.condition]} {methods[row.method]} {row.alpha!r} {row.replications} {row.rejections} {row.undefined}"
        for row in rates.itertuples()
    ]
    lines += [
        f"{keys[row.condition]} {methods[row.method]} {methods[row.rival]} {row.alpha!r} "
        f"{row.only_method} {row.only_rival}"
        for row in differences.itertuples()
    ]
    return hashlib.sha256("\n".join(sorted(lines)).encode()).hexdigest()
