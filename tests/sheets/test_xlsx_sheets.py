from __future__ import annotations

import datetime as dt
import io
import zipfile

import openpyxl
import pytest

from chooser.parts import Count, Kind, Tolerance
from chooser.sheets.grid import MAX_COLUMNS, MAX_ROWS, MAX_UNPACKED_BYTES
from chooser.sheets.reading import read_sheets

_HEAD = ["kind", "value", "count", "drawer"]


def _saved(book, path):
    book.save(path)
    return path


def _with_cell(tmp_path, column, value, number_format="General"):
    """Write one good row with one more cell in it, of a given format."""
    row = dict(zip(_HEAD, ("resistor", "10k", 20, "A1"), strict=True)) | {column: value}
    book = openpyxl.Workbook()
    book.active.append(list(row))
    book.active.append(list(row.values()))
    book.active.cell(2, list(row).index(column) + 1).number_format = number_format
    return _saved(book, tmp_path / "cell.xlsx")


def test_number_cells_are_read_as_a_spreadsheet_shows_them(read):
    resistor, long, capacitor = read(
        [
            _HEAD,
            ["resistor", 4700, 20.0, 7],
            ["resistor", 1234.567890123456, 1, 7],  # 16 digits, of which 15 are shown
            ["capacitor", 104, "~50", "C1"],
        ]
    )
    assert (resistor.part.value, resistor.count, resistor.drawer) == (4700.0, Count(20), "7")
    assert long.part.value == 1234.56789012346
    assert capacitor.part.value == pytest.approx(100e-9, rel=1e-15)


def test_large_and_small_numbers_keep_their_digits(read):
    large, small = read([_HEAD, ["resistor", 1e7, 1, "A1"], ["resistor", 0.00047, 1, "A1"]])
    assert (large.part.value, small.part.value) == (1e7, 0.00047)


def test_a_percent_cell_is_a_percentage(tmp_path):
    (entry,) = read_sheets([_with_cell(tmp_path, "tolerance", 0.05, "0%")])
    assert entry.part.tolerance == Tolerance(0.05, 0.05)
    (entry,) = read_sheets([_with_cell(tmp_path, "meter", 0.008, "0.00%")])
    assert entry.part.meter == 0.008


def test_a_price_may_have_a_currency_format(tmp_path):
    (entry,) = read_sheets([_with_cell(tmp_path, "price", 1.2, '#,##0.00\\ "€"')])
    assert entry.part.price == 1.2


def test_text_that_looks_like_a_formula_stays_text_where_the_cell_says_so(tmp_path):
    book = openpyxl.Workbook()
    book.active.append([*_HEAD, "note"])
    book.active.append(["resistor", "10k", 20, "A1"])
    cell = book.active.cell(2, 5, "=really text")
    cell.data_type = "s"
    (entry,) = read_sheets([_saved(book, tmp_path / "text.xlsx")])
    assert entry.part.note == "=really text"


@pytest.mark.parametrize(
    ("cell", "says"),
    [
        (("value", "=10*1000", "General"), "formula"),
        (("note", "=A1", "General"), "formula"),
        (("count", "#N/A", "General"), "error"),
        (("count", True, "General"), "truth"),
        (("value", dt.datetime(2024, 2, 1, tzinfo=None), "d-mmm"), "format the cell as text"),  # noqa: DTZ001
        (("power", dt.time(1, 4), "h:mm"), "format the cell as text"),
        (("value", 47, '0"k"'), "'k'"),
        (("measured", 47, '0.0" kΩ"'), "kΩ"),
        (("tolerance", 0.05, "General"), "5%"),
        (("count", -1, "General"), "below zero"),
        (("count", 1.5, "General"), "whole"),
        (("value", 0, "General"), "zero"),
    ],
)
def test_cells_that_do_not_say_what_they_seem_are_refused(tmp_path, the_finding, cell, says):
    finding = the_finding(_with_cell(tmp_path, *cell))
    assert (finding.row, finding.column) == (2, cell[0])
    assert says in str(finding)
    assert finding.advice


def test_blank_rows_are_passed_over_and_row_numbers_are_kept(tmp_path, the_finding):
    book = openpyxl.Workbook()
    book.active.append(_HEAD)
    book.active.append(["resistor", "1k", 1, "A1"])
    for column, value in enumerate(("resistor", "2k", -1, "A1"), 1):
        book.active.cell(40, column, value)
    book.active.cell(500, 1).number_format = "0%"  # a format makes no row of stock
    assert the_finding(_saved(book, tmp_path / "gaps.xlsx")).row == 40


def test_every_visible_stock_sheet_of_a_workbook_is_read(tmp_path, findings):
    book = openpyxl.Workbook()
    book.active.title = "About"
    book.active.append(["What is in the other sheets"])
    for title, drawer in (("Films", "F1"), ("Chips", "C1")):
        sheet = book.create_sheet(title)
        sheet.append(_HEAD)
        sheet.append(["capacitor", "100n", 5, drawer])
    hidden = book.create_sheet("Lists")
    hidden.append(_HEAD)
    hidden.append(["capacitor", "1n", 5, "X"])
    hidden.sheet_state = "hidden"
    path = _saved(book, tmp_path / "club.xlsx")
    notes = []
    entries = read_sheets([path], notes)
    # The page of text is no table; the hidden one might have been meant.
    (note,) = notes
    assert note.startswith(f"{path} [Lists] was passed over, since it is hidden; ")
    assert [entry.drawer for entry in entries] == ["F1", "C1"]
    assert entries[1].place == f"{path} [Chips] row 2"
    book["Chips"]["C2"] = -5
    (finding,) = findings(_saved(book, path))
    assert (finding.file, finding.row) == (f"{path} [Chips]", 2)


def test_a_table_with_other_headings_beside_the_stock_is_told(tmp_path):
    book = openpyxl.Workbook()
    book.active.append(_HEAD)
    book.active.append(["resistor", "1k", 1, "A1"])
    wanted = book.create_sheet("Wanted")
    wanted.append(["Was fehlt", "Wert", "Anzahl"])
    wanted.append(["resistor", "2k", 1])
    private = book.create_sheet("Private")
    private.append(["name", "telephone"])
    private.sheet_state = "veryHidden"
    path = _saved(book, tmp_path / "club.xlsx")
    notes = []
    assert len(read_sheets([path], notes)) == 1
    assert notes == [
        f"{path} [Wanted] was passed over: its first row holds no headings of a stock sheet."
    ]


def test_a_tiny_number_for_a_capacitor_gets_sensible_readings(tmp_path, the_finding):
    book = openpyxl.Workbook()
    book.active.append(_HEAD)
    book.active.append(["capacitor", 1e-7, 1, "C1"])
    finding = the_finding(_saved(book, tmp_path / "tiny.xlsx"))
    assert (finding.seen, finding.advice) == ("0.0000001", "write 100n")


def test_a_cell_beyond_the_headings_is_found(the_finding):
    finding = the_finding([_HEAD, ["resistor", "1k", 1, "A1", None, "stray"]])
    assert (finding.row, finding.seen) == (2, "stray")


@pytest.mark.parametrize(
    ("rows", "says"), [([], "is empty"), ([[None]], "is empty"), ([_HEAD], "no rows")]
)
def test_an_empty_workbook_is_refused(the_finding, rows, says):
    assert says in str(the_finding(rows))


def _workbook_bytes():
    book = openpyxl.Workbook()
    book.active.append(_HEAD)
    book.active.append(["resistor", "1k", 1, "A1"])
    buffer = io.BytesIO()
    book.save(buffer)
    return buffer.getvalue()


def _repacked(change):
    """Pack the workbook again, each member passed through `change(name, content)`."""
    buffer = io.BytesIO()
    with (
        zipfile.ZipFile(io.BytesIO(_workbook_bytes())) as old,
        zipfile.ZipFile(buffer, "w", zipfile.ZIP_DEFLATED) as new,
    ):
        for name in old.namelist():
            new.writestr(name, change(name, old.read(name)))
    return buffer.getvalue()


def _in_sheet(change):
    def changed(name, content):
        return change(content) if name == "xl/worksheets/sheet1.xml" else content

    return _repacked(changed)


_LAUGHS = (
    b'<?xml version="1.0"?><!DOCTYPE x [<!ENTITY a "ha">'
    + b"".join(b'<!ENTITY %c "%s">' % (98 + n, b"&%c;" % (97 + n) * 10) for n in range(9))
    + b"]><worksheet>&j;</worksheet>"
)


@pytest.mark.parametrize(
    ("content", "says"),
    [
        (lambda: b"", "is empty"),
        (lambda: b"kind,value,count,drawer\n", "not an XLSX"),
        (lambda: b"\x00" * 100, "not an XLSX"),
        (lambda: b"PK\x03\x04" + bytes(100), "not an XLSX"),
        (lambda: _workbook_bytes()[:-200], "part of one"),
        (lambda: _workbook_bytes()[:1000], "part of one"),
        (lambda: b"\xd0\xcf\x11\xe0\xa1\xb1\x1a\xe1" + bytes(500), "password"),
        (lambda: _repacked(lambda _, content: content[: len(content) // 2]), "damaged"),
        (lambda: _in_sheet(lambda _: b""), "damaged"),
        (lambda: _in_sheet(lambda _: _LAUGHS), "damaged"),
        (lambda: _in_sheet(lambda old: old.replace(b"<v>1</v>", b"<v>one</v>")), "damaged"),
    ],
)
def test_a_file_that_is_no_workbook_is_refused_with_one_finding(the_finding, content, says):
    finding = the_finding(content(), "broken.xlsx")
    assert finding.row is None
    assert says in str(finding)


def test_a_packed_bomb_stays_packed(the_finding):
    packed = _in_sheet(lambda old: old + b" " * MAX_UNPACKED_BYTES)
    assert len(packed) < MAX_UNPACKED_BYTES / 100
    assert "unpacks to" in str(the_finding(packed, "bomb.xlsx"))


def test_a_row_far_below_is_refused_and_not_walked_to(the_finding):
    far = _in_sheet(lambda old: old.replace(b'<row r="2"', b'<row r="%d"' % 10**12))
    assert str(MAX_ROWS) in str(the_finding(far, "far.xlsx"))


def test_a_false_declared_size_hides_no_row(sheet):
    short = _in_sheet(lambda old: old.replace(b'ref="A1:D2"', b'ref="A1:A1"'))
    assert short != _workbook_bytes()
    (entry,) = read_sheets([sheet(short, "short.xlsx")])
    assert entry.part.kind is Kind.RESISTOR


def test_a_row_as_wide_as_allowed_is_looked_at_to_its_end(the_finding):
    finding = the_finding(
        [_HEAD, ["resistor", "1k", 1, "A1", *[None] * (MAX_COLUMNS - 5), "stray"]]
    )
    assert finding.seen == "stray"


def test_more_columns_than_allowed_are_refused_and_not_cut_off(the_finding):
    finding = the_finding(
        [_HEAD, ["resistor", "1k", 1, "A1", *[None] * (MAX_COLUMNS - 4), "beyond"]]
    )
    assert (finding.row, finding.problem) == (2, "has more than 256 columns in 'Sheet'")
