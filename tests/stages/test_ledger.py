"""What goes into the ledger comes out of it, in little space."""

import sqlite3
import zlib
from contextlib import closing

import numpy as np
import pytest
from hypothesis import given
from hypothesis import strategies as some

from workbench import ledger
from workbench.errors import WorkbenchError, WorkError
from workbench.histogram import EDGES, counts
from workbench.records import Tally


@given(some.binary(min_size=1, max_size=250))
def test_bits_are_packed_and_come_back(bits):
    assert ledger.plain_bits(ledger.packed_bits(bits)) == bits


@given(some.lists(some.integers(0, 2000), min_size=len(EDGES), max_size=len(EDGES)))
def test_counts_are_packed_and_come_back(numbers):
    assert ledger.plain_counts(ledger.packed_counts(np.array(numbers))).tolist() == numbers


def tally(chunk, rng, rate=0.05):
    """A tally of 2,000 uniform p-values."""
    p = rng.random(2000)
    bits = np.packbits(p <= rate).tobytes()
    return Tally("s", chunk, "d", "m", {0.05: bits}, bytes(250), counts(p))


def test_a_tally_takes_little_more_than_four_hundred_bytes():
    rng = np.random.default_rng(1)
    rows = [ledger.packed(tally(chunk, rng)) for chunk in range(20)]
    sizes = [
        len(row.histogram) + len(row.undefined) + len(row.rejected[0.05]) + len(row.ends) for row in rows
    ]
    assert np.mean(sizes) < 450


def test_bits_are_joined_in_the_order_of_the_chunks(tmp_path):
    rng = np.random.default_rng(2)
    tallies = [tally(chunk, rng) for chunk in range(3)]
    with ledger.Ledger.writing(tmp_path / "l", {"format": 1}) as store:
        store.put([ledger.packed(one) for one in reversed(tallies)])
        found = store.rejected("s", "d", "m", 0.05, 3)
        assert found.tobytes() == b"".join(one.rejected[0.05] for one in tallies)
        assert store.histogram("s", "d", "m", 3).sum() == 6000
        assert store.undefined("s", "d", "m", 2).tobytes() == bytes(500)
        with pytest.raises(KeyError):
            store.rejected("s", "d", "m", 0.05, 4)
    assert [path.name for path in tmp_path.iterdir()] == ["l"]


def test_putting_the_same_again_changes_nothing(tmp_path):
    one = ledger.packed(tally(0, np.random.default_rng(3)))
    with ledger.Ledger.writing(tmp_path / "l", {"format": 1}) as store:
        store.put([one])
        store.put([one])
        assert store.chunks("s", "d", "m", 0.05) == {0}


def test_work_of_other_versions_is_not_added_to(tmp_path):
    with ledger.Ledger.writing(tmp_path / "l", {"numpy": "1"}):
        pass
    with (
        pytest.raises(WorkbenchError, match="numpy 1"),
        ledger.Ledger.writing(tmp_path / "l", {"numpy": "2"}),
    ):
        pass


def test_a_database_of_another_kind_is_no_ledger(tmp_path):
    with closing(sqlite3.connect(tmp_path / "l", isolation_level=None)) as db:
        db.execute("CREATE TABLE other (x)")
    with (
        pytest.raises(WorkbenchError, match="cannot be used as a ledger") as caught,
        ledger.Ledger.reading(tmp_path / "l") as store,
    ):
        store.header()
    assert caught.value.status == 2


def test_a_full_disk_is_a_failure_of_the_work(tmp_path):
    rng = np.random.default_rng(4)
    rows = [ledger.packed(tally(chunk, rng)) for chunk in range(200)]
    with pytest.raises(WorkError, match="could not be read or written") as caught:
        with ledger.Ledger.writing(tmp_path / "l", {"format": 1}) as store:
            store.put(rows[:1])
            store._db.execute("PRAGMA max_page_count = 12")
            store.put(rows)
    assert caught.value.status == 1
    with ledger.Ledger.reading(tmp_path / "l") as store:
        assert store.chunks("s", "d", "m", 0.05) == {0}, "a transaction is there whole or not at all"


def test_histogram_edges_belong_to_the_format():
    """30 a decade from 1e-7 to 0.1, steps of 0.002 to 0.3, of 0.01 to 1, and the usual levels exactly."""
    assert len(EDGES) == 354 and np.all(np.diff(EDGES) > 0)
    assert {0.001, 0.005, 0.01, 0.025, 0.05, 0.1, 0.3, 1.0} <= set(EDGES.tolist())
    assert zlib.crc32(EDGES.tobytes()) == 4028744198, "the edges moved: ledgers that exist would be misread"


@given(some.lists(some.sampled_from([0.0, 1e-9, 0.01, 0.05, 0.0500001, 0.7, 1.0, float("nan")]), max_size=50))
def test_a_p_value_at_an_edge_counts_below_it(values):
    p = np.array(values)
    found = counts(p)
    assert found.sum() == (~np.isnan(p)).sum()
    for level in (0.01, 0.05, 1.0):
        assert found[: EDGES.searchsorted(level) + 1].sum() == (p <= level).sum()
