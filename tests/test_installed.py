"""What is installed works away from the checkout: data files and migrations are inside."""

from __future__ import annotations

import os
import shutil
import subprocess
import sys
from pathlib import Path

import pytest

ROOT = Path(__file__).parent.parent
PARTS = ("chooser", "migrations", "pyproject.toml", "README.md", "LICENSE")


@pytest.fixture(scope="module")
def installed(tmp_path_factory):
    """Build the wheel from a copy of the tree and unpack it into a folder of its own."""
    tree, target = tmp_path_factory.mktemp("tree"), tmp_path_factory.mktemp("installed")
    for name in PARTS:
        source = ROOT / name
        if source.is_dir():
            shutil.copytree(source, tree / name, ignore=shutil.ignore_patterns("__pycache__"))
        else:
            shutil.copy(source, tree / name)
    pip = [sys.executable, "-m", "pip", "--disable-pip-version-check", "--quiet"]
    # Without isolation or dependencies nothing is fetched: what is there builds it.
    offline = ["--no-deps", "--no-build-isolation", "--no-index"]
    subprocess.run(
        [*pip, "install", *offline, "--target", str(target), str(tree)],
        check=True,
        capture_output=True,
        text=True,
    )
    return target


def run(installed: Path, folder: Path, *arguments: str) -> subprocess.CompletedProcess[str]:
    return subprocess.run(
        [sys.executable, "-m", "chooser", *arguments],
        cwd=folder,
        env=os.environ | {"PYTHONPATH": str(installed), "CHOOSER_DB": str(folder / "stock.db")},
        capture_output=True,
        text=True,
        check=False,
    )


@pytest.mark.slow
def test_the_wheel_holds_what_is_read_at_run_time(installed):
    package = installed / "chooser"
    revisions = sorted(path.name for path in (ROOT / "migrations/versions").glob("*.py"))
    assert revisions
    kept = sorted(path.name for path in (package / "migrations/versions").glob("*.py"))
    assert kept == revisions
    assert (package / "migrations/env.py").is_file()
    assert (package / "circuits/timers.toml").is_file()


@pytest.mark.slow
def test_it_works_from_another_folder(installed, tmp_path):
    where = subprocess.run(
        [sys.executable, "-c", "import chooser; print(chooser.__file__)"],
        cwd=tmp_path,
        env=os.environ | {"PYTHONPATH": str(installed)},
        capture_output=True,
        text=True,
        check=True,
    )
    assert Path(where.stdout.strip()).is_relative_to(installed)  # and not the checkout
    loaded = run(installed, tmp_path, "stock", "load", str(ROOT / "sample_inventory"))
    assert (loaded.returncode, loaded.stderr) == (0, "")
    assert loaded.stdout.startswith("Loaded: ")
    fitted = run(installed, tmp_path, "fit", "monostable", "90s", "--timer", "TLC555")
    assert (fitted.returncode, fitted.stderr) == (0, "")
