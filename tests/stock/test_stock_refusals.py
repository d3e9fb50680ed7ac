from __future__ import annotations

import os
import sqlite3
import subprocess
import sys
import tempfile
from contextlib import closing
from pathlib import Path

import pytest

from chooser.errors import StockError
from chooser.parts import Count
from chooser.stock import connection, ledger, loading, upgrade
from chooser.stock.location import database_path
from chooser.stock.snapshot import read_stock

WRITING = {
    "load": lambda db, entry: loading.apply(db, [entry]),
    "add": ledger.add,
    "count": lambda db, _entry: ledger.correct(db, 1, Count(99)),
    "claim": lambda db, _entry: ledger.claim(db, {1: 1}, "horn"),
}
# As somebody who may read the stock and its folder but not write there.
AS_A_GUEST = """
import os, sys
from pathlib import Path
import alembic.command, alembic.config  # while the guest may still read the libraries
from chooser.errors import StockError
from chooser.parts import Count, Entry, Kind, Part
from chooser.stock import loading
from chooser.stock.snapshot import read_stock
db = Path(sys.argv[1])
db.chmod(0o444); db.parent.chmod(0o555)
loading.compare(db, [])
if os.geteuid() == 0:
    os.setgid(65534); os.setuid(65534)
print(len(read_stock(db)))
shut = db.parent / "shut" / "stock.db"
try:
    read_stock(shut)
except StockError as error:
    print(error)
for path in (db, db.parent / "new.db", db.parent / "new folder" / "stock.db"):
    try:
        loading.apply(path, [Entry(Part(Kind.RESISTOR, 1e3), "Z9", Count(1), "row 2")])
    except StockError as error:
        print(error)
"""


def test_the_stock_is_where_the_user_says_else_in_the_user_data_folder(monkeypatch, tmp_path):
    monkeypatch.setenv("XDG_DATA_HOME", str(tmp_path))
    monkeypatch.setenv("HOME", str(tmp_path))
    assert database_path("~/my.db") == tmp_path / "my.db"
    assert database_path(None).name == "stock.db"
    assert "chooser" in database_path(None).parts


@pytest.mark.parametrize(
    ("name", "words"),
    [
        ("~nosuchuser/x.db", "home folder, ~nosuchuser"),
        ("a\0b.db", "is no name of a file"),
    ],
)
def test_a_name_no_file_can_have_is_refused(name, words):
    with pytest.raises(StockError, match=words):
        database_path(name)


@pytest.mark.parametrize("name", ["x" * 300, "a\0b"], ids=["too long", "NUL"])
def test_a_path_that_cannot_be_reached_is_told(db, say_entry, name):
    path = db.with_name(name)
    for act in (read_stock, lambda path: loading.apply(path, [say_entry()])):
        with pytest.raises(StockError, match="cannot be reached"):
            act(path)
    loading.apply(db, [say_entry()])
    with pytest.raises(StockError, match="cannot be reached"):
        upgrade.backup(db, path)


def test_a_missing_stock_is_told_with_the_two_ways_on(db):
    for act in (read_stock, upgrade.backup, lambda path: ledger.claim(path, {1: 1}, "horn")):
        with pytest.raises(StockError, match=r"no stock yet at .*stock load FILE.*--stock"):
            act(db)
    assert not db.exists()


def test_an_empty_file_counts_as_missing_and_can_be_loaded_into(db, say_entry):
    db.touch()
    with pytest.raises(StockError, match="no stock yet"):
        read_stock(db)
    loading.apply(db, [say_entry()])
    assert len(read_stock(db)) == 1


def foreign_database(path, version=None):
    with closing(sqlite3.connect(path)) as other, other:
        other.execute("CREATE TABLE albums (title TEXT)")
        if version:
            other.execute("CREATE TABLE alembic_version (version_num TEXT)")
            other.execute("INSERT INTO alembic_version VALUES (?)", (version,))


@pytest.mark.parametrize(
    ("make", "message"),
    [
        (lambda path: path.write_text("kind,value\n" * 99), "is not a stock database"),
        (lambda path: path.write_bytes(bytes(range(256)) * 64), "is not a stock database"),
        (foreign_database, "database of another program"),
        (lambda path: foreign_database(path, "0001"), "database of another program"),
        (lambda path: path.mkdir(), "is a folder"),
    ],
    ids=["sheet", "binary", "foreign", "foreign with revisions", "folder"],
)
def test_what_is_no_stock_is_refused_and_untouched(db, say_entry, make, message):
    make(db)
    before = db.read_bytes() if db.is_file() else None
    for act in (read_stock, upgrade.upgrade, lambda path: loading.apply(path, [say_entry()])):
        with pytest.raises(StockError, match=message):
            act(db)
    assert (db.read_bytes() if db.is_file() else None) == before


def test_a_damaged_stock_is_told_as_such(db, say_entry):
    loading.apply(db, [say_entry(1.0 + at, note="x" * 200) for at in range(200)])
    content = bytearray(db.read_bytes())
    page = int.from_bytes(content[16:18])  # the page size (sqlite.org/fileformat.html, 1.3)
    content[5 * page :] = b"\xff" * (len(content) - 5 * page)
    db.write_bytes(content)
    with pytest.raises(StockError, match=r"is damaged .*put back the last copy"):
        read_stock(db)


@pytest.mark.parametrize("act", WRITING.values(), ids=WRITING)
def test_a_locked_stock_is_refused_with_a_sentence(db, say_entry, monkeypatch, act):
    loading.apply(db, [say_entry()])
    monkeypatch.setattr(connection, "BUSY_SECONDS", 0.05)
    with closing(sqlite3.connect(db, isolation_level=None)) as other:
        other.execute("BEGIN IMMEDIATE")
        with pytest.raises(StockError, match="Another program is writing to the stock"):
            act(db, say_entry(count=9))
        assert len(read_stock(db)) == 1  # reading goes on meanwhile


def test_a_full_disk_leaves_the_stock_as_it_was(db, say_entry, monkeypatch):
    loading.apply(db, [say_entry()])
    before = read_stock(db)
    # Beyond this limit SQLite answers SQLITE_FULL as on a full disk (sqlite.org/pragma.html).
    monkeypatch.setattr(connection, "PRAGMAS", ("PRAGMA max_page_count = 30",))
    rows = [say_entry(1.0 + at, drawer="D", note="n" * 99) for at in range(2000)]
    with pytest.raises(StockError, match="no room left on the disk"):
        loading.apply(db, rows)
    monkeypatch.undo()
    assert read_stock(db) == before


def test_a_disk_too_full_for_a_copy_leaves_no_half_copy(db, say_entry, monkeypatch):
    loading.apply(db, [say_entry()])
    copy = db.with_name("copy.db")
    monkeypatch.setattr(connection, "PRAGMAS", ("PRAGMA max_page_count = 2",))
    with pytest.raises(StockError, match="no room left on the disk"):
        upgrade.backup(db, copy)
    assert not copy.exists()
    assert [each.name for each in db.parent.iterdir()] == [db.name]


def test_a_copy_has_its_name_only_once_it_is_whole(db, say_entry, monkeypatch):
    loading.apply(db, [say_entry()])
    copy = db.with_name("copy.db")

    def full(_self, _target):
        assert not copy.exists()
        raise OSError(28, "No space left on device")

    monkeypatch.setattr(Path, "replace", full)
    with pytest.raises(StockError, match=r"copy\.db cannot be written \(no space left"):
        upgrade.backup(db, copy)
    assert [each.name for each in db.parent.iterdir()] == [db.name]
    monkeypatch.undo()
    upgrade.backup(db, copy)
    assert read_stock(copy) == read_stock(db)
    assert sorted(each.name for each in db.parent.iterdir()) == ["copy.db", "stock.db"]


def test_a_file_that_may_not_grow_leaves_the_stock_as_it_was(db, say_entry):
    resource = pytest.importorskip("resource")
    loading.apply(db, [say_entry()])
    before = read_stock(db)
    script = (
        "import sys; from pathlib import Path; from chooser.parts import *\n"
        "from chooser.stock import loading\n"
        "rows = [Entry(Part(Kind.RESISTOR, 1.0 + at, note='n' * 200), 'D', Count(1), '')"
        " for at in range(2000)]\n"
        "loading.apply(Path(sys.argv[1]), rows)\n"
    )

    def limit():
        size = db.stat().st_size + 8192
        resource.setrlimit(resource.RLIMIT_FSIZE, (size, size))

    done = subprocess.run(
        [sys.executable, "-B", "-c", script, str(db)],
        preexec_fn=limit,
        capture_output=True,
        text=True,
        check=False,
    )
    assert done.returncode != 0
    assert "StockError: " in done.stderr
    assert "nothing was changed" in done.stderr
    assert read_stock(db) == before


@pytest.mark.skipif(os.name != "posix", reason="rights are set the POSIX way")
def test_a_read_only_stock_can_be_read_and_refuses_to_be_written(say_entry):
    with tempfile.TemporaryDirectory() as name:  # not tmp_path, which a guest may not enter
        folder = Path(name)
        db = folder / "stock.db"
        loading.apply(db, [say_entry()])
        (folder / "shut").mkdir(mode=0o600)  # without the right to enter
        try:
            done = subprocess.run(
                [sys.executable, "-B", "-c", AS_A_GUEST, str(db)],
                capture_output=True,
                text=True,
                check=False,
            )
        finally:
            folder.chmod(0o755)
    lines = done.stdout.splitlines()
    assert not done.stderr
    assert lines[0] == "1"
    assert "shut/stock.db cannot be reached (permission denied)" in lines.pop(1)
    assert lines[1].endswith("read-only; make it writable, or work on a copy with --db.")
    assert "new.db cannot be opened or created; check that its folder exists" in lines[2]
    assert "new folder for the stock cannot be made (Permission denied)" in lines[3]
