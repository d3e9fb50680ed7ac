from __future__ import annotations

import pytest

from chooser.sheets.columns import COLUMNS

_COLUMNS = [column.name for column in COLUMNS]


def _sheet(**cells):
    row = {"kind": "resistor", "value": "10k", "count": "20", "drawer": "A1"} | cells
    line = ";".join(row.get(column, "") for column in _COLUMNS)
    return ";".join(_COLUMNS) + "\n" + line + "\n"


_POT = {"kind": "pot", "value": "100k"}
_CAPACITOR = {"kind": "capacitor", "value": "100n"}


@pytest.mark.parametrize(
    ("cells", "column", "says"),
    [
        ({"kind": "resistr"}, "kind", "resistor"),
        ({"kind": "inductor"}, "kind", "capacitor"),
        ({"kind": ""}, "kind", "blank"),
        ({"value": ""}, "value", "blank"),
        ({"count": ""}, "count", "blank"),
        ({"drawer": ""}, "drawer", "blank"),
        ({"count": "-3"}, "count", "below zero"),
        ({"count": "2.5"}, "count", "whole"),
        ({"count": "2,5"}, "count", "whole"),
        ({"count": "1e400"}, "count", "1e400"),
        ({"count": "many"}, "count", "plenty"),
        ({"count": "1,000"}, "count", "1000"),
        ({"value": "0"}, "value", "zero"),
        ({"value": "-10k"}, "value", "below zero"),
        ({"value": "inf"}, "value", "resistance"),
        ({"value": "nan"}, "value", "resistance"),
        ({"value": "1e999"}, "value", "1e999"),
        ({"value": "lk5"}, "value", "1k5"),
        ({"value": "10m"}, "value", "10M"),
        ({"value": "100n"}, "value", "resistance"),
        ({"value": "E12"}, "value", "E12"),
        ({"value": "E7 10..1M"}, "value", "E12"),
        ({"value": "E12 1M..10"}, "value", "E12"),
        ({"value": "=10*1000"}, "value", "formula"),
        ({"tolerance": "0.05"}, "tolerance", "5%"),
        ({"tolerance": "five"}, "tolerance", "5%"),
        ({"tolerance": "0%"}, "tolerance", "zero"),
        ({"technology": "metal"}, "technology", "metal-film"),
        ({"technology": "polyester"}, "technology", "carbon-film"),
        ({"power": "1/0W"}, "power", "power"),
        ({"voltage": "-5V"}, "voltage", "below zero"),
        ({"tempco": "warm"}, "tempco", "ppm"),
        ({"measured": "9.98"}, "measured", "unit"),
        ({"measured": "0"}, "measured", "zero"),
        ({"measured": "9.98k", "meter": "0.005"}, "meter", "0.5%"),
        ({"value": "E12 1k..10k", "measured": "1k"}, "measured", "kit"),
        ({"taper": "log"}, "taper", "resistor"),
        ({"turns": "25"}, "turns", "resistor"),
        ({"leakage": "3uA"}, "leakage", "resistor"),
        ({"end_resistance": "2R"}, "end_resistance", "resistor"),
        ({"price": "cheap"}, "price", "1.20"),
        ({"pack": "0"}, "pack", "zero"),
        ({"pack": "~50"}, "pack", "~50"),
        (_POT | {"taper": "A"}, "taper", "log or linear"),
        (_POT | {"taper": "b"}, "taper", "linear or log"),
        (_POT | {"taper": "C"}, "taper", "reverse-log or log"),
        (_POT | {"taper": "linaer"}, "taper", "linear"),
        (_POT | {"turns": "0"}, "turns", "travel"),
        (_POT | {"end_resistance": "100k"}, "end_resistance", "below the value"),
        (_POT | {"leakage": "3uA"}, "leakage", "pot"),
        (_CAPACITOR | {"power": "1W"}, "power", "capacitor"),
        (_CAPACITOR | {"value": "47"}, "value", "47n"),
        (_CAPACITOR | {"value": "100"}, "value", "10p"),
        (_CAPACITOR | {"value": "4k7"}, "value", "capacitance"),
        (_CAPACITOR | {"value": "10k"}, "value", "a resistor was meant; write 10K or 10p"),
        (_CAPACITOR | {"value": "0.0000001"}, "value", "write 100n"),
        (_CAPACITOR | {"leakage": "0.000003"}, "leakage", "write 3 nA or 3 uA"),
        ({"count": "1e9"}, "count", "believable"),
        ({"drawer": "x" * 61}, "drawer", "61 characters"),
        ({"drawer": "A\u202e1"}, "drawer", "cannot be printed"),
        ({"note": "up\u202edown"}, "note", "cannot be printed"),
        (_CAPACITOR | {"value": "473K", "tolerance": "5%"}, "tolerance", "473K"),
        (_CAPACITOR | {"measured": "104"}, "measured", "104n"),
        (_CAPACITOR | {"leakage": "3"}, "leakage", "3uA"),
    ],
)
def test_each_bad_cell_is_named_with_its_place_and_what_to_do(the_finding, cells, column, says):
    finding = the_finding(_sheet(**cells))
    assert (finding.row, finding.column) == (2, column)
    assert finding.seen == cells[column]
    assert says in str(finding)
    assert finding.advice


def test_every_bad_row_of_every_file_is_named_in_order(tmp_path, findings):
    (tmp_path / "b.csv").write_text("kind,value,count,drawer\nresistor,1k,-1,A1\n")
    (tmp_path / "a.csv").write_text(
        "kind,value,count,drawer\n"
        "resistor,x,x,A1\n"
        "resistor,1k,1,A1\n"
        "capacitor,1k,1,\n"
        "\n"
        "coil,1k,1.5,A1\n"
    )
    places = [
        (finding.file.rpartition("/")[2], finding.row, finding.column)
        for finding in findings(tmp_path)
    ]
    assert places == [
        ("a.csv", 2, "count"),
        ("a.csv", 2, "value"),
        ("a.csv", 4, "drawer"),
        ("a.csv", 4, "value"),
        ("a.csv", 6, "kind"),
        ("a.csv", 6, "count"),
        ("b.csv", 2, "count"),
    ]


@pytest.mark.parametrize(
    ("text", "says"),
    [
        ("kind,value,count\nresistor,1k,1\n", "drawer"),
        ("kind,value,count,drawer,kind\nresistor,1k,1,A1,pot\n", "second heading"),
        ("kind,value,count,drawer,qty\nresistor,1k,1,A1,5\n", "after 'count'"),
        ("kind,value,count,drawer,tolerence\nresistor,1k,1,A1,5%\n", "did you mean 'tolerance'"),
        ("kind,value,count,drawer,zzzzzz\nresistor,1k,1,A1,x\n", "remove it or use one of kind"),
        ("kind,value,count,drawer,=A1\nresistor,1k,1,A1,x\n", "formula"),
        ("hello\nworld\n", "no known heading"),
        ("resistor,1k,1,A1\n", "no known heading"),
        ("kind|value|count|drawer\nresistor|1k|1|A1\n", "no known heading"),
    ],
)
def test_a_bad_heading_row_is_named(the_finding, text, says):
    finding = the_finding(text)
    assert finding.row == 1
    assert says in str(finding)


def test_every_missing_heading_is_named(findings):
    names = [finding.column for finding in findings("kind,note\nresistor,x\n")]
    assert names == ["value", "count", "drawer"]


def test_rows_are_still_read_beside_a_bad_heading(findings):
    places = [
        (finding.row, finding.column)
        for finding in findings("kind,value,count,drawer,tolerence\nresistor,1k,-1,A1,5%\n")
    ]
    assert places == [(1, None), (2, "count")]


@pytest.mark.parametrize(
    "text",
    [
        "kind,value,count,drawer\nresistor,1k,1,A1,stray\n",
        "kind,value,count,drawer,,note\nresistor,1k,1,A1,stray,x\n",
    ],
)
def test_a_cell_under_no_heading_is_not_lost_silently(the_finding, text):
    finding = the_finding(text)
    assert (finding.row, finding.seen) == (2, "stray")
    assert "decimal comma" in finding.advice


def test_a_decimal_comma_between_commas_is_found(findings):
    (first, *_) = findings("kind,value,count,drawer\nresistor,4,7k,20,A1\n")
    assert "decimal comma" in first.advice


def test_two_rows_for_one_holding_are_named_both(the_finding):
    finding = the_finding(
        "kind,value,count,drawer,tolerance\n"
        "resistor,4k7,20,A4,5%\n"
        "resistor,4k7,20,A4,1%\n"
        "resistor,4.7k,3,a4,5%\n"
    )
    assert finding.row == 4
    assert "row 2 states already" in finding.problem


def test_repeats_between_files_and_kits_are_found(tmp_path, the_finding):
    (tmp_path / "a.csv").write_text("kind,value,count,drawer\nresistor,E12 1k..8k2,20,A4\n")
    (tmp_path / "b.csv").write_text("kind,value,count,drawer\nresistor,E6 1k..6k8,20,A4\n")
    finding = the_finding(tmp_path)
    assert finding.file.endswith("b.csv")
    # E6 is every second value of E12 (IEC 60063), so all six are there twice.
    assert "states 6 holdings" in finding.problem
    assert "a.csv row 2" in finding.problem


@pytest.mark.parametrize(
    ("column", "one", "other"),
    [
        ("drawer", "A1", "A2"),
        ("value", "10k", "11k"),
        ("tolerance", "1%", "5%"),
        ("technology", "metal-film", "carbon-film"),
        ("voltage", "250V", "350V"),
        ("measured", "9.98k", "9.99k"),
        ("measured", "9.98k", ""),
    ],
)
def test_parts_that_differ_in_a_trait_are_two_holdings(read, column, one, other):
    text = _sheet(**{column: one}) + _sheet(**{column: other}).splitlines()[1] + "\n"
    assert len(read(text)) == 2
