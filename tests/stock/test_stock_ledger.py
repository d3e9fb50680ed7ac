from __future__ import annotations

import sqlite3
from contextlib import closing

import pytest
from hypothesis import settings
from hypothesis import strategies as st
from hypothesis.stateful import RuleBasedStateMachine, invariant, precondition, rule

from chooser.errors import BadRequestError, ChooserError, StockError
from chooser.parts import Count, Entry, Kind, Part, Sureness
from chooser.stock import ledger, loading
from chooser.stock.snapshot import read_stock


def test_adding_goes_onto_the_same_part_or_makes_a_new_holding(db, say_entry):
    first = ledger.add(db, say_entry(count=5))
    second = ledger.add(db, say_entry(count=2, drawer="a1"))
    third = ledger.add(db, say_entry(count=2, drawer="B1"))
    assert (first.created, second.created, third.created) == (True, False, True)
    assert second.holding.count == Count(7)
    assert [holding.id for holding in read_stock(db)] == [1, 2]


def test_adding_amends_what_is_said_now_and_keeps_the_rest(db, say_entry):
    ledger.add(db, say_entry(note="old bag", price=1.5, meter=0.01, marking="10k"))
    said = {"note": "new bag", "power": 0.25, "leakage": 3e-6, "meter": 0.005, "marking": "10000"}
    added = ledger.add(db, say_entry(count=2, **said))
    assert set(added.amended) == {"note", "power", "leakage", "meter"}
    assert added.before.part.note == "old bag"
    (holding,) = read_stock(db)
    assert added.holding == holding
    assert holding.count == Count(7)
    part = holding.part
    assert (part.note, part.power, part.leakage, part.meter) == ("new bag", 0.25, 3e-6, 0.005)
    assert (part.price, part.marking) == (1.5, "10k")
    assert ledger.add(db, say_entry(count=1)).amended == ()


@pytest.mark.parametrize(
    ("before", "more", "after"),
    [
        (Count(5), Count(5, Sureness.ROUGH), Count(10, Sureness.ROUGH)),
        (Count(5, Sureness.ROUGH), Count(5), Count(10, Sureness.ROUGH)),
        (Count(5), Count(0, Sureness.PLENTY), Count(0, Sureness.PLENTY)),
        (Count(0, Sureness.PLENTY), Count(5), Count(0, Sureness.PLENTY)),
    ],
)
def test_a_sum_is_as_unsure_as_the_less_sure_of_the_two(db, before, more, after):
    part = Part(Kind.RESISTOR, 1e3)
    ledger.add(db, Entry(part, "A1", before, ""))
    assert ledger.add(db, Entry(part, "A1", more, "")).holding.count == after


def test_claims_are_all_or_none_and_never_beyond_what_is_free(db, say_entry):
    loading.apply(db, [say_entry(count=5), say_entry(22e3, count=1)])
    with pytest.raises(StockError, match="Only 1 of holding 2 in drawer A1 are free, 2 were"):
        ledger.claim(db, {1: 1, 2: 2}, "horn")
    assert [holding.claimed for holding in read_stock(db)] == [0, 0]
    ledger.claim(db, {1: 5, 2: 1}, "horn")
    assert [holding.free for holding in read_stock(db)] == [0, 0]


def test_plenty_never_limits(db, say_entry):
    loading.apply(db, [say_entry(count=0, sureness=Sureness.PLENTY)])
    ledger.claim(db, {1: 1000}, "flasher")
    (holding,) = read_stock(db)
    assert (holding.claimed, holding.free) == (1000, None)
    with pytest.raises(StockError, match="1000 pieces claimed"):
        ledger.correct(db, 1, Count(3))


def test_release_gives_back_to_the_purpose_it_was_claimed_for(db, say_entry):
    loading.apply(db, [say_entry(count=5)])
    ledger.claim(db, {1: 2}, "horn")
    ledger.claim(db, {1: 1}, "pump")
    with pytest.raises(StockError, match="Only 1 of holding 1 are claimed for pump"):
        ledger.release(db, {1: 2}, "pump")
    ledger.release(db, {1: 2}, "horn")
    (holding,) = read_stock(db)
    assert (holding.claimed, holding.free) == (1, 4)


@pytest.mark.parametrize("pieces", [{}, {1: 0}, {1: -1}])
@pytest.mark.parametrize("act", [ledger.claim, ledger.release])
def test_pieces_are_positive(db, say_entry, act, pieces):
    loading.apply(db, [say_entry()])
    with pytest.raises(BadRequestError):
        act(db, pieces, "horn")


@pytest.mark.parametrize(
    "act",
    [
        lambda db: ledger.claim(db, {9: 1}, "horn"),
        lambda db: ledger.release(db, {9: 1}, "horn"),
        lambda db: ledger.correct(db, 9, Count(1)),
    ],
)
def test_an_unknown_holding_is_named(db, say_entry, act):
    loading.apply(db, [say_entry()])
    with pytest.raises(StockError, match="no holding 9 in the stock"):
        act(db)


@pytest.mark.parametrize(
    "statement",
    [
        "UPDATE movements SET quantity = 9",
        "DELETE FROM movements",
        "UPDATE claims SET quantity = 9",
        "DELETE FROM claims",
        "DELETE FROM changes",
        "INSERT INTO claims VALUES (7, 1, 1, 99, 'horn')",
        "INSERT INTO claims VALUES (7, 1, 1, -3, 'horn')",
        "INSERT INTO movements VALUES (7, 1, 1, -4, 'exact')",
        "DELETE FROM holdings",
        "DELETE FROM drawers",
    ],
)
def test_the_database_itself_holds_the_invariants(db, say_entry, statement):
    loading.apply(db, [say_entry(count=5)])
    ledger.claim(db, {1: 2}, "horn")
    with closing(sqlite3.connect(db)) as connection:
        connection.execute("PRAGMA foreign_keys = ON")
        with pytest.raises(sqlite3.IntegrityError):
            connection.execute(statement)


class Workshop(RuleBasedStateMachine):
    """Whatever is done, in any order, free never falls below zero and the sums hold."""

    def __init__(self):
        super().__init__()
        import tempfile
        from pathlib import Path

        self.folder = tempfile.TemporaryDirectory()
        self.db = Path(self.folder.name) / "stock.db"
        self.count = 0
        self.claimed = {"horn": 0, "pump": 0}

    def teardown(self):
        self.folder.cleanup()

    @rule(pieces=st.integers(0, 5))
    def put_in(self, pieces):
        ledger.add(self.db, Entry(Part(Kind.RESISTOR, 1e3), "A1", Count(pieces), ""))
        self.count += pieces

    @precondition(lambda self: self.db.exists())
    @rule(pieces=st.integers(0, 8))
    def count_them(self, pieces):
        if self._try(lambda: ledger.correct(self.db, 1, Count(pieces))):
            assert pieces >= sum(self.claimed.values())
            self.count = pieces

    @precondition(lambda self: self.db.exists())
    @rule(pieces=st.integers(1, 4), purpose=st.sampled_from(["horn", "pump"]))
    def claim(self, pieces, purpose):
        free = self.count - sum(self.claimed.values())
        assert self._try(lambda: ledger.claim(self.db, {1: pieces}, purpose)) == (pieces <= free)
        self.claimed[purpose] += pieces if pieces <= free else 0

    @precondition(lambda self: self.db.exists())
    @rule(pieces=st.integers(1, 4), purpose=st.sampled_from(["horn", "pump"]))
    def release(self, pieces, purpose):
        held = self.claimed[purpose]
        assert self._try(lambda: ledger.release(self.db, {1: pieces}, purpose)) == (pieces <= held)
        self.claimed[purpose] -= pieces if pieces <= held else 0

    @staticmethod
    def _try(act):
        try:
            act()
        except ChooserError:
            return False
        return True

    @invariant()
    def sums_hold(self):
        if self.db.exists():
            (holding,) = read_stock(self.db)
            assert holding.count.number == self.count
            assert holding.claimed == sum(self.claimed.values())
            assert holding.free >= 0


TestWorkshop = Workshop.TestCase
TestWorkshop.settings = settings(max_examples=6, stateful_step_count=20, deadline=None)
