"""Outcome: all that a finished ledger comes to."""

import hashlib
import platform
from dataclasses import dataclass
from importlib.metadata import version
from pathlib import Path

import pandas as pd

from workbench.calibration import calibrated
from workbench.decide import Decision, decided
from workbench.plan import plan_of
from workbench.study import Study
from workbench.table import Tables, tabulated
from workbench.theory.exact import Agreement, agreement


@dataclass(frozen=True)
class Outcome:
    """What a result directory comes to."""

    study: Study
    conditions: list
    """Every Condition of the study."""
    directory: Path
    tables: Tables
    calibration: pd.DataFrame
    """The rows of calibration.csv: error rates at other levels."""
    decision: Decision
    agreement: Agreement


def outcome_of(study, found, directory, ledger):
    """The Outcome of a finished ledger."""
    tables = tabulated(study, found, ledger)
    return Outcome(
        study,
        found,
        Path(directory),
        tables,
        calibrated(study, found, ledger),
        decided(study, found, tables),
        agreement(tables.rates),
    )


def libraries():
    """Versions of the libraries that results depend on."""
    return {name: version(name) for name in ("numpy", "scipy")}


def manifest(outcome):
    """What ran: file, plan, seed, versions, platform, counts and their digest."""
    study, rates = outcome.study, outcome.tables.rates
    return {
        "experiment": Path(study.file).name,
        "experiment_sha256": hashlib.sha256(study.text.encode("utf-8")).hexdigest(),
        "plan": study.key,
        "seed": study.simulation.seed,
        "replications": study.simulation.replications,
        "conditions": len(outcome.conditions),
        "methods": {judge.name: judge.method.key() for judge in study.judges},
        "tallies": plan_of(study, outcome.conditions).tallies,
        "rejections": int(rates["rejections"].sum()),
        "undefined": int(rates["undefined"].sum()),
        "digest": outcome.tables.digest,
        "status": outcome.decision.status.value,
        "chosen": outcome.decision.chosen,
        "versions": {"workbench": version("workbench"), "python": platform.python_version()} | libraries(),
        "platform": {"system": platform.system(), "machine": platform.machine()},
    }
