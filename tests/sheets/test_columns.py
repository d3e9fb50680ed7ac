from __future__ import annotations

import pytest

from chooser.sheets.columns import COLUMNS, NEEDED, column_headed, nearest_columns

_DOCUMENTED = (
    "kind, value, count, drawer, tolerance, technology, power, voltage, tempco, measured, meter, "
    "leakage, taper, turns, end_resistance, price, pack, supplier, order_code, note"
)


def test_the_columns_are_the_documented_ones_in_order():
    assert ", ".join(column.name for column in COLUMNS) == _DOCUMENTED
    assert [column.name for column in NEEDED] == ["kind", "value", "count", "drawer"]


@pytest.mark.parametrize(
    ("heading", "name"),
    [
        ("kind", "kind"),
        ("KIND", "kind"),
        (" Value ", "value"),
        ("Qty", "count"),
        ("End resistance", "end_resistance"),
        ("endresistance", "end_resistance"),
        ("ORDER-CODE", "order_code"),
        ("order  code", "order_code"),
        ("Location", "drawer"),
        ("dielectric", "technology"),
    ],
)
def test_headings_are_forgiving(heading, name):
    column = column_headed(heading)
    assert column is not None
    assert column.name == name


@pytest.mark.parametrize("heading", ["", "value (k)", "colour", "tolerence"])
def test_what_is_no_heading_is_none(heading):
    assert column_headed(heading) is None


def test_a_mistyped_heading_has_its_nearest_column():
    assert [column.name for column in nearest_columns("tolerence")] == ["tolerance"]
    assert next(column.name for column in nearest_columns("valeu")) == "value"
    assert nearest_columns("zzzzzz") == ()


def test_no_heading_means_two_columns():
    for column in COLUMNS:
        for heading in (column.name, *column.synonyms):
            assert column_headed(heading) is column
