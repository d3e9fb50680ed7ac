"""The direction of imports: edges know the core, the core knows no edge, nobody knows the CLI."""

from __future__ import annotations

import ast
from pathlib import Path

import pytest

import chooser

PACKAGE = Path(chooser.__file__).parent
MODULES = sorted(PACKAGE.rglob("*.py"))
EDGES = ("stock", "sheets", "cli")
EDGE_LIBRARIES = {
    "alembic",
    "defusedxml",
    "openpyxl",
    "pandas",
    "platformdirs",
    "rich",
    "sqlalchemy",
    "sqlite3",
    "typer",
}
ALLOWED_LIBRARIES = {
    "stock": {"alembic", "platformdirs", "sqlalchemy", "sqlite3"},
    "sheets": {"defusedxml", "openpyxl"},
    "cli": {"rich", "typer"},
}
FORBIDDEN_NAMES = {"utils", "common", "core", "manager", "helpers"}


def name_of(module: Path) -> str:
    return ".".join(("chooser", *module.relative_to(PACKAGE).with_suffix("").parts))


def imports_of(source: str) -> set[str]:
    """Give every module imported anywhere in the source, inside functions too."""
    found: set[str] = set()
    for node in ast.walk(ast.parse(source)):
        if isinstance(node, ast.Import):
            found |= {alias.name for alias in node.names}
        elif isinstance(node, ast.ImportFrom):
            assert node.level == 0, "imports are absolute, so that they can be read"
            found |= {f"{node.module}.{alias.name}" for alias in node.names}
    return found


def room_of(dotted: str) -> str:
    """Give the edge a module of ours belongs to, "core" for the rest."""
    parts = dotted.split(".")
    if dotted.startswith("chooser.__main__"):
        return "cli"
    return parts[1] if len(parts) > 1 and parts[1] in EDGES else "core"


def complaints(name: str, source: str) -> list[str]:
    room = room_of(name)
    found = []
    for imported in sorted(imports_of(source)):
        top = imported.split(".")[0]
        if top in EDGE_LIBRARIES and top not in ALLOWED_LIBRARIES.get(room, set()):
            found.append(f"{name} ({room}) imports {top}")
        if top in {"pandas", "scipy"}:
            found.append(f"{name} imports {top}, which nothing here needs")
        if top == "chooser":
            target = room_of(imported)
            allowed = {"core", room} if room != "cli" else {"core", *EDGES}
            if target not in allowed:
                found.append(f"{name} ({room}) imports {imported} ({target})")
    return found


@pytest.mark.parametrize("module", MODULES, ids=name_of)
def test_imports_point_inwards(module):
    assert complaints(name_of(module), module.read_text("utf-8")) == []


@pytest.mark.parametrize(
    ("name", "source"),
    [
        ("chooser.interval", "import sqlalchemy"),
        ("chooser.search.ranking", "def f():\n    from openpyxl import load_workbook"),
        ("chooser.networks", "from chooser import stock"),
        ("chooser.stock.loading", "from chooser.sheets.reading import read_sheets"),
        ("chooser.sheets.reading", "from chooser.stock import snapshot"),
        ("chooser.stock.loading", "from chooser.cli.boundary import say"),
        ("chooser.sheets.reading", "import typer"),
        ("chooser.cli.fit", "import pandas as pd"),
        ("chooser.interval", "from scipy import integrate"),
    ],
)
def test_a_wrong_import_is_found(name, source):
    assert complaints(name, source)


def test_no_module_is_a_drawer_for_everything():
    assert {module.stem for module in MODULES}.isdisjoint(FORBIDDEN_NAMES)
