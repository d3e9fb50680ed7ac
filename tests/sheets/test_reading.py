from __future__ import annotations

import csv
import os
import subprocess
import sys
import time
from pathlib import Path

import pytest

from chooser.errors import Exit, SheetError
from chooser.sheets import reading
from chooser.sheets.reading import read_sheets

_ROW = "kind,value,count,drawer\nresistor,{},20,A4\n"


def test_a_folder_is_read_in_order_of_name(tmp_path):
    for name, value in (("b.csv", "2k"), ("a.CSV", "1k"), (".hidden.csv", "x"), ("~$a.xlsx", "x")):
        (tmp_path / name).write_text(_ROW.format(value))
    (tmp_path / "README.txt").write_text("not a sheet")
    (tmp_path / "old.csv").mkdir()
    assert [entry.part.marking for entry in read_sheets([tmp_path])] == ["1k", "2k"]


def test_files_and_folders_may_be_mixed_and_a_file_is_read_once(tmp_path):
    folder = tmp_path / "sheets"
    folder.mkdir()
    (folder / "a.csv").write_text(_ROW.format("1k"))
    (tmp_path / "b.csv").write_text(_ROW.format("2k"))
    paths = [tmp_path / "b.csv", folder, folder / "a.csv"]
    assert [entry.part.marking for entry in read_sheets(paths)] == ["2k", "1k"]


def test_rows_pass_through_what_shows_how_far_it_is(tmp_path):
    path = tmp_path / "a.csv"
    path.write_text(_ROW.format("1k") + "resistor,2k,5,A4\n")
    seen = []

    def through(rows):
        for row in rows:
            seen.append((len(rows), row.number))
            yield row

    assert len(read_sheets([path], through=through)) == 2
    assert seen == [(2, 2), (2, 3)]


def test_nothing_named_is_nothing_read():
    assert read_sheets([]) == ()


@pytest.mark.parametrize(
    ("name", "says"),
    [
        ("missing.csv", "does not exist"),
        ("missing", "does not exist"),
        ("stock.ods", "neither .csv nor .xlsx"),
        ("empty", "without any .csv or .xlsx"),
        ("bad\0name.csv", "cannot be read"),
        ("x" * 300 + ".csv", "cannot be read"),
    ],
)
def test_a_path_that_is_no_sheet_is_refused(tmp_path, the_finding, name, says):
    (tmp_path / "empty").mkdir()
    (tmp_path / "stock.ods").write_bytes(b"PK")
    finding = the_finding(tmp_path / name)
    assert finding.row is None
    assert says in str(finding)


def test_a_device_or_pipe_is_not_waited_for(tmp_path, the_finding):
    os.mkfifo(tmp_path / "pipe.csv")
    assert "plain file" in str(the_finding(tmp_path / "pipe.csv"))


@pytest.mark.skipif(os.geteuid() == 0, reason="root may read anything")
def test_a_file_without_permission_is_refused(tmp_path, the_finding):
    path = tmp_path / "secret.csv"
    path.write_text(_ROW.format("1k"))
    path.chmod(0)
    assert "cannot be read" in str(the_finding(path))


def test_a_link_that_goes_round_in_a_circle_is_refused(tmp_path, the_finding):
    (tmp_path / "round.csv").symlink_to(tmp_path / "round.csv")
    assert the_finding(tmp_path / "round.csv").problem


def test_one_bad_file_refuses_all_of_them(tmp_path):
    (tmp_path / "good.csv").write_text(_ROW.format("1k"))
    (tmp_path / "bad.csv").write_bytes(b"\0")
    with pytest.raises(SheetError) as caught:
        read_sheets([tmp_path / "good.csv", tmp_path / "bad.csv", tmp_path / "gone.csv"])
    assert [Path(finding.file).name for finding in caught.value.findings] == ["bad.csv", "gone.csv"]
    assert caught.value.status is Exit.BAD_INPUT
    assert len(str(caught.value).splitlines()) == 2


def test_too_many_holdings_are_refused(tmp_path, the_finding, monkeypatch):
    monkeypatch.setattr(reading, "MAX_ENTRIES", 100)
    path = tmp_path / "kits.csv"
    path.write_text(
        "kind,value,count,drawer\nresistor,E12 10..1M,20,A1\nresistor,E12 10..1M,20,A2\n"
    )
    finding = the_finding(path)
    assert (finding.row, "100 holdings" in finding.problem) == (3, True)


def test_ten_thousand_rows_are_read_within_five_seconds(tmp_path):
    path = tmp_path / "long.csv"
    with path.open("w", newline="") as file:
        writer = csv.writer(file)
        file.write("kind,value,count,drawer,tolerance,technology,power,voltage,note\n")
        for number in range(1, 10_001):
            drawer = f"A{number % 90}"
            writer.writerow(
                ["resistor", f"{number}R5", number % 50, drawer, "5%", "cf", "1/4W", "250V", "kit"]
            )
    start = time.perf_counter()
    entries = read_sheets([path])
    assert time.perf_counter() - start < 5
    assert len(entries) == 10_000
    assert entries[-1].part.value == 10_000.5


def test_reading_a_csv_sheet_loads_no_heavy_library(tmp_path):
    path = tmp_path / "stock.csv"
    path.write_text(_ROW.format("1k"))
    program = (
        "import sys; from pathlib import Path; from chooser.sheets.reading import read_sheets; "
        f"read_sheets([Path({str(path)!r})]); "
        "print([n for n in ('numpy', 'openpyxl', 'sqlalchemy', 'pandas') if n in sys.modules])"
    )
    done = subprocess.run(
        [sys.executable, "-c", program],
        capture_output=True,
        text=True,
        check=True,
        cwd=Path(reading.__file__).parents[2],
    )
    assert done.stdout == "[]\n"
