"""Heavy libraries are loaded by the commands that need them, never before."""

from __future__ import annotations

import subprocess
import sys

import pytest

HEAVY = ("numpy", "sqlalchemy", "alembic", "openpyxl", "pandas", "scipy")
RUN = """
import sys
from chooser.cli.app import app
try:
    app(sys.argv[1:])
except SystemExit as end:
    print("status", end.code, file=sys.stderr)
print("loaded", *(name for name in {heavy} if name in sys.modules), file=sys.stderr)
"""


def loaded_after(*arguments: str) -> set[str]:
    done = subprocess.run(
        [sys.executable, "-c", RUN.format(heavy=HEAVY), *arguments],
        capture_output=True,
        text=True,
        check=True,
    )
    assert "status 0" in done.stderr, done.stderr
    return set(done.stderr.splitlines()[-1].split()[1:])


@pytest.mark.parametrize(
    "arguments",
    [["--help"], ["stock", "--help"], ["stock", "load", "--help"], ["db", "--help"]],
    ids=" ".join,
)
def test_help_loads_nothing_heavy(arguments):
    assert loaded_after(*arguments) == set()


def test_listing_the_stock_needs_no_library_of_databases(tmp_path):
    db = str(tmp_path / "stock.db")
    part = ["stock", "add", "10k 5% carbon film", "--count", "3", "--drawer", "A1"]
    assert {"sqlalchemy", "alembic"} <= loaded_after(*part, "--db", db)
    assert loaded_after("stock", "list", "--db", db) == set()


@pytest.mark.parametrize(
    "module",
    [
        "quantities",
        "quantities.markings",
        "preferred",
        "parts",
        "errors",
        "technologies",
        "stock.snapshot",
        "stock.upgrade",
        "cli.tables",
    ],
)
def test_light_modules_stay_light(module):
    script = f"import chooser.{module}, sys; print(*(n for n in {HEAVY} if n in sys.modules))"
    done = subprocess.run(
        [sys.executable, "-c", script], capture_output=True, text=True, check=True
    )
    assert done.stdout.split() == []
