"""Ledger: every tally ever computed, in one SQLite file; a chunk is there whole or not at all."""

import json
import sqlite3
import zlib
from contextlib import contextmanager
from pathlib import Path
from typing import NamedTuple

import numpy as np

from workbench.errors import WorkbenchError, WorkError
from workbench.histogram import EDGES

FORMAT = 1

DAMAGED = "what is stored here is damaged or of another version; move the file away and run again"

QUICK = 1
"""Level of compression; higher ones save a few bytes of a hundred and take twice the time."""

SCHEMA = """
CREATE TABLE header (name TEXT PRIMARY KEY, value TEXT NOT NULL) STRICT;
CREATE TABLE word (id INTEGER PRIMARY KEY, text TEXT NOT NULL UNIQUE) STRICT;
CREATE TABLE tally (
    setting INTEGER NOT NULL, difference INTEGER NOT NULL, method INTEGER NOT NULL, chunk INTEGER NOT NULL,
    undefined BLOB NOT NULL, histogram BLOB NOT NULL, ends BLOB NOT NULL,
    PRIMARY KEY (setting, difference, method, chunk)
) STRICT, WITHOUT ROWID;
CREATE TABLE rejection (
    setting INTEGER NOT NULL, difference INTEGER NOT NULL, method INTEGER NOT NULL, level REAL NOT NULL,
    chunk INTEGER NOT NULL, bits BLOB NOT NULL,
    PRIMARY KEY (setting, difference, method, level, chunk)
) STRICT, WITHOUT ROWID;
"""


class Row(NamedTuple):
    """A Tally in the form in which it is stored: keys as they are, everything else packed."""

    setting: str
    difference: str
    method: str
    chunk: int
    undefined: bytes
    histogram: bytes
    ends: bytes
    rejected: dict


def packed(tally):
    """The Row of a Tally."""
    return Row(
        tally.setting,
        tally.difference,
        tally.method,
        tally.chunk,
        packed_bits(tally.undefined),
        packed_counts(tally.histogram),
        zlib.compress(tally.ends, QUICK) if tally.ends else b"",
        {level: packed_bits(bits) for level, bits in tally.rejected.items()},
    )


class Ledger:
    """The store of one result directory. Only the process that opened it for writing writes."""

    def __init__(self, path, connection):
        self.path = path
        self._db = connection
        self._words = {}

    @classmethod
    @contextmanager
    def writing(cls, path, header):
        """The ledger at the path, made if it is not there; raises WorkbenchError where its header differs."""
        db = connect(path, f"file:{quoted(path)}?mode=rwc")
        ledger = cls(path, db)
        try:
            db.execute("PRAGMA journal_mode=WAL")
            db.execute("PRAGMA synchronous=FULL")
            ledger.begin(header)
            yield ledger
        except sqlite3.DatabaseError as error:
            raise unusable(path, error) from None
        finally:
            ledger.settle()
            db.close()

    @classmethod
    @contextmanager
    def reading(cls, path):
        """The ledger at the path, opened read-only; raises WorkbenchError where there is none."""
        if not Path(path).is_file():
            raise WorkbenchError(f"{path}: there is no ledger here; `workbench run` makes one")
        db = connect(path, f"file:{quoted(path)}?mode=ro")
        try:
            yield cls(path, db)
        except sqlite3.DatabaseError as error:
            raise unusable(path, error) from None
        finally:
            db.close()

    def begin(self, header):
        """Write the header of a new ledger, or make sure that the one there agrees with it."""
        with self._db:
            self._db.execute("BEGIN IMMEDIATE")
            known = self._db.execute("SELECT 1 FROM sqlite_master WHERE name = 'header'").fetchone()
            if not known:
                for statement in SCHEMA.split(";"):
                    self._db.execute(statement)
                self.write_header(header)
        stored = self.header()
        for name, value in header.items():
            if stored.get(name) != value:
                raise WorkbenchError(
                    f"{self.path}: the work in this ledger was done with {name} {stored.get(name)}, and this run "
                    f"has {name} {value}; the two cannot be added up, so give another directory with --out"
                )

    def settle(self):
        """Leave one file behind: fold the log in and go back to a plain journal, unless another process reads."""
        try:
            self._db.rollback()
            self._db.execute("PRAGMA wal_checkpoint(TRUNCATE)")
            self._db.execute("PRAGMA journal_mode=DELETE")
        except sqlite3.DatabaseError:
            pass  # another process holds the file; the log beside it is complete and stays valid

    def header(self):
        """What the ledger says of itself: name to plain value."""
        rows = self._db.execute("SELECT name, value FROM header")
        return {name: json.loads(value) for name, value in rows}

    def write_header(self, header):
        """Set entries of the header."""
        rows = [(name, json.dumps(value)) for name, value in header.items()]
        self._db.executemany("INSERT OR REPLACE INTO header VALUES (?, ?)", rows)

    def note(self, header):
        """Set entries of the header in a transaction of their own."""
        with self._db:
            self.write_header(header)

    def put(self, rows):
        """Add Rows, all or none; raises WorkError where one contradicts what is there."""
        with self._db:
            self._db.execute("BEGIN IMMEDIATE")
            tallies, rejections = [], []
            for row in rows:
                place = [self.word(text, make=True) for text in (row.setting, row.difference, row.method)]
                tallies.append((*place, row.chunk, row.undefined, row.histogram, row.ends))
                rejections += [(*place, level, row.chunk, bits) for level, bits in row.rejected.items()]
            self.add("tally", 4, tallies)
            self.add("rejection", 5, rejections)

    def add(self, table, key, rows):
        """Insert rows whose first `key` entries are their place, making sure that those there are the same."""
        marks = ", ".join("?" * len(rows[0]))
        before = self._db.total_changes
        self._db.executemany(f"INSERT OR IGNORE INTO {table} VALUES ({marks})", rows)
        if self._db.total_changes - before == len(rows):
            return
        for row in rows:
            if plain_row(self.stored(table, row[:key])) != plain_row(row[key:]):
                raise WorkError(
                    f"{self.path}: chunk {row[key - 1]} came out different from what is stored; the ledger was "
                    "made by other versions, on another processor, or was edited"
                )

    def stored(self, table, place):
        """The blobs of the row at a place."""
        names = {
            "tally": ("setting, difference, method, chunk", "undefined, histogram, ends"),
            "rejection": ("setting, difference, method, level, chunk", "bits"),
        }
        key, values = names[table]
        marks = ", ".join("?" * len(place))
        return self._db.execute(f"SELECT {values} FROM {table} WHERE ({key}) = ({marks})", place).fetchone()

    def word(self, text, make=False):
        """The number that stands for a key in this ledger; None where it was never used."""
        if text not in self._words:
            if make:
                self._db.execute("INSERT OR IGNORE INTO word (text) VALUES (?)", [text])
            row = self._db.execute("SELECT id FROM word WHERE text = ?", [text]).fetchone()
            if row is None:
                return None
            self._words[text] = row[0]
        return self._words[text]

    def chunks(self, setting, difference, method, level):
        """The numbers of the chunks that are there for one method, difference and level."""
        place = [self.word(text) for text in (setting, difference, method)]
        rows = self._db.execute(
            "SELECT chunk FROM rejection WHERE (setting, difference, method, level) = (?, ?, ?, ?)",
            [*place, level],
        )
        return {chunk for (chunk,) in rows}

    def rejected(self, setting, difference, method, level, chunks):
        """(chunks * R / 8,) bytes of reject bits of the first chunks; raises KeyError where one is missing."""
        query = "SELECT bits FROM rejection WHERE (setting, difference, method, level) = (?, ?, ?, ?) AND chunk < ?"
        return self.joined(query, setting, difference, method, chunks, plain_bits, level)

    def undefined(self, setting, difference, method, chunks):
        """(chunks * R / 8,) bytes of undefined bits of the first chunks."""
        query = "SELECT undefined FROM tally WHERE (setting, difference, method) = (?, ?, ?) AND chunk < ?"
        return self.joined(query, setting, difference, method, chunks, plain_bits)

    def ends(self, setting, difference, method, chunks):
        """(chunks * R,) bytes: the ends a route took in the first chunks."""
        query = "SELECT ends FROM tally WHERE (setting, difference, method) = (?, ?, ?) AND chunk < ?"
        return self.joined(query, setting, difference, method, chunks, zlib.decompress)

    def joined(self, query, setting, difference, method, chunks, plain, *more):
        """The blobs a query finds, made plain and joined in the order of the chunks, as bytes (uint8)."""
        place = [self.word(text) for text in (setting, difference, method)]
        rows = self._db.execute(query + " ORDER BY chunk", [*place, *more, chunks]).fetchall()
        if len(rows) != chunks:
            raise KeyError(f"{chunks - len(rows)} chunks are missing")
        try:
            parts = [plain(blob) for (blob,) in rows]
        except (ValueError, IndexError, zlib.error):
            raise WorkError(f"{self.path}: {DAMAGED}") from None
        if len({len(part) for part in parts}) > 1:
            raise WorkError(f"{self.path}: {DAMAGED}")
        return np.frombuffer(b"".join(parts), dtype=np.uint8)

    def histogram(self, setting, difference, method, chunks):
        """(len(EDGES),) counts of p-values over the first chunks, whole."""
        query = "SELECT histogram FROM tally WHERE (setting, difference, method) = (?, ?, ?) AND chunk < ?"
        place = [self.word(text) for text in (setting, difference, method)]
        total = np.zeros(len(EDGES), dtype=np.int64)
        for (blob,) in self._db.execute(query, [*place, chunks]):
            total += plain_counts(blob)
        return total


def connect(path, address):
    """A connection in autocommit mode, whose transactions are begun by hand."""
    try:
        return sqlite3.connect(address, uri=True, isolation_level=None, timeout=60)
    except sqlite3.Error as error:
        raise unusable(path, error) from None


def unusable(path, error):
    """The error a user sees where SQLite cannot go on: the file is no ledger, or the system fails it."""
    if isinstance(error, sqlite3.OperationalError) and not str(error).startswith(
        ("no such", "unable to open")
    ):
        return WorkError(
            f"{path}: the ledger could not be read or written ({error}); what was finished is kept"
        )
    return WorkbenchError(
        f"{path}: this file cannot be used as a ledger ({error}); move it away or use --out"
    )


def quoted(path):
    """A path for an SQLite address."""
    return str(path).replace("%", "%25").replace("?", "%3f").replace("#", "%23")


def plain_row(row):
    """Blobs of a row as their plain content, whatever version of the compressor made them."""
    bits, *more = row
    return [plain_bits(bits), *(zlib.decompress(blob) if blob else b"" for blob in more)]


def packed_bits(bits):
    """Bits as they are, but zeros alone as their number: a first byte says which. Others hardly get any shorter."""
    if not bits.strip(b"\x00"):
        return b"\x01" + len(bits).to_bytes(4, "big")
    return b"\x00" + bits


def plain_bits(blob):
    """The bits that packed_bits was given."""
    form, content = blob[0], blob[1:]
    if form == 0:
        return content
    if form == 1 and len(content) == 4:
        return bytes(int.from_bytes(content, "big"))
    raise ValueError("bits of no known form")


def packed_counts(counts):
    """Counts compressed, in one byte each where they fit, else in two."""
    kind = np.uint8 if counts.max(initial=0) < 256 else np.dtype("<u2")
    return zlib.compress(counts.astype(kind).tobytes(), QUICK)


def plain_counts(blob):
    """The counts that packed_counts was given."""
    plain = zlib.decompress(blob)
    return np.frombuffer(plain, dtype=np.uint8 if len(plain) == len(EDGES) else "<u2").astype(np.int64)
