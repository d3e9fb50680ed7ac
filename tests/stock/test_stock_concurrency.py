from __future__ import annotations

import os
import random
import re
import signal
import subprocess
import sys
import time
from pathlib import Path

import pytest

import chooser
from chooser.parts import Count, Entry, Kind, Part
from chooser.stock import ledger, loading
from chooser.stock.snapshot import read_stock

ROWS = 3000
# Every process waits for the same file, so that they really run into each other.
CLAIMING = """
import sys, time
from pathlib import Path
from chooser.errors import StockError
from chooser.stock import connection, ledger
connection.BUSY_SECONDS = 60.0
db, gate, tries = Path(sys.argv[1]), Path(sys.argv[2]), int(sys.argv[3])
print("ready", flush=True)
while not gate.exists():
    time.sleep(0.001)
won = 0
for _ in range(tries):
    try:
        ledger.claim(db, {1: 1}, "horn")
        won += 1
    except StockError as error:
        assert "are free" in str(error), error
print(won)
"""
ADDING = """
import sys, time
from pathlib import Path
from chooser.parts import Count, Entry, Kind, Part
from chooser.stock import connection, ledger
connection.BUSY_SECONDS = 60.0
db, gate = Path(sys.argv[1]), Path(sys.argv[2])
print("ready", flush=True)
while not gate.exists():
    time.sleep(0.001)
print(ledger.add(db, Entry(Part(Kind.RESISTOR, 1e3), "A1", Count(1), "")).holding.id)
"""
LOADING = f"""
import sys
from pathlib import Path
from chooser.parts import Count, Entry, Kind, Part
from chooser.stock import loading
rows = [Entry(Part(Kind.RESISTOR, 1.0 + at), f"D{{at % 50}}", Count(2), "") for at in range({ROWS})]
print("ready", flush=True)
loading.apply(Path(sys.argv[1]), rows)
"""


def start(script: str, *arguments: object) -> subprocess.Popen[str]:
    process = subprocess.Popen(
        [sys.executable, "-c", script, *map(str, arguments)],
        stdout=subprocess.PIPE,
        text=True,
    )
    assert process.stdout is not None
    assert process.stdout.readline() == "ready\n"
    return process


def answers(script: str, processes: int, db: Path, *arguments: object) -> list[int]:
    gate = db.parent / "gate"
    running = [start(script, db, gate, *arguments) for _ in range(processes)]
    gate.touch()
    return [int(process.communicate(timeout=120)[0]) for process in running]


def test_two_claims_of_the_last_part_have_one_winner(db):
    loading.apply(db, [Entry(Part(Kind.RESISTOR, 1e3), "A1", Count(1), "")])
    assert sorted(answers(CLAIMING, 2, db, 1)) == [0, 1]
    (holding,) = read_stock(db)
    assert (holding.claimed, holding.free) == (1, 0)


def test_many_claims_at_once_lose_nothing_and_win_no_more_than_there_is(db):
    loading.apply(db, [Entry(Part(Kind.RESISTOR, 1e3), "A1", Count(20), "")])
    assert sum(answers(CLAIMING, 3, db, 10)) == 20
    (holding,) = read_stock(db)
    assert (holding.claimed, holding.free) == (20, 0)


def test_first_additions_at_once_make_one_stock_and_one_holding(db):
    assert answers(ADDING, 3, db) == [1, 1, 1]
    (holding,) = read_stock(db)
    assert holding.count == Count(3)


def kill_in_the_middle(db: Path, seconds: float) -> None:
    """Kill a load after a while and require the stock to be as before or as after."""
    before = read_stock(db)
    process = start(LOADING, db)
    time.sleep(seconds)
    process.kill()
    process.communicate(timeout=30)
    after = read_stock(db)
    assert process.returncode in (0, -signal.SIGKILL)
    assert after == before or len(after) == ROWS + 1
    ledger.claim(db, {1: 1}, "horn")  # and it goes on working
    ledger.release(db, {1: 1}, "horn")


@pytest.fixture
def loaded(db):
    loading.apply(db, [Entry(Part(Kind.CAPACITOR, 1e-6), "F1", Count(1), "")])
    return db


@pytest.mark.skipif(os.name != "posix", reason="SIGKILL")
@pytest.mark.parametrize("seconds", [0.02, 0.2])
def test_a_killed_load_leaves_the_stock_as_before_or_as_after(loaded, seconds):
    kill_in_the_middle(loaded, seconds)


@pytest.mark.slow
@pytest.mark.skipif(os.name != "posix", reason="SIGKILL")
@pytest.mark.parametrize("seed", range(40))
def test_a_load_killed_at_any_moment(loaded, seed):
    kill_in_the_middle(loaded, random.Random(seed).uniform(0, 0.5))


@pytest.mark.skipif(os.name != "posix", reason="SIGKILL")
def test_a_load_killed_inside_its_transaction_is_rolled_back(loaded):
    # The process kills itself after half the rows are written and spilled to the file.
    script = LOADING.replace(
        'print("ready", flush=True)',
        "import os, signal\n"
        "from chooser.stock import connection, register\n"
        "connection.PRAGMAS = ('PRAGMA cache_size = 5',)\n"
        "whole = register.add_movements\n"
        "def die(*arguments):\n"
        "    whole(*arguments)\n"
        "    os.kill(os.getpid(), signal.SIGKILL)\n"
        "register.add_movements = die\n"
        'print("ready", flush=True)',
    )
    before, size = read_stock(loaded), loaded.stat().st_size
    process = start(script, loaded)
    process.communicate(timeout=60)
    assert process.returncode == -signal.SIGKILL
    assert loaded.stat().st_size > size  # it had written into the file
    assert read_stock(loaded) == before
    ledger.claim(loaded, {1: 1}, "horn")


def test_only_the_engine_begins_and_ends_transactions():
    room = Path(chooser.__file__).parent / "stock"
    ending = re.compile(r"\.commit\(|\.rollback\(|\.begin\(|\bBEGIN\b")
    found = {path.name for path in room.glob("*.py") if ending.search(path.read_text("utf-8"))}
    assert found == {"engine.py"}
