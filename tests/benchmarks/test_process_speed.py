"""Whole processes: the answer on the sample stock, the help, a large load.

pytest tests/benchmarks --benchmark-only -m ''
"""

from __future__ import annotations

import os
import resource
import subprocess
import sys
from pathlib import Path

ROOT = Path(__file__).parent.parent.parent


def run(*words: str, **more: str) -> str:
    done = subprocess.run(
        [sys.executable, *words],
        cwd=ROOT,
        env=os.environ | more,
        capture_output=True,
        text=True,
        check=True,
    )
    return done.stdout


def test_fit_from_the_database(benchmark, tmp_path):
    benchmark.group = "process: fit monostable 90s"
    db = {"CHOOSER_DB": str(tmp_path / "stock.db")}
    run("-m", "chooser", "stock", "load", "sample_inventory", **db)
    words = ("-m", "chooser", "fit", "monostable", "90s")
    out = benchmark.pedantic(run, words, db, rounds=7, warmup_rounds=1)
    assert "Searched" in out


def test_fit_from_sheets(benchmark):
    benchmark.group = "process: fit monostable 90s"
    words = ("-m", "chooser", "fit", "monostable", "90s", "--stock", "sample_inventory")
    out = benchmark.pedantic(run, words, rounds=7, warmup_rounds=1)
    assert "Searched" in out
    peak = resource.getrusage(resource.RUSAGE_CHILDREN).ru_maxrss / 1024
    benchmark.extra_info["peak MiB of all child processes so far"] = round(peak)


def test_importing_numpy_and_sqlalchemy(benchmark):
    benchmark.group = "process: fit monostable 90s"
    benchmark.pedantic(run, ("-c", "import numpy, sqlalchemy"), rounds=7, warmup_rounds=1)


def test_help(benchmark):
    benchmark.group = "process: help"
    assert "Usage" in benchmark.pedantic(
        run, ("-m", "chooser", "--help"), rounds=7, warmup_rounds=1
    )


def test_load_of_ten_thousand_rows(benchmark, tmp_path):
    benchmark.group = "process: load 10 000 rows"
    sheet = tmp_path / "large.csv"
    rows = [f"resistor,{10 + i}R,20,D{i % 100},1%,metal-film" for i in range(10_000)]
    sheet.write_text("\n".join(["kind,value,count,drawer,tolerance,technology", *rows, ""]))
    fresh = iter(range(100))

    def load() -> str:
        db = str(tmp_path / f"{next(fresh)}.db")
        return run("-m", "chooser", "stock", "load", str(sheet), "--db", db)

    assert "10000 holdings new" in benchmark.pedantic(load, rounds=3, warmup_rounds=1)
