"""The file of a ledger: its tables, its lock, its errors in one line, packed design files."""

import sqlite3
import zlib
from collections.abc import Iterator
from contextlib import contextmanager
from pathlib import Path

from lamwright.geometry.errors import LamwrightError

LEDGER_FILE = "ledger.sqlite"
LOCK_FILE = ".ledger-lock"  # an empty database; who holds its lock writes the ledger
WAIT = 30.0  # s for a reader at work in the same file
# What SQLite says of a fault, and what to do about it.
_REMEDIES = (
    ("disk is full", "the disk is full", "free space and run the same command again"),
    ("disk i/o", "the disk cannot be read or written", "free space or look after the disk"),
    ("readonly", "cannot be written", "make folder and file writable, or give another --out"),
    ("unable to open", "cannot be opened", "make folder and file readable and writable"),
    ("locked", "in use by another program", "wait for it, or give another --out"),
    ("malformed", "is damaged", "copy it, and mend the copy by SQLite's own .recover"),
    ("not a database", "is no ledger", "remove it, or give another --out"),
    ("no such table", "is no ledger", "remove it, or give another --out"),
    ("no such column", "is no ledger of this version", "remove it, or give another --out"),
)

TABLES = """
create table if not exists study (name text primary key, value text not null) without rowid;
create table if not exists note (name text primary key, value text not null) without rowid;
create table if not exists state (name text primary key, value blob not null) without rowid;
create table if not exists cards (number integer primary key, texts text not null unique);
create table if not exists design (
    number integer primary key autoincrement,
    hash text not null unique,
    outcome text not null,
    reason text not null,
    stage text not null,
    passes integer,
    seconds real not null,
    tolerance text not null,
    effort text not null,
    version text not null,
    origin text not null,
    attempts integer not null,
    cards integer not null references cards,
    file blob not null
);
"""


def connected(path: Path, *, is_writing: bool) -> sqlite3.Connection:
    """The open file.

    A file that nobody writes, in a folder that cannot be written, is read as it stands: SQLite
    would else make files beside it.
    """
    wal = path.with_name(path.name + "-wal")
    mode = "rwc" if is_writing else "ro"
    uri = f"{path.absolute().as_uri()}?mode={mode}"
    if not is_writing and not wal.exists() and not _is_writable(path.parent):
        uri += "&immutable=1"
    return sqlite3.connect(uri, uri=True, timeout=WAIT, isolation_level=None)


def locked(folder: Path) -> sqlite3.Connection:
    """A connection that holds the folder's lock until it is closed or its process ends.

    Raises:
        sqlite3.Error: another process holds it ("locked"), or the folder cannot be written.
    """
    lock = sqlite3.connect(folder / LOCK_FILE, timeout=0.0, isolation_level=None)
    try:
        lock.execute("begin exclusive")
    except BaseException:
        lock.close()
        raise
    return lock


def is_locked(folder: Path) -> bool:
    """Whether a process writes the folder's ledger."""
    if not (folder / LOCK_FILE).is_file():
        return False
    try:
        locked(folder).close()
    except sqlite3.Error as error:
        return "locked" in str(error)
    return False


@contextmanager
def told(path: Path) -> Iterator[None]:
    """SQLite's errors in the block as one line each."""
    try:
        yield
    except sqlite3.Error as error:
        raise LamwrightError(f"{path}: {_line(str(error))}") from None


def _line(fault: str) -> str:
    for part, plain, remedy in _REMEDIES:
        if part in fault.lower():
            return f"{plain}; finished designs in it are kept; {remedy}"
    return fault


def _is_writable(folder: Path) -> bool:
    import os

    return os.access(folder, os.W_OK)


def packed(text: str, base: bytes) -> bytes:
    """The text compressed against one that it mostly repeats: some 100 bytes of 4 kB."""
    press = zlib.compressobj(9, zdict=base) if base else zlib.compressobj(9)
    return press.compress(text.encode()) + press.flush()


def unpacked(data: bytes, base: bytes) -> str:
    """The text again.

    Raises:
        LamwrightError: the data are damaged; they carry a check sum.
    """
    press = zlib.decompressobj(zdict=base) if base else zlib.decompressobj()
    try:
        return (press.decompress(data) + press.flush()).decode()
    except (zlib.error, UnicodeDecodeError):
        raise LamwrightError("a design file in the ledger is damaged") from None
