"""What the documents promise is run, not believed."""

from __future__ import annotations

import json
import os
import re
import shlex
import subprocess
import sys
from pathlib import Path

import pytest
import typer

from chooser.circuits.timers import timer_names
from chooser.cli.app import app
from chooser.errors import Exit
from chooser.search.terms import NEAREST, Rank, Rule
from chooser.sheets.columns import COLUMNS

ROOT = Path(__file__).parent.parent
README = (ROOT / "README.md").read_text(encoding="utf-8")
DEVELOPERS = (ROOT / "DEVELOPERS.md").read_text(encoding="utf-8")


def console_lines() -> list[str]:
    blocks = re.findall(r"```console\n(.*?)```", README, re.DOTALL)
    return [line[2:] for block in blocks for line in block.splitlines() if line.startswith("$ ")]


def run(line: str, db: Path) -> subprocess.CompletedProcess[str]:
    words = shlex.split(line)
    assert words[0] == "chooser"
    return subprocess.run(
        [sys.executable, "-m", "chooser", *words[1:]],
        cwd=ROOT,
        env=os.environ | {"CHOOSER_DB": str(db), "NO_COLOR": "1"},
        capture_output=True,
        text=True,
        check=False,
    )


def test_every_example_of_the_readme_runs_in_order(tmp_path):
    lines = console_lines()
    assert len(lines) == 14
    for line in lines:
        done = run(line, tmp_path / "stock.db")
        assert done.returncode == 0, (line, done.stderr)
        assert done.stdout, line
        assert done.stderr == "", line


def test_the_first_and_second_command_of_the_readme_are_single_lines():
    first, second = re.findall(r"^    (python3 -m venv .*)$", README, re.MULTILINE)
    assert first.endswith("chooser fit monostable 90s --stock sample_inventory")
    assert second.endswith("pytest")
    assert "sed -n '/^## Test it/" in (ROOT / ".ci/run").read_text(encoding="utf-8")


def test_the_exit_statuses_are_those_of_the_program():
    rows = dict(re.findall(r"^\| (\d) \| (.+) \|$", README, re.MULTILINE))
    assert set(rows) == {str(int(status)) for status in Exit}


def test_every_rule_order_column_and_timer_is_named():
    for name in (*Rule, *Rank):
        assert f"`{name}`" in README
    assert ", ".join(column.name for column in COLUMNS) in README
    for name in timer_names():
        assert name in README
    assert f"the {NEAREST} nearest" in README


def test_the_json_example_has_the_keys_of_a_real_answer(tmp_path):
    example = json.loads(re.findall(r"```json\n(.*?)```", README, re.DOTALL)[0])
    line = "chooser fit monostable 90s --timer ideal --rank error --json --stock sample_inventory"
    real = json.loads(run(line, tmp_path / "none.db").stdout)
    assert keys_of(example) == keys_of(real)


def keys_of(value):
    """The nested keys of an object; of a list, those of its first item."""
    if isinstance(value, dict):
        return {key: keys_of(inner) for key, inner in value.items()}
    if isinstance(value, list):
        return [keys_of(value[0])] if value else []
    return None


ROOMS = [
    path
    for path in sorted((ROOT / "chooser").iterdir())
    if path.suffix in {"", ".py"} and not path.name.startswith("__")
]


@pytest.mark.parametrize("room", ROOMS, ids=lambda path: path.name)
def test_every_room_is_on_the_map(room):
    assert f"`{room.name}" in DEVELOPERS or f"`{room.stem}`" in DEVELOPERS


def commands() -> list[list[str]]:
    """Every command of every group, as the program itself has them."""
    groups = typer.main.get_command(app).commands
    return [[group, name] for group, inside in groups.items() for name in inside.commands]


def test_there_are_commands():
    known = (["fit", "monostable"], ["stock", "load"], ["stock", "add"], ["stock", "list"])
    assert all(command in commands() for command in known)
    assert all(["db", name] in commands() for name in ("where", "backup", "upgrade"))


@pytest.mark.parametrize("command", commands(), ids=" ".join)
def test_every_command_has_help_with_an_example(command):
    done = subprocess.run(
        [sys.executable, "-m", "chooser", *command, "--help"],
        capture_output=True,
        text=True,
        check=True,
    )
    assert f"Example: chooser {' '.join(command)}" in done.stdout
