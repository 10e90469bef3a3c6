"""The experiments that ship give the results that ship, and those that were published."""

import re
from pathlib import Path

import numpy as np
import pandas as pd
import pytest

from workbench import run
from workbench.cores import default_workers
from workbench.decide import Status
from workbench.report.page import Report
from workbench.study import read

ROOT = Path(__file__).parents[2]
COUNTS = ["rejections", "undefined", "only_method", "only_rival", "taken", "unchecked"]
FROM_COUNTS = ["rate", "mcse", "lower", "upper", "difference", "rate_if_undefined_rejected", "share"]
ALLOWED = 3
"""Another processor may round a p-value the other way and so move single counts."""

TABLES = ["table.csv", "differences.csv", "branches.csv", "calibration.csv"]


def compared(table, directory, kept):
    """Compare a table with the one that is committed: names and truths exactly, counts within ALLOWED."""
    committed = pd.read_csv(kept / table, keep_default_na=False)
    found = pd.read_csv(directory / table, keep_default_na=False)
    assert list(found.columns) == list(committed.columns) and len(found) == len(committed)
    for column in committed.columns:
        if column in COUNTS:
            assert (found[column] - committed[column]).abs().max() <= ALLOWED
        elif column in FROM_COUNTS and committed[column].dtype == float:
            assert np.allclose(found[column], committed[column], atol=1e-3)
        elif column not in ("exact", "exact_error", "rate_within", "mcse_within"):
            assert found[column].equals(committed[column]), column


def words_of(report):
    """What a report says, without its drawings and the versions of libraries."""
    told = re.sub(
        r"<svg.*?</svg>|<dt>Versions</dt><dd>.*?</dd>|<style>.*?</style>", "", report, flags=re.DOTALL
    )
    return re.sub(r"<[^>]*>", " ", told)


@pytest.mark.heavy
@pytest.mark.parametrize(
    "name, statuses, known",
    [("lap_shear", (Status.CHOSEN, Status.TIE), 12), ("soil_nitrate", (Status.CHOSEN,), 24)],
)
def test_a_demonstration_gives_the_committed_tables_and_report(name, statuses, known, tmp_path):
    outcome = run.run(read(ROOT / "experiments" / f"{name}.toml"), tmp_path, default_workers())
    for table in TABLES:
        compared(table, tmp_path, ROOT / "results" / name)
    assert outcome.decision.status in statuses
    assert not outcome.agreement.disagreeing and outcome.agreement.rows == known
    kept = ROOT / "results" / name
    if (tmp_path / "table.csv").read_bytes() == (kept / "table.csv").read_bytes():
        assert words_of(Report(outcome).html()) == words_of(
            (kept / "report.html").read_text(encoding="utf-8")
        )


PUBLISHED = """\
last_smaller last_half     none     classical_f      0.033768
last_smaller last_half     none     welch_f          0.049561
last_smaller last_half     none     brown_forsythe_f 0.055473
last_smaller last_fourfold none     classical_f      0.199334
last_smaller last_fourfold none     welch_f          0.051541
last_smaller last_fourfold none     brown_forsythe_f 0.06792
same         last_fourfold none     classical_f      0.080272
same         last_fourfold none     welch_f          0.049784
same         last_fourfold none     brown_forsythe_f 0.070554
last_larger  last_fourfold none     classical_f      0.01687
last_larger  last_fourfold none     welch_f          0.049627
last_larger  last_fourfold none     brown_forsythe_f 0.070394
last_smaller last_half     last_one classical_f      0.191846
last_smaller last_half     last_one welch_f          0.462796
last_smaller last_half     last_one brown_forsythe_f 0.282028
last_larger  last_double   last_one classical_f      0.168759
last_larger  last_double   last_one welch_f          0.21287
last_larger  last_double   last_one brown_forsythe_f 0.291822
"""


@pytest.mark.heavy
def test_published_rates_are_found_again(tmp_path):
    """Delacre, Leys, Mora & Lakens (2019), open workbook, sheet Normal, K = 3; 1,000,000 replications a cell."""
    outcome = run.run(
        read(ROOT / "experiments" / "unequal_spread_published.toml"), tmp_path, default_workers()
    )
    rates = outcome.tables.rates.set_index(["sizes", "spread", "difference", "method"])
    z = []
    for line in PUBLISHED.splitlines():
        *place, printed = line.split()
        row, printed = rates.loc[tuple(place)], float(printed)
        spread = np.sqrt(printed * (1 - printed) * (1 / 1e6 + 1 / row["replications"]))
        z.append((row["rate"] - printed) / spread)
    assert len(z) == 18 and np.abs(z).max() < 4.5
    assert np.square(z).sum() < 45  # chi-square with 18 degrees of freedom is above 45 with chance 0.0004
    assert outcome.agreement.rows == 18 and not outcome.agreement.disagreeing
