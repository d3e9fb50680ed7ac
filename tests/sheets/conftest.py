from __future__ import annotations

from pathlib import Path

import openpyxl
import pytest

from chooser.errors import SheetError
from chooser.sheets.reading import read_sheets


@pytest.fixture
def sheet(tmp_path):
    """Write a sheet: text or bytes to a CSV file, rows to the first sheet of a workbook."""

    def write(content, name=None):
        path = tmp_path / (name or ("stock.xlsx" if isinstance(content, list) else "stock.csv"))
        if isinstance(content, list):
            book = openpyxl.Workbook()
            for row in content:
                book.active.append(row)
            book.save(path)
        elif isinstance(content, bytes):
            path.write_bytes(content)
        else:
            path.write_text(content, encoding="utf-8", newline="")
        return path

    return write


@pytest.fixture
def findings(sheet):
    """Write a sheet that must be refused, and give its findings."""

    def refused(content, name=None):
        path = content if isinstance(content, Path) else sheet(content, name)
        with pytest.raises(SheetError) as caught:
            read_sheets([path])
        assert caught.value.findings
        for finding in caught.value.findings:
            assert finding.file.startswith(str(path))
            assert finding.problem
            assert not finding.problem.endswith(".")
            assert not finding.advice.endswith(".")
        return caught.value.findings

    return refused


@pytest.fixture
def the_finding(findings):
    """Write a sheet that must be refused for one thing, and give that finding."""

    def refused(content, name=None):
        all_of_them = findings(content, name)
        assert len(all_of_them) == 1, [str(finding) for finding in all_of_them]
        return all_of_them[0]

    return refused


@pytest.fixture
def read(sheet):
    """Write a sheet and read it."""

    def entries(content, name=None):
        return read_sheets([sheet(content, name)])

    return entries
