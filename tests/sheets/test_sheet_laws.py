"""Laws of the sheet reader: any bytes are read or refused, and what was written is read back."""

from __future__ import annotations

import csv
import io
import tempfile
import unicodedata
import zipfile
from pathlib import Path

import openpyxl
import pytest
from hypothesis import HealthCheck, given, settings
from hypothesis import strategies as st

from chooser.errors import SheetError
from chooser.parts import Count, Entry, Kind, Part, Sureness, Taper, Tolerance
from chooser.quantities import (
    format_capacitance,
    format_count,
    format_current,
    format_percent,
    format_power,
    format_resistance,
    format_tempco,
    format_tolerance,
    format_voltage,
)
from chooser.sheets.columns import COLUMNS
from chooser.sheets.reading import read_sheets
from chooser.technologies import technology_names

_QUICK = settings(max_examples=80, deadline=None, suppress_health_check=[HealthCheck.too_slow])
_HEADINGS = [column.name for column in COLUMNS]


def _read(name, content):
    """Read one file of that content; give the entries or the refusal, let anything else out."""
    with tempfile.TemporaryDirectory() as folder:
        path = Path(folder) / name
        path.write_bytes(content)
        result = _outcome(path)
        if isinstance(result, SheetError):
            assert result.findings
            for finding in result.findings:
                assert finding.file.startswith(str(path))
                assert str(finding).endswith(".")
        else:
            assert result
        return result


def _outcome(path):
    try:
        return read_sheets([path])
    except SheetError as error:
        return error


_FRAGMENTS = st.sampled_from(
    [
        *(heading.encode() for heading in _HEADINGS),
        *(kind.value.encode() for kind in Kind),
        *(b",", b";", b"\n", b"\r\n", b'"', b'""', b"'", b"=", b"\t", b"\xff", b"\xef\xbb\xbf"),
        *(b"4k7", b"104", b"473K", b"E12 10..1M", b"20", b"~50", b"plenty", b"-1", b"1,000", b"A4"),
        *(b"5%", b"0.05", b"-20/+80%", b"sep=;\n", b"\0", b"PK\x03\x04", b"1e999", "Ω".encode()),
    ]
)
_PIECES = st.lists(st.one_of(_FRAGMENTS, st.binary(max_size=4)), max_size=60).map(b"".join)
_HEAD = b"kind,value,count,drawer,tolerance,technology,measured,taper,note\n"


@_QUICK
@given(st.one_of(st.binary(max_size=300), _PIECES, _PIECES.map(_HEAD.__add__)))
def test_any_bytes_as_csv_are_read_or_refused(content):
    _read("any.csv", content)


@_QUICK
@given(
    st.lists(
        st.lists(st.one_of(st.text(max_size=12), st.sampled_from(_HEADINGS)), max_size=6),
        max_size=6,
    )
)
def test_any_cells_are_read_or_refused(rows):
    buffer = io.StringIO(newline="")
    csv.writer(buffer).writerows([["kind", "value", "count", "drawer", "taper", "note"], *rows])
    _read("cells.csv", buffer.getvalue().encode("utf-8", "replace"))


def _workbook():
    book = openpyxl.Workbook()
    book.active.append(["kind", "value", "count", "drawer", "tolerance"])
    book.active.append(["resistor", 4700, 20, "A1", 0.05])
    book.active.append(["capacitor", "104", "~50", "C1", "10%"])
    book.active["E2"].number_format = "0%"
    buffer = io.BytesIO()
    book.save(buffer)
    return buffer.getvalue()


_BOOK = _workbook()


def test_the_workbook_that_is_spoilt_below_is_good():
    assert len(_read("good.xlsx", _BOOK)) == 2


@_QUICK
@given(st.one_of(st.binary(max_size=300), st.binary(max_size=60).map(b"PK\x03\x04".__add__)))
def test_any_bytes_as_xlsx_are_read_or_refused(content):
    assert isinstance(_read("any.xlsx", content), SheetError)


@_QUICK
@given(st.integers(0, len(_BOOK) - 1), st.binary(min_size=1, max_size=8))
def test_a_workbook_with_spoilt_bytes_is_read_or_refused(at, spoilt):
    _read("spoilt.xlsx", _BOOK[:at] + spoilt + _BOOK[at + len(spoilt) :])


@_QUICK
@given(st.integers(0, len(_BOOK) - 1))
def test_a_workbook_that_was_cut_off_is_refused(at):
    assert isinstance(_read("cut.xlsx", _BOOK[:at]), SheetError)


_MEMBERS = sorted(zipfile.ZipFile(io.BytesIO(_BOOK)).namelist())
_XML = st.sampled_from(
    [b"<", b">", b'"', b"0", b"-1", b"99999999", b"<v>1</v>", b"<f>1+1</f>", b't="s"', b't="d"']
)


@_QUICK
@given(
    st.sampled_from(_MEMBERS),
    st.floats(0, 1),
    st.integers(0, 12),
    st.one_of(_XML, st.binary(max_size=8)),
)
def test_a_workbook_with_spoilt_content_is_read_or_refused(member, where, length, spoilt):
    buffer = io.BytesIO()
    with (
        zipfile.ZipFile(io.BytesIO(_BOOK)) as old,
        zipfile.ZipFile(buffer, "w", zipfile.ZIP_DEFLATED) as new,
    ):
        for name in old.namelist():
            content = old.read(name)
            if name == member:
                at = int(where * len(content))
                content = content[:at] + spoilt + content[at + length :]
            new.writestr(name, content)
    _read("content.xlsx", buffer.getvalue())


def _decimals(low, high, digits=4):
    """Floats of decimal text with few digits, as people write them."""
    return st.builds(
        lambda number, power: float(f"{number}e{power}"),
        st.integers(1, 10**digits - 1),
        st.integers(low, high),
    )


def _printable(text):
    kept = "".join(
        character if unicodedata.category(character)[0] != "C" else " " for character in text
    )
    return " ".join(kept.split())


_TEXTS = st.text(max_size=30).map(_printable)
_FRACTIONS = st.integers(1, 9999).map(lambda number: float(f"{number}e-4"))
_COUNTS = st.one_of(
    st.builds(Count, st.integers(0, 10**6), st.sampled_from([Sureness.EXACT, Sureness.ROUGH])),
    st.just(Count(0, Sureness.PLENTY)),
)


def _maybe(strategy):
    return st.one_of(st.none(), strategy)


@st.composite
def _parts(draw):
    kind = draw(st.sampled_from(Kind))
    is_capacitor = kind is Kind.CAPACITOR
    is_pot = kind in {Kind.POT, Kind.TRIMMER}
    value = draw(_decimals(-12, -6) if is_capacitor else _decimals(-2, 5))
    ratio = draw(_maybe(st.integers(340, 2990)))
    return Part(
        kind=kind,
        value=value,
        marking=format_capacitance(value) if is_capacitor else format_resistance(value),
        tolerance=draw(_maybe(st.builds(Tolerance, _FRACTIONS, _FRACTIONS))),
        technology=draw(_maybe(st.sampled_from(technology_names(kind)))),
        power=None if is_capacitor else draw(_maybe(_decimals(-3, -1))),
        voltage=draw(_maybe(_decimals(-2, -1))),
        tempco=draw(_maybe(st.integers(1, 5000).map(lambda ppm: float(f"{ppm}e-6")))),
        measured=None if ratio is None else float(f"{value * ratio / 1000:.6g}"),
        meter=draw(_maybe(_FRACTIONS)),
        leakage=draw(_maybe(_decimals(-9, -5))) if is_capacitor else None,
        taper=draw(_maybe(st.sampled_from(Taper))) if is_pot else None,
        turns=draw(_maybe(st.sampled_from([0.75, 1.0, 10.0, 25.0]))) if is_pot else None,
        end_resistance=float(f"{value / 50:.3g}") if is_pot and draw(st.booleans()) else None,
        price=draw(_maybe(st.integers(0, 99_999).map(lambda cents: float(f"{cents}e-2")))),
        pack=draw(_maybe(st.integers(1, 5000))),
        supplier=draw(_TEXTS),
        order_code=draw(_TEXTS),
        note=draw(_TEXTS),
    )


_ENTRIES = st.lists(
    st.builds(Entry, _parts(), _TEXTS.filter(bool), _COUNTS, st.just("")),
    min_size=1,
    max_size=6,
    unique_by=lambda entry: entry.identity,
)


def _cells(entry):
    """Write an entry as a sheet says it, in the order of the columns."""
    part = entry.part
    value = format_capacitance if part.kind is Kind.CAPACITOR else format_resistance

    def written(write, number):
        return "" if number is None else write(number)

    return [
        part.kind.value,
        part.marking,
        format_count(entry.count),
        entry.drawer,
        written(format_tolerance, part.tolerance),
        part.technology or "",
        written(format_power, part.power),
        written(format_voltage, part.voltage),
        written(format_tempco, part.tempco),
        written(value, part.measured),
        written(format_percent, part.meter),
        written(format_current, part.leakage),
        written(str, part.taper),
        written(repr, part.turns),
        written(format_resistance, part.end_resistance),
        written(repr, part.price),
        written(str, part.pack),
        part.supplier,
        part.order_code,
        part.note,
    ]


def _guarded(text):
    """Put the apostrophe before a text that a spreadsheet would take for a formula."""
    return f"'{text}" if text.startswith(("=", "+", "-", "@", "'")) else text


def _without_places(entries):
    return [Entry(entry.part, entry.drawer, entry.count, "") for entry in entries]


@_QUICK
@given(_ENTRIES, st.sampled_from([",", ";", "\t"]), st.sampled_from(["\n", "\r\n"]))
def test_what_was_written_to_a_csv_sheet_is_read_back(entries, separator, line_end):
    buffer = io.StringIO(newline="")
    writer = csv.writer(buffer, delimiter=separator, lineterminator=line_end)
    writer.writerow(_HEADINGS)
    for entry in entries:
        writer.writerow([_guarded(text) for text in _cells(entry)])
    back = _read("back.csv", buffer.getvalue().encode())
    assert not isinstance(back, SheetError), str(back)
    assert _without_places(back) == entries


@settings(_QUICK, max_examples=30)
@given(_ENTRIES)
def test_what_was_written_to_a_workbook_is_read_back(entries):
    book = openpyxl.Workbook()
    for number, row in enumerate([_HEADINGS, *map(_cells, entries)], 1):
        for column, text in enumerate(row, 1):
            if text:
                cell = book.active.cell(number, column, text)
                cell.data_type = "s"  # else a text such as =1 becomes a formula
    buffer = io.BytesIO()
    book.save(buffer)
    back = _read("back.xlsx", buffer.getvalue())
    assert not isinstance(back, SheetError), str(back)
    assert _without_places(back) == entries


@pytest.mark.slow
@settings(_QUICK, max_examples=3000)
@given(_PIECES.map(_HEAD.__add__))
def test_many_more_bytes_as_csv_are_read_or_refused(content):
    _read("any.csv", content)
