from __future__ import annotations

import pytest

from chooser.parts import Count, Entry, Kind, Part, Sureness, Taper, Tolerance
from chooser.sheets.grid import MAX_CELL, MAX_FILE_BYTES, MAX_ROWS

_HEAD = "kind,value,count,drawer\n"


def test_a_full_row_is_read_into_si_units(sheet, read):
    (entry,) = read(
        "kind,value,count,drawer,tolerance,technology,power,voltage,tempco,measured,meter,price,"
        "pack,supplier,order_code,note\n"
        "resistor,4k7,20,A4,1%,metal film,1/4W,250V,100ppm,4.68k,0.5%,1.20,100,club shop,007,odd\n"
    )
    assert entry == Entry(
        Part(
            Kind.RESISTOR,
            4700.0,
            marking="4k7",
            tolerance=Tolerance(0.01, 0.01),
            technology="metal-film",
            power=0.25,
            voltage=250.0,
            tempco=1e-4,
            measured=4680.0,
            meter=0.005,
            price=1.2,
            pack=100,
            supplier="club shop",
            order_code="007",
            note="odd",
        ),
        "A4",
        Count(20),
        f"{sheet('', 'x.csv').with_name('stock.csv')} row 2",
    )


def test_pots_and_capacitors_have_their_own_columns(read):
    pot, capacitor = read(
        "kind;value;count;drawer;taper;turns;end_resistance;leakage\n"
        "potentiometer;100k;~5;P1;lin;270 deg;20R;\n"
        "cap;4,7u;plenty;E1;;;;0,3uA\n"
    )
    assert (pot.part.kind, pot.part.value, pot.part.taper) == (Kind.POT, 1e5, Taper.LINEAR)
    assert (pot.part.turns, pot.part.end_resistance) == (0.75, 20.0)
    assert pot.count == Count(5, Sureness.ROUGH)
    assert (capacitor.part.value, capacitor.part.leakage) == (4.7e-6, 3e-7)
    assert capacitor.count.sureness is Sureness.PLENTY


@pytest.mark.parametrize(
    "text",
    [
        "kind,value,count,drawer\nresistor,4k7,20,A4\n",
        "kind;value;count;drawer\nresistor;4k7;20;A4\n",
        "kind;value;count;drawer\r\nresistor;4,7k;20;A4\r\n",
        "kind\tvalue\tcount\tdrawer\nresistor\t4k7\t20\tA4\n",
        "sep=;\nkind;value;count;drawer\nresistor;4700;20;A4\n",
        "\ufeffkind,value,count,drawer\nresistor,4.7 kOhm,20,A4\n",
        '"kind","value","count","drawer"\n"resistor","4,7k","20","A4"\n',
        "drawer,count,value,kind\nA4,20,4k7,resistor\n",
        "Kind , VALUE,Quantity, Location\n resistor , 4k7 ,20 , A4 \n",
        "kind,value,count,drawer\n\n,,,\nresistor,4k7,20,A4\n\n",
        "kind,value,count,drawer\rresistor,4k7,20,A4\r",
        "kind,value,count,drawer\nresistor,4k7,20,A4",
        "kind,value,count,drawer,,\nresistor,4k7,20,A4,,\n",
        "kind,value,count,drawer,tolerance,technology\nresistor,4k7,20,A4,-,n/a\n",
        "kind,value,count,drawer\nresistor,\u200b4k7\u00a0,20,A4\n",
    ],
)
def test_one_row_written_in_many_ways_is_the_same(read, text):
    (entry,) = read(text)
    part = entry.part
    assert (part.kind, part.value, part.tolerance) == (Kind.RESISTOR, 4700.0, None)
    assert (entry.drawer, entry.count) == ("A4", Count(20))


def test_quotes_follow_rfc_4180(read):
    # RFC 4180 section 2: quotes may hold separators and line ends; a doubled quote is one.
    entries = read(
        "kind,value,count,drawer,note\n"
        'resistor,1k,1,A1,"big, ""red"",\nold"\n'
        "resistor,2k,1,A1,next\n"
    )
    assert entries[0].part.note == 'big, "red", old'
    # A record over two lines is one row of a spreadsheet.
    assert entries[1].place.endswith("row 3")


@pytest.mark.parametrize(
    ("kit", "kind", "number", "ends"),
    [
        # IEC 60063: 12 values a decade in E12, 24 in E24, 6 in E6; both ends counted.
        ("E12 10..1M", "resistor", 5 * 12 + 1, (10.0, 1e6)),
        ("e24 1k..9k1", "resistor", 24, (1e3, 9100.0)),
        ("E6 1n..680n", "capacitor", 3 * 6, (1e-9, 6.8e-7)),
        ("E3 1k..1M", "trimmer", 3 * 3 + 1, (1e3, 1e6)),
    ],
)
def test_a_kit_is_one_row_and_one_entry_a_value(read, kit, kind, number, ends):
    entries = read(_HEAD.replace("drawer", "drawer,tolerance") + f"{kind},{kit},20,A1,5%\n")
    values = [entry.part.value for entry in entries]
    assert len(values) == number
    assert (values[0], values[-1]) == ends
    assert values == sorted(set(values))
    for entry in entries:
        assert entry.count == Count(20)
        assert entry.part.marking == ""
        assert entry.part.tolerance == Tolerance(0.05, 0.05)
        assert entry.place.endswith("row 2")


@pytest.mark.parametrize(
    ("marking", "farad", "tolerance"),
    [
        # Three digits: two figures and a number of zeros, in pF; then a letter of IEC 60062.
        ("104", 100e-9, None),
        ("103", 10e-9, None),
        ("473K", 47e-9, Tolerance(0.1, 0.1)),
        ("105K", 1e-6, Tolerance(0.1, 0.1)),
        ("474J", 470e-9, Tolerance(0.05, 0.05)),
        ("103Z", 10e-9, Tolerance(0.2, 0.8)),
        ("4n7K", 4.7e-9, Tolerance(0.1, 0.1)),
    ],
)
def test_a_capacitor_may_be_given_by_its_marking(read, marking, farad, tolerance):
    (entry,) = read(_HEAD + f"capacitor,{marking},3,C1\n")
    assert entry.part.value == pytest.approx(farad, rel=1e-15)
    assert entry.part.tolerance == tolerance
    assert entry.part.marking == marking


def test_a_guarding_apostrophe_is_taken_off(read):
    entries = read(
        "kind,value,count,drawer,note\n"
        "resistor,1k,1,A1,'=1+1\n"
        "resistor,2k,1,A1,'-5 V rail\n"
        "resistor,3k,1,A1,''=x\n"
        "resistor,4k,1,A1,'tis odd\n"
    )
    notes = [entry.part.note for entry in entries]
    assert notes == ["=1+1", "-5 V rail", "'=x", "'tis odd"]


@pytest.mark.parametrize(
    ("content", "row", "says"),
    [
        (b"", None, "is empty"),
        (b"\n\r\n  \n", None, "is empty"),
        (b"\xef\xbb\xbf", None, "is empty"),
        (_HEAD.encode(), None, "headings but no rows"),
        (_HEAD.encode("utf-16"), None, "UTF-16"),
        (_HEAD.encode("utf-16-le"), None, "not text"),
        (_HEAD.encode() + "résistor,1k,1,A1\n".encode("cp1252"), 2, "0xE9"),
        (_HEAD.encode() + b"resistor,1k,1,\x81\n", 2, "UTF-8"),
        (bytes(range(256)) * 4, None, "not text"),
        (b"\x89PNG\r\n\x1a\n\x00\x00", None, "not text"),
        (b"PK\x03\x04 and so on", None, "packed"),
        (_HEAD.encode() + b'resistor,"1k,1,A1\nresistor,2k,1,A1\n', 2, "quote"),
        (_HEAD.encode() + b'resistor,1k,1,A1\nresistor,"1"k,1,A1\n', 3, "quote"),
        (_HEAD.encode() + b"resistor,1k,1,A1\nresistor,2", 3, "half-written"),
        (b"a" * (MAX_FILE_BYTES + 1), None, "larger than"),
        (_HEAD.encode() + b"\n" * MAX_ROWS, None, "rows"),
        (_HEAD.encode() + b"resistor,1k,1,A1" + b",x" * 300 + b"\n", 2, "columns"),
        (_HEAD.encode() + b"r" * 200_000 + b",1k,1,A1\n", 2, "field larger"),
    ],
)
def test_a_file_that_is_no_csv_sheet_is_refused_with_one_finding(the_finding, content, row, says):
    finding = the_finding(content)
    assert finding.row == row
    assert says in str(finding)


def test_a_long_cell_is_refused_and_not_cut(the_finding):
    finding = the_finding(
        "kind,value,count,drawer,note\nresistor,1k,1,A1," + "x" * (MAX_CELL + 1) + "\n"
    )
    assert (finding.row, finding.column) == (2, "note")
    assert str(MAX_CELL) in finding.advice


def test_an_unprintable_cell_is_refused(the_finding):
    finding = the_finding(_HEAD + "resistor,1k,1,A\x071\n")
    assert (finding.row, finding.column) == (2, "drawer")


def test_short_rows_are_fine_where_nothing_needed_is_missing(read):
    entries = read(
        "kind,value,count,drawer,tolerance,note\nresistor,1k,1,A1\nresistor,2k,1,A1,5%\n"
    )
    assert [entry.part.value for entry in entries] == [1000.0, 2000.0]
