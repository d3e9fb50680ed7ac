from __future__ import annotations

import io
import json
import os
import subprocess
import sys

import openpyxl
import pytest
from typer.testing import CliRunner

from chooser.cli import tables
from chooser.cli.app import app
from chooser.cli.stock_source import entries_from
from chooser.cli.stock_view import print_holdings
from chooser.parts import Count, Holding, Kind, Part, Sureness, Tolerance
from chooser.stock import ledger
from chooser.stock.snapshot import read_stock

HEADINGS = "id drawer part count claimed free"
SHEET = """kind,value,count,drawer,tolerance,technology,voltage
resistor,4k7,20,A1,5%,carbon film,
resistor,22k,~50,A2,1%,metal film,
capacitor,104,plenty,C1,10%,polyester,63V
"""


@pytest.fixture
def bench(tmp_path, monkeypatch):
    """A bench with a sheet and a way to call chooser: status, stdout, stderr."""
    monkeypatch.setenv("CHOOSER_DB", str(tmp_path / "stock.db"))
    monkeypatch.setenv("NO_COLOR", "1")
    monkeypatch.chdir(tmp_path)
    (tmp_path / "parts.csv").write_text(SHEET, encoding="utf-8")

    def call(*arguments):
        result = CliRunner().invoke(app, arguments)
        return result.exit_code, result.stdout, result.stderr

    return call


def test_load_list_and_load_again(bench):
    status, out, err = bench("stock", "load", "parts.csv")
    assert (status, err) == (0, "")
    assert out == "Loaded: 3 holdings new in 3 drawers.\n"
    status, out, err = bench("stock", "list")
    assert (status, err) == (0, "")
    assert [line.split() for line in out.splitlines()] == [
        HEADINGS.split(),
        ["1", "A1", "4k7", "5%", "carbon-film", "20", "20"],
        ["2", "A2", "22k", "1%", "metal-film", "~50", "50"],
        ["3", "C1", "100n", "10%", "63", "V", "polyester", "plenty", "plenty"],
    ]
    _, out, _ = bench("stock", "load", "parts.csv")
    assert out == "Nothing differs: 3 holdings as the stock has them already.\n"


def test_a_preview_shows_and_changes_nothing(bench, tmp_path):
    status, out, _ = bench("stock", "load", "parts.csv", "--preview")
    assert status == 0
    assert "Loading would bring: 3 holdings new in 3 drawers." in out
    assert "100n 10% 63 V polyester capacitor" in out
    assert not (tmp_path / "stock.db").exists()


def test_a_changed_sheet_shows_before_and_after(bench, tmp_path):
    bench("stock", "load", "parts.csv")
    changed = SHEET.replace("4k7,20", "4k7,18").replace("22k,~50,A2,1%", "22k,~50,A2,2%")
    (tmp_path / "parts.csv").write_text(changed, encoding="utf-8")
    _, out, _ = bench("stock", "load", "parts.csv")
    lines = out.splitlines()
    assert lines[1].split() == [
        "recount",
        "A1",
        "1:",
        "4k7",
        "5%",
        "carbon-film",
        "resistor",
        "20",
        "18",
    ]
    assert lines[2].split()[:4] == ["amend", "A2", "2:", "22k"]
    assert lines[2].endswith("tolerance 1%  tolerance 2%")
    assert lines[3] == "Loaded: 1 recounted, 1 amended, 1 unchanged."


def test_what_the_sheet_leaves_out_is_told_with_a_way_that_works(bench, tmp_path):
    bench("stock", "load", "parts.csv")
    (tmp_path / "parts.csv").write_text(SHEET.replace("22k,~50", "23k,~50"), encoding="utf-8")
    _, out, _ = bench("stock", "load", "parts.csv")
    assert "Not in these sheets" in out
    assert "2 in A2; where one is gone, or has become another row, load its old row once" in out


def test_json_is_the_only_thing_on_stdout(bench):
    status, out, _ = bench("stock", "load", "parts.csv", "--json")
    loaded = json.loads(out)
    assert status == 0
    assert (loaded["schema"], loaded["preview"], loaded["change"]) == (1, False, 1)
    assert [entry["place"] for entry in loaded["new"]] == [f"parts.csv row {n}" for n in (2, 3, 4)]
    _, out, _ = bench("stock", "list", "--kind", "capacitor", "--json")
    (holding,) = json.loads(out)["holdings"]
    assert holding["value"] == 1e-7
    assert holding["tolerance"] == {"minus": 0.1, "plus": 0.1}
    assert (holding["count"]["sureness"], holding["free"]) == ("plenty", None)


def test_add_makes_a_holding_or_adds_to_it(bench):
    part = ("stock", "add", "10k 1% metal film", "--drawer", "A4")
    status, out, _ = bench(*part, "--count", "50")
    assert status == 0
    assert out.splitlines()[1].split() == [
        "1",
        "A4",
        "10k",
        "1%",
        "metal-film",
        "50",
        "50",
    ]
    _, out, _ = bench(*part, "--count", "5", "--json")
    added = json.loads(out)
    assert (added["created"], added["holding"]["count"]["number"]) == (False, 55)
    assert added["amended"] == []


def test_add_says_which_traits_it_amended(bench):
    part = ("stock", "add", "100u 25V electrolytic", "--drawer", "F2", "--count", "1")
    bench(*part, "--measured", "94u", "--note", "old")
    more = ("--measured", "94u", "--note", "new", "--leakage", "2uA", "--meter", "0.5%")
    status, out, err = bench(*part, *more)
    assert status == 0
    assert err == (
        "Holding 1 was amended: meter (none) to 0.5%, leakage (none) to 2 uA, note old to new.\n"
    )
    words = "100u 25 V electrolytic, measured 94u, meter 0.5%, leakage 2 uA, new"
    assert words in out
    _, out, _ = bench(*part, *more, "--json")
    assert json.loads(out)["amended"] == []


def test_everything_that_was_entered_can_be_checked_in_the_list(bench):
    pot = ("stock", "add", "10k 10-turns pot log 1W 100ppm", "--drawer", "P1", "--count", "1")
    bench(*pot, "--end-resistance", "2R", "--note", "for the horn")
    _, out, _ = bench("stock", "list")
    words = "10k 1 W 100 ppm/K log 10-turn pot, end resistance 2R, for the horn"
    assert out.splitlines()[1].split() == ["1", "P1", *words.split(), "1", "1"]


def test_eighty_columns_hold_a_holding_in_a_line(monkeypatch):
    monkeypatch.setattr("shutil.get_terminal_size", lambda: os.terminal_size((80, 24)))
    monkeypatch.setattr(tables, "print_line", (lines := []).append)
    monkeypatch.setattr(tables.sys, "stdout", Terminal())
    part = Part(
        Kind.CAPACITOR,
        1e-4,
        "",
        Tolerance(0.2, 0.2),
        "electrolytic",
        voltage=25.0,
        measured=1.12e-4,
    )
    print_holdings([Holding(1234, part, "M2", Count(50, Sureness.ROUGH), 10)])
    assert [len(line) <= 80 for line in lines] == [True, True]
    assert "100u 20% 25 V electrolytic, measured 112u" in lines[1]


class Terminal(io.StringIO):
    def isatty(self):
        return True


def long_sheet(path, rows):
    lines = (f"resistor,{number}R5,1,A{number}\n" for number in range(1, rows + 1))
    path.write_text("kind,value,count,drawer\n" + "".join(lines), encoding="utf-8")


@pytest.mark.parametrize(
    ("rows", "stream", "shown"),
    [(2001, Terminal, True), (2000, Terminal, False), (2001, io.StringIO, False)],
)
def test_a_long_sheet_shows_how_far_it_is_on_a_terminal_only(
    tmp_path, monkeypatch, rows, stream, shown
):
    long_sheet(tmp_path / "long.csv", rows)
    monkeypatch.setattr(sys, "stderr", err := stream())
    assert len(entries_from([tmp_path / "long.csv"])) == rows
    assert ("100%" in err.getvalue()) == shown


def test_a_worksheet_that_was_passed_over_is_told_on_stderr(bench, tmp_path):
    book = openpyxl.Workbook()
    for row in (["kind", "value", "count", "drawer"], ["resistor", "1k", 1, "A1"]):
        book.active.append(row)
    book.create_sheet("Wanted").append(["Wert", "Anzahl"])
    book.save(tmp_path / "club.xlsx")
    for arguments in (["stock", "load"], ["fit", "monostable", "1ms", "--stock"]):
        _, out, err = bench(*arguments, "club.xlsx")
        assert "club.xlsx [Wanted] was passed over" in err
        assert "Wanted" not in out


def test_list_shows_what_is_claimed(bench, tmp_path):
    bench("stock", "load", "parts.csv")
    ledger.claim(tmp_path / "stock.db", {1: 6}, "horn board")
    _, out, _ = bench("stock", "list", "--drawer", "a1")
    assert out.splitlines()[1].split()[-3:] == ["20", "6", "14"]


@pytest.mark.parametrize(
    ("arguments", "words"),
    [
        (["stock", "list"], ["There is no stock yet", "chooser stock load FILE"]),
        (["db", "backup"], ["There is no stock yet"]),
        (["stock", "load", "missing.csv"], ["missing.csv"]),
        (["stock", "add", "blub", "--count", "1", "--drawer", "A"], ["'blub'", "10k"]),
        (["stock", "add", "10k", "--count", "-3", "--drawer", "A"], ["-3"]),
        (["stock", "list", "--db", "."], ["is a folder"]),
        (["stock", "list", "--db", "~nosuchuser/x.db"], ["~nosuchuser"]),
        (["stock", "list", "--db", "x" * 300], ["cannot be reached"]),
        (["db", "backup", "x" * 300, "--db", "parts.csv"], ["is not a stock database"]),
        (["stock", "add", "10k", "--count", "1", "--drawer", "A\x1b[2J"], ["cannot be printed"]),
        (["stock", "list", "--db", "parts.csv"], ["is not a stock database"]),
    ],
)
def test_a_refusal_is_a_sentence_with_status_2(bench, arguments, words):
    status, out, err = bench(*arguments)
    assert (status, out) == (2, "")
    assert all(word in err for word in words)
    assert "Traceback" not in err


def test_every_bad_row_is_named_and_nothing_is_loaded(bench, tmp_path):
    bench("stock", "load", "parts.csv")
    before = read_stock(tmp_path / "stock.db")
    bad = SHEET + "resistor,lk5,5,A3,,,\nresistor,10k,-2,A3,,,\n"
    (tmp_path / "parts.csv").write_text(bad, encoding="utf-8")
    status, out, err = bench("stock", "load", "parts.csv")
    assert (status, out) == (2, "")
    assert "row 5" in err
    assert "lk5" in err
    assert "row 6" in err
    assert read_stock(tmp_path / "stock.db") == before


def test_an_unknown_drawer_is_told_with_the_nearest(bench):
    bench("stock", "load", "parts.csv")
    status, _, err = bench("stock", "list", "--drawer", "A11")
    assert status == 2
    assert "did you mean A1" in err


def test_a_stock_without_parts_says_what_to_do(bench):
    bench("db", "upgrade")
    status, out, err = bench("stock", "list")
    assert (status, out) == (0, "")
    assert "chooser stock load FILE" in err


def test_a_kind_the_stock_lacks_is_said(bench):
    bench("stock", "load", "parts.csv")
    status, out, err = bench("stock", "list", "--kind", "trimmer")
    assert (status, out) == (0, "")
    assert err == "No such holding in the stock.\n"


def test_where_backup_and_upgrade(bench, tmp_path):
    db = tmp_path / "stock.db"
    assert bench("db", "where") == (0, f"{db}\n", "")
    _, out, _ = bench("db", "where", "--json")
    assert json.loads(out) == {"schema": 1, "path": str(db), "state": "missing", "form": None}
    assert bench("db", "upgrade") == (0, f"An empty stock was made at {db}.\n", "")
    assert "is up to date" in bench("db", "upgrade")[1]
    status, out, _ = bench("db", "backup", "copy.db", "--json")
    assert (status, json.loads(out)["copy"]) == (0, "copy.db")
    assert read_stock(tmp_path / "copy.db") == read_stock(db)
    status, _, err = bench("db", "backup", "copy.db")
    assert status == 2
    assert "exists already" in err


COMMANDS = [("stock", name) for name in ("load", "add", "list")] + [
    ("db", name) for name in ("where", "backup", "upgrade")
]


@pytest.mark.parametrize("command", COMMANDS, ids=" ".join)
def test_every_help_has_an_example(bench, command):
    status, out, _ = bench(*command, "--help")
    assert status == 0
    assert f"Example: chooser {' '.join(command)}" in out


def test_as_a_whole_process_a_refusal_has_no_traceback(tmp_path):
    done = subprocess.run(
        [sys.executable, "-m", "chooser", "stock", "list", "--db", str(tmp_path / "none.db")],
        capture_output=True,
        text=True,
        check=False,
    )
    assert (done.returncode, done.stdout) == (2, "")
    assert done.stderr.startswith("There is no stock yet at ")
    assert len(done.stderr.splitlines()) == 1
