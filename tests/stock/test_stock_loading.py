from __future__ import annotations

import sqlite3
import time
from contextlib import closing
from dataclasses import replace

import pytest

from chooser.errors import StockError
from chooser.parts import Count, Kind, Sureness, Taper, Tolerance
from chooser.stock import ledger, loading
from chooser.stock.snapshot import read_stock


def rows_of(path):
    tables = ("drawers", "holdings", "changes", "movements", "claims")
    with closing(sqlite3.connect(path)) as connection:
        return {
            table: connection.execute(f"SELECT * FROM {table}").fetchall()  # noqa: S608
            for table in tables
        }


def test_loading_the_same_sheet_twice_changes_nothing(db, say_entry):
    entries = [say_entry(), say_entry(22e3, drawer="A2"), say_entry(4.7e3, count=0)]
    first = loading.apply(db, entries)
    before = rows_of(db)
    again = loading.apply(db, entries)
    assert (len(first.plan.new), first.change) == (3, 1)
    assert (again.plan.new, again.plan.changed, again.plan.unchanged) == ((), (), 3)
    assert again.change is None
    assert rows_of(db) == before


@pytest.mark.parametrize(
    ("before", "after", "movement"),
    [
        (Count(20), Count(18), -2),
        (Count(20), Count(20, Sureness.ROUGH), 0),
        (Count(20), Count(0, Sureness.PLENTY), 0),
        (Count(0, Sureness.PLENTY), Count(7), 7),
        (Count(50, Sureness.ROUGH), Count(43), -7),
    ],
)
def test_another_count_is_a_correction(db, say_entry, before, after, movement):
    entry = replace(say_entry(), count=before)
    loading.apply(db, [entry])
    report = loading.apply(db, [replace(entry, count=after)])
    assert [found.recounted for found in report.plan.changed] == [True]
    (holding,) = read_stock(db)
    assert holding.count == after
    assert [row[3] for row in rows_of(db)["movements"]][1:] == [movement]


def test_traits_are_amended_and_an_empty_cell_keeps_what_is_known(db, say_entry):
    loading.apply(db, [say_entry(note="old bag", price=1.5)])
    (found,) = loading.apply(db, [say_entry(note="new bag", power=0.25)]).plan.changed
    assert found.amended == ("power", "note")
    assert not found.recounted
    (holding,) = read_stock(db)
    assert (holding.part.note, holding.part.power, holding.part.price) == ("new bag", 0.25, 1.5)


@pytest.mark.parametrize(
    "other",
    [
        {"value": 11e3},
        {"drawer": "A2"},
        {"measured": 9.97e3},
        {"kind": Kind.POT},
    ],
    ids=str,
)
def test_what_makes_it_another_holding(db, say_entry, other):
    loading.apply(db, [say_entry()])
    plan = loading.compare(db, [say_entry(**other)])
    assert (len(plan.new), plan.changed) == (1, ())


def test_drawers_differ_by_more_than_case(db, say_entry):
    loading.apply(db, [say_entry(drawer="Älter 1")])
    report = loading.apply(db, [say_entry(drawer="äLTER 1", count=6), say_entry(2e3, drawer="ä2")])
    assert len(report.plan.recounted) == 1
    assert [holding.drawer for holding in read_stock(db)] == ["Älter 1", "ä2"]


def test_one_part_stated_twice_is_refused_with_both_places(db, say_entry):
    twice = [say_entry(place="parts.csv row 3"), say_entry(drawer="a1", place="parts.csv row 9")]
    with pytest.raises(StockError, match=r"parts.csv row 9 .* as parts.csv row 3"):
        loading.apply(db, twice)
    assert read_stock(db) == ()


def test_a_count_below_what_is_claimed_is_refused_and_nothing_is_loaded(db, say_entry):
    loading.apply(db, [say_entry(count=5), say_entry(22e3, count=5)])
    ledger.claim(db, {1: 3, 2: 4}, "flasher")
    before = rows_of(db)
    rows = [
        say_entry(count=2, place="parts.csv row 2"),
        say_entry(22e3, count=1, place="parts.csv row 3"),
        say_entry(33e3, place="parts.csv row 4"),
    ]
    with pytest.raises(StockError) as refused:
        loading.apply(db, rows)
    lines = str(refused.value).splitlines()
    assert len(lines) == 2
    assert lines[0].startswith("parts.csv row 2 counts 2 in drawer A1, but 3 of holding 1")
    assert lines[1].startswith("parts.csv row 3 counts 1 in drawer A1, but 4 of holding 2")
    assert rows_of(db) == before


def test_what_the_sheet_leaves_out_stays_and_is_told(db, say_entry):
    loading.apply(db, [say_entry(), say_entry(22e3), say_entry(1e3, drawer="B1")])
    report = loading.apply(db, [say_entry(11e3, tolerance=Tolerance(0.01, 0.01))])
    assert [holding.id for holding in report.plan.unmentioned] == [1, 2]
    assert len(read_stock(db)) == 4


@pytest.mark.parametrize(
    "correction",
    [
        {"technology": "metal-film"},
        {"voltage": 200.0},
        {"turns": 10.0},
        {"taper": Taper.LOG},
    ],
    ids=str,
)
def test_a_filled_in_trait_amends_the_only_holding_it_can_mean(db, say_entry, correction):
    loading.apply(db, [say_entry(count=20, note="kept")])
    ledger.claim(db, {1: 3}, "horn")
    row = say_entry(count=18, **correction)
    (found,) = loading.compare(db, [row]).changed
    assert (found.amended, found.recounted) == (tuple(correction), True)
    assert loading.apply(db, [row]).plan.new == ()
    (holding,) = read_stock(db)
    for name, value in correction.items():
        assert getattr(holding.part, name) == value
    assert (holding.id, holding.count, holding.claimed) == (1, Count(18), 3)
    assert holding.part.note == "kept"
    assert [row[3] for row in rows_of(db)["movements"]] == [20, -2]  # its history goes on
    assert loading.apply(db, [row]).change is None


def test_one_contradicted_trait_amends_where_the_count_is_the_same(db, say_entry):
    loading.apply(db, [say_entry(count=20)])
    (found,) = loading.apply(db, [say_entry(count=20, tolerance=ONE)]).plan.changed
    assert (found.amended, found.recounted) == (("tolerance",), False)


@pytest.mark.parametrize(
    "bag", [{"count": 50}, {"count": 20, "technology": "metal-film"}], ids=["count", "technology"]
)
def test_another_bag_never_replaces_the_one_that_is_there(db, say_entry, bag):
    """Tolerance and count, or tolerance and technology, differ: that is a bag of its own."""
    loading.apply(db, [say_entry(count=20, technology="carbon-film")])
    loading.apply(db, [say_entry(**{"technology": "carbon-film", **bag}, tolerance=ONE)])
    stock = read_stock(db)
    assert [each.part.tolerance for each in stock] == [Tolerance(0.05, 0.05), ONE]
    assert stock[0].count == Count(20)


def test_blanks_filled_in_for_two_bags_of_a_drawer_double_nothing(db, say_entry):
    loading.apply(db, [say_entry(count=20), say_entry(count=30, tolerance=ONE)])
    rows = [
        say_entry(count=20, technology="carbon-film"),
        say_entry(count=30, tolerance=ONE, technology="metal-film"),
    ]
    assert loading.apply(db, rows).plan.new == ()
    stock = read_stock(db)
    assert [each.part.technology for each in stock] == ["carbon-film", "metal-film"]
    assert [each.count.number for each in stock] == [20, 30]


def test_measuring_the_only_piece_amends_it(db, say_entry):
    loading.apply(db, [say_entry(count=1)])
    assert loading.apply(db, [say_entry(count=1, measured=9.97e3)]).plan.new == ()
    assert [each.part.measured for each in read_stock(db)] == [9.97e3]


def test_a_piece_measured_out_of_a_bag_is_a_line_of_its_own(db, say_entry):
    loading.apply(db, [say_entry(count=5)])
    assert len(loading.compare(db, [say_entry(count=1, measured=9.97e3)]).new) == 1


def test_a_corrected_measurement_amends_the_measured_piece_and_no_other(db, say_entry):
    loading.apply(db, [say_entry(count=5), say_entry(count=1, measured=9.97e3)])
    report = loading.apply(db, [say_entry(count=5), say_entry(count=1, measured=9.79e3)])
    assert [found.amended for found in report.plan.changed] == [("measured",)]
    assert [holding.part.measured for holding in read_stock(db)] == [None, 9.79e3]


def test_a_blank_trait_keeps_what_is_known_of_the_only_holding(db, say_entry):
    loading.apply(db, [say_entry(technology="carbon-film")])
    row = say_entry(tolerance=None, technology="metal-film")
    (found,) = loading.apply(db, [row]).plan.changed
    assert found.amended == ("technology",)
    (holding,) = read_stock(db)
    assert holding.part.tolerance == Tolerance(0.05, 0.05)


ONE, TWO = Tolerance(0.01, 0.01), Tolerance(0.02, 0.02)


@pytest.mark.parametrize(
    ("stock", "rows", "new"),
    [
        # Two old holdings it may mean; two rows that may mean it; another drawer; an empty one;
        # and a row whose old self is still there.
        ([{}, {"tolerance": TWO}], [{"tolerance": ONE}], 1),
        ([{}], [{"tolerance": ONE}, {"tolerance": TWO}], 2),
        ([{"drawer": "B1"}], [{"tolerance": ONE}], 1),
        ([{"count": 0}], [{"tolerance": ONE}], 1),
        ([{}], [{}, {"tolerance": ONE}], 1),
    ],
)
def test_where_more_than_one_thing_may_be_meant_it_is_a_new_holding(
    db, say_entry, stock, rows, new
):
    loading.apply(db, [say_entry(**each) for each in stock])
    plan = loading.compare(db, [say_entry(**each) for each in rows])
    assert (len(plan.new), plan.amended) == (new, ())


def test_a_correction_never_makes_two_holdings_of_one_part(db, say_entry):
    carbon = {"technology": "carbon-film"}
    loading.apply(db, [say_entry(**carbon), say_entry(tolerance=ONE, technology="metal-film")])
    # Blank in its tolerance, the second row could only become what the first one says already.
    rows = [say_entry(technology="metal-film"), say_entry(tolerance=None, technology="metal-film")]
    loading.apply(db, rows)
    stock = read_stock(db)
    assert len({(each.part.tolerance, each.part.technology) for each in stock}) == len(stock)


def test_a_count_below_the_claims_of_the_corrected_holding_is_refused(db, say_entry):
    loading.apply(db, [say_entry(count=5)])
    ledger.claim(db, {1: 3}, "flasher")
    with pytest.raises(StockError, match="3 of holding 1 are claimed"):
        loading.apply(db, [say_entry(count=2, voltage=50.0)])


def test_the_way_out_that_is_told_works(db, say_entry):
    loading.apply(db, [say_entry(), say_entry(tolerance=TWO)])
    report = loading.apply(db, [say_entry(tolerance=ONE)])
    assert [holding.id for holding in report.plan.unmentioned] == [1, 2]
    loading.apply(db, [say_entry(count=0), say_entry(count=0, tolerance=TWO)])
    assert loading.apply(db, [say_entry(tolerance=ONE)]).plan.unmentioned == ()
    assert sum(holding.count.number for holding in read_stock(db)) == 5


def test_a_preview_changes_nothing_and_makes_no_file(db, say_entry):
    plan = loading.compare(db, [say_entry()])
    assert len(plan.new) == 1
    assert not db.exists()
    loading.apply(db, [say_entry()])
    before = db.read_bytes()
    loading.compare(db, [say_entry(count=9), say_entry(47e3)])
    assert db.read_bytes() == before


def test_ten_thousand_entries_load_in_well_under_three_seconds(db, say_entry):
    entries = [say_entry(1.0 + at, drawer=f"D{at % 97}") for at in range(10_000)]
    start = time.perf_counter()
    loading.apply(db, entries)
    assert time.perf_counter() - start < 3
    assert len(read_stock(db)) == 10_000
