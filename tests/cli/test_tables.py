from __future__ import annotations

import io
import sys

import pytest
from hypothesis import given
from hypothesis import strategies as st

from chooser.cli.tables import print_line, print_table, table_lines

HEADINGS = ("drawer", "value", "count")
ROWS = [["A1", "4k7", "20"], ["Long shelf", "10R", "~5"]]


def test_columns_line_up_and_numbers_stand_right():
    assert table_lines(HEADINGS, ROWS, right_aligned=("value", "count")) == [
        "drawer      value  count",
        "A1            4k7     20",
        "Long shelf    10R     ~5",
    ]


def test_a_narrow_terminal_gets_a_block_a_row_with_empty_cells_left_out():
    rows = [["A1", "4k7", ""], ["Long shelf", "10R", "~5"]]
    assert table_lines(HEADINGS, rows, width=20) == [
        "drawer  A1",
        "value   4k7",
        "",
        "drawer  Long shelf",
        "value   10R",
        "count   ~5",
    ]


def test_the_width_is_met_exactly_before_it_folds():
    wide = table_lines(HEADINGS, ROWS)
    widest = max(map(len, wide))
    assert table_lines(HEADINGS, ROWS, width=widest) == wide
    assert table_lines(HEADINGS, ROWS, width=widest - 1) != wide


def test_wide_and_combining_characters_take_their_columns():
    lines = table_lines(("a", "b"), [["抽斗", "x"], ["e\u0301", "x"], ["drawer", "x"]])
    # By Unicode's East Asian width, the two signs are two columns each, the accent none.
    assert lines[1:] == ["抽斗    x", "e\u0301       x", "drawer  x"]


LONG = [["A1", "10k 1% metal-film, from the old lamp board of the club", "20"]]


def test_one_column_may_go_on_below_itself():
    lines = table_lines(("drawer", "part", "count"), LONG, ("count",), 45, wrapping="part")
    assert lines == [
        "drawer  part                            count",
        "A1      10k 1% metal-film, from the        20",
        "        old lamp board of the club",
    ]


@pytest.mark.parametrize(("width", "folds"), [(39, False), (38, True)])
def test_a_column_too_narrow_to_read_folds_after_all(width, folds):
    lines = table_lines(("drawer", "part", "count"), LONG, width=width, wrapping="part")
    assert (lines[0].split() != ["drawer", "part", "count"]) == folds


def test_wide_characters_wrap_by_their_columns():
    rows = [["抽斗" * 20, "1"]]
    lines = table_lines(("part", "count"), rows, width=40, wrapping="part")
    assert "".join(line.split()[0] for line in lines[1:]) == "抽斗" * 20
    # East Asian wide signs take two columns (Unicode, UAX 11).
    assert all(len(line.split()[0]) * 2 <= 33 for line in lines[1:])


def test_a_line_drives_no_terminal(capsys):
    print_line("from \x1b[31mA\x1b]0;title\x07, 10 Ω")
    assert capsys.readouterr().out == "from ?[31mA?]0;title?, 10 Ω\n".replace(
        "?", "\N{REPLACEMENT CHARACTER}"
    )


@given(st.text())
def test_any_text_stays_on_its_line_and_drives_no_terminal(text):
    (_, line) = table_lines(("note",), [[text]])
    assert line.isprintable() or line == ""
    if text.isprintable():
        assert line == text.rstrip()  # markup and all


@pytest.mark.parametrize(("tty", "folds"), [(True, True), (False, False)])
def test_only_a_terminal_folds(monkeypatch, tty, folds):
    out = io.StringIO()
    out.isatty = lambda: tty
    monkeypatch.setattr(sys, "stdout", out)
    monkeypatch.setenv("COLUMNS", "10")
    print_table(HEADINGS, ROWS)
    assert (len(out.getvalue().splitlines()) != 3) == folds
    assert "\x1b" not in out.getvalue()


def test_a_terminal_that_lacks_a_sign_gets_a_question_mark(monkeypatch):
    raw = io.BytesIO()
    monkeypatch.setattr(sys, "stdout", io.TextIOWrapper(raw, encoding="cp1252", newline="\n"))
    print_line("10 Ω ±5 %")
    sys.stdout.flush()
    assert raw.getvalue().decode("cp1252") == "10 ? ±5 %\n"
