"""The bytes of an XLSX file into grids: what each kind of cell says, and what it cannot say."""

from __future__ import annotations

import io
import re
import warnings
import zipfile
from collections.abc import Iterator
from datetime import date, time, timedelta
from decimal import Decimal
from itertools import islice
from typing import Any

from chooser.errors import SheetError
from chooser.sheets.columns import column_headed
from chooser.sheets.grid import (
    BLANK,
    FEWER_COLUMNS,
    MAX_COLUMNS,
    MAX_ROWS,
    MAX_UNPACKED_BYTES,
    Cell,
    Grid,
    Row,
    refuse,
    text_cell,
    trimmed,
)

_LOCKED_MARK = b"\xd0\xcf\x11\xe0"
_SAVE_AGAIN = "open it in a spreadsheet program and save it again as .xlsx"
_QUOTED = re.compile(r'"([^"]*)"|\\(.)')
_UNIT = re.compile(
    "\\s*(?:[pnu\u00b5\u03bcmkKMG]|mega)?(?:\u03a9|\u2126|ohms?|F|R|V|W|A|s)?\\s*", re.IGNORECASE
)
_LEAST_HEADINGS = 2


def read_xlsx(file: str, data: bytes) -> tuple[Grid, ...]:
    """Read the stock sheets of a workbook.

    Every visible worksheet with known headings is one; others (notes, lists) are passed over,
    and the first grid notes those that might have been meant.

    Parameters
    ----------
    file : how to name it in messages. data : its whole content.

    Raises
    ------
    SheetError
        It is not such a file, or holds too much; one finding says why.
    """
    _check_archive(file, data)
    try:
        # What the library warns of (styles, extensions) has no bearing on the cells.
        with warnings.catch_warnings():
            warnings.simplefilter("ignore")
            grids, hidden = _worksheets(file, data)
    except SheetError:
        raise
    except Exception as error:  # noqa: BLE001 - a broken file breaks the library in any way it likes
        refuse(file, f"is damaged ({type(error).__name__})", _SAVE_AGAIN)
    if not grids:
        refuse(file, "is empty", "its first row must hold the headings kind, value, count, drawer")
    stock = [grid for grid in grids if _is_stock(grid.rows[0])] or grids[:1]
    notes = tuple(
        f"{grid.file} was passed over: its first row holds no headings of a stock sheet."
        for grid in grids
        if grid not in stock and _is_table(grid)
    ) + tuple(
        f"{name} was passed over, since it is hidden; show it in the spreadsheet program to have "
        "it read."
        for name in hidden
    )
    first = Grid(stock[0].file if len(stock) > 1 else file, stock[0].rows, notes)
    return (first, *stock[1:])


def _check_archive(file: str, data: bytes) -> None:
    """Look at the packed archive before anything of it is unpacked."""
    if not data.strip():
        refuse(file, "is empty", _SAVE_AGAIN)
    if data.startswith(_LOCKED_MARK):
        refuse(file, "has a password or is of the old .xls kind", _SAVE_AGAIN)
    try:
        with zipfile.ZipFile(io.BytesIO(data)) as archive:
            size = sum(member.file_size for member in archive.infolist())
    # NotImplementedError is how zipfile refuses an archive of a version that it does not know.
    except (zipfile.BadZipFile, ValueError, OSError, NotImplementedError, EOFError) as error:
        refuse(
            file,
            f"is not an XLSX file, or only a part of one ({error or type(error).__name__})",
            "give a CSV file the ending .csv, or " + _SAVE_AGAIN,
        )
    if size > MAX_UNPACKED_BYTES:
        refuse(
            file,
            f"unpacks to {size // 2**20} MiB; at most {MAX_UNPACKED_BYTES // 2**20} are read",
            "split it into several sheets",
        )


def _worksheets(file: str, data: bytes) -> tuple[list[Grid], list[str]]:
    """Read the visible worksheets that are not blank; name the hidden ones with good headings."""
    from openpyxl import load_workbook

    book = load_workbook(io.BytesIO(data), read_only=True, data_only=False, keep_links=False)
    try:
        grids = [
            Grid(f"{file} [{sheet.title}]", tuple(_rows(file, sheet)))
            for sheet in book.worksheets
            if sheet.sheet_state == "visible"
        ]
        hidden = [
            f"{file} [{sheet.title}]"
            for sheet in book.worksheets
            if sheet.sheet_state != "visible" and any(map(_is_stock, islice(_rows(file, sheet), 1)))
        ]
    finally:
        book.close()
    return [grid for grid in grids if grid.rows], hidden


def _rows(file: str, sheet: Any) -> Iterator[Row]:
    """Give the rows that are not blank, one by one."""
    sheet.reset_dimensions()  # the declared size is only a claim
    for number, cells in enumerate(sheet.iter_rows(max_col=MAX_COLUMNS + 1), 1):
        if number > MAX_ROWS:
            refuse(
                file,
                f"has more than {MAX_ROWS} rows in {sheet.title!r}, blank ones counted",
                "delete the blank rows below the stock, or split it into several sheets",
            )
        kept = trimmed([BLANK if cell.value is None else _cell(cell) for cell in cells])
        if len(kept) > MAX_COLUMNS:
            problem = f"has more than {MAX_COLUMNS} columns in {sheet.title!r}"
            refuse(file, problem, FEWER_COLUMNS, row=number)
        if kept:
            yield Row(number, kept)


def _is_table(grid: Grid) -> bool:
    """Tell a table from a page of text, which nobody takes for stock."""
    return any(sum(cell != BLANK for cell in row.cells) > 1 for row in grid.rows)


def _is_stock(row: Row) -> bool:
    """Tell whether a row can be the headings of a stock sheet."""
    return sum(column_headed(cell.text) is not None for cell in row.cells) >= _LEAST_HEADINGS


def _cell(cell: Any) -> Cell:
    """Read one cell that is not blank."""
    value = cell.value
    if cell.data_type == "f":
        shown = value if isinstance(value, str) else "="
        return Cell(shown[:40], "is a formula", "put its result there, as a value")
    if cell.data_type == "e":
        return Cell(str(value)[:40], "is a spreadsheet error", "type what belongs there")
    if isinstance(value, bool):
        return Cell(str(value).upper(), "is a truth value", "type what belongs there")
    if isinstance(value, (date, time, timedelta)):
        return Cell(
            str(value),
            "is a date or a time; a spreadsheet may have made it of something else",
            "format the cell as text and type it again",
        )
    if isinstance(value, (int, float)):
        return _number_cell(value, cell.number_format)
    return text_cell(str(value))


def _number_cell(value: float, number_format: str) -> Cell:
    """Read a number as a spreadsheet shows it: to 15 digits, and as a percentage where it is one.

    A format that shows a unit beside the number (47 as `47k`) hides which of the two is meant.
    """
    text = f"{value:.15g}"
    if text in {"inf", "-inf", "nan"}:
        return Cell(text, "is no number", "type what belongs there")
    literals = [quoted or escaped for quoted, escaped in _QUOTED.findall(number_format)]
    for literal in literals:
        if literal.strip() and _UNIT.fullmatch(literal):
            return Cell(
                text,
                f"is shown with {literal.strip()!r} by the format of the cell",
                "format the cell as text and type the value with its unit",
            )
    number = Decimal(text)
    if "%" in _QUOTED.sub("", number_format):
        return Cell(f"{_plain(number * 100)}%")
    return Cell(_plain(number))


def _plain(number: Decimal) -> str:
    """Write a number without an exponent and without needless zeros."""
    text = f"{number:f}"
    return text.rstrip("0").rstrip(".") if "." in text else text
