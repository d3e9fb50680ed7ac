"""Which files are meant by the paths a user gave, and what is in them."""

from __future__ import annotations

from pathlib import Path

from chooser.errors import Finding, SheetError
from chooser.sheets.csv_file import read_csv
from chooser.sheets.grid import MAX_FILE_BYTES, Grid, refuse
from chooser.sheets.xlsx_file import read_xlsx

_SUFFIXES = (".csv", ".xlsx")


def members_of(path: Path) -> list[Path]:
    """List the sheet files meant by a path: itself, or those in a folder in order of name.

    Hidden files and lock files (`~$...`) of a folder are passed over, as is any other kind.

    Raises
    ------
    SheetError
        A folder that cannot be listed or holds no sheet.
    """
    try:
        if not path.is_dir():
            return [path]
        members = sorted(
            member
            for member in path.iterdir()
            if member.suffix.lower() in _SUFFIXES
            and not member.name.startswith((".", "~$"))
            and not member.is_dir()
        )
    except OSError as error:
        raise _unreachable(path, error) from None
    if not members:
        refuse(str(path), "is a folder without any .csv or .xlsx file", "name another one")
    return members


def read_file(path: Path) -> tuple[Grid, ...]:
    """Read a sheet file: a CSV file is one grid, a workbook has one for each stock sheet.

    Raises
    ------
    SheetError
        It cannot be read, or is no such file.
    """
    if path.suffix.lower() not in _SUFFIXES:
        if not path.exists():
            refuse(str(path), "does not exist", "check the name and the folder")
        refuse(str(path), "is neither .csv nor .xlsx", "save the sheet as one of these")
    data = _content(path)
    if path.suffix.lower() == ".xlsx":
        return read_xlsx(str(path), data)
    return (read_csv(str(path), data),)


def _content(path: Path) -> bytes:
    """Read a file whole, but no further than the limit."""
    try:
        if path.exists() and not path.is_file():
            refuse(str(path), "is not a plain file", "name a .csv or .xlsx file")
        with path.open("rb") as file:
            data = file.read(MAX_FILE_BYTES + 1)
    except FileNotFoundError:
        refuse(str(path), "does not exist", "look at its name and the folder you are in")
    except (OSError, ValueError) as error:
        raise _unreachable(path, error) from None
    if len(data) > MAX_FILE_BYTES:
        refuse(
            str(path),
            f"is larger than {MAX_FILE_BYTES // 2**20} MiB",
            "split it into several sheets",
        )
    return data


def _unreachable(path: Path, error: Exception) -> SheetError:
    reason = (error.strerror if isinstance(error, OSError) else None) or str(error)
    advice = "look at its name and its permissions"
    return SheetError([Finding(str(path), None, None, "", f"cannot be read ({reason})", advice)])
