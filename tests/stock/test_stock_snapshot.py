from __future__ import annotations

import dataclasses
import math
import sqlite3
from contextlib import closing

import pytest
from hypothesis import HealthCheck, given, settings
from hypothesis import strategies as st

from chooser.parts import Count, Entry, Holding, Kind, Part, Sureness, Taper, Tolerance
from chooser.stock import ledger, loading, models, snapshot, upgrade
from chooser.stock.comparing import Difference, LoadPlan
from chooser.stock.snapshot import Line, read_stock

positive = st.floats(min_value=1e-15, max_value=1e12)
not_negative = st.floats(min_value=0, max_value=1e12)
names = st.text(st.characters(codec="utf-8", exclude_characters="\0"), max_size=8)


def maybe(values):
    return st.none() | values


parts = st.builds(
    Part,
    kind=st.sampled_from(Kind),
    value=positive,
    marking=names,
    tolerance=maybe(st.builds(Tolerance, st.floats(min_value=0, max_value=0.99), st.floats(0, 10))),
    technology=maybe(names),
    power=maybe(positive),
    voltage=maybe(positive),
    tempco=maybe(st.floats(allow_nan=False, allow_infinity=False)),
    measured=maybe(positive),
    meter=maybe(not_negative),
    leakage=maybe(not_negative),
    taper=maybe(st.sampled_from(Taper)),
    turns=maybe(positive),
    end_resistance=maybe(not_negative),
    price=maybe(not_negative),
    pack=maybe(st.integers(min_value=1, max_value=10**6)),
    supplier=names,
    order_code=names,
    note=names,
)
counts = st.builds(Count, st.integers(0, 10**9)) | st.just(Count(0, Sureness.PLENTY))


def test_the_statement_reads_every_column_of_the_models():
    known = {column.name for column in models.Holding.__table__.columns}
    assert {"id", "drawer_id", *snapshot.TRAITS} == known


@settings(max_examples=25, deadline=None, suppress_health_check=[HealthCheck.too_slow])
@given(st.lists(st.tuples(parts, counts), max_size=6))
def test_what_is_read_is_what_was_loaded(tmp_path_factory, stated):
    path = tmp_path_factory.mktemp("snapshot") / "stock.db"
    entries = [Entry(part, f"drawer {at}", count, "") for at, (part, count) in enumerate(stated)]
    upgrade.upgrade(path)
    loading.apply(path, entries)
    read = read_stock(path)
    assert [(each.part, each.drawer, each.count) for each in read] == [
        (entry.part, entry.drawer, entry.count) for entry in entries
    ]


def test_the_count_is_the_sum_of_the_movements_and_the_last_sureness(db, say_entry):
    loading.apply(db, [say_entry(count=20)])
    (holding,) = read_stock(db)
    ledger.correct(db, holding.id, Count(12, Sureness.ROUGH))
    ledger.add(db, say_entry(count=3))
    ledger.claim(db, {holding.id: 4}, "horn board")
    with closing(sqlite3.connect(db)) as connection:
        movements = [each for (each,) in connection.execute("SELECT quantity FROM movements")]
    (now,) = read_stock(db)
    assert movements == [20, -8, 3]
    assert now.count == Count(15, Sureness.ROUGH)
    assert (now.claimed, now.free) == (4, 11)


@pytest.mark.parametrize(
    "record",
    [
        Entry(Part(Kind.RESISTOR, 1.0), "A", Count(1), "row 2"),
        Holding(1, Part(Kind.RESISTOR, 1.0), "A", Count(1)),
        Line(Holding(1, Part(Kind.RESISTOR, 1.0), "A", Count(1)), 1),
        LoadPlan((), (), 0, ()),
        Difference(
            Holding(1, Part(Kind.RESISTOR, 1.0), "A", Count(1)),
            Entry(Part(Kind.RESISTOR, 1.0), "A", Count(1), ""),
            recounted=False,
            amended=(),
        ),
        loading.LoadReport(LoadPlan((), (), 0, ()), None),
        ledger.Added(Holding(1, Part(Kind.RESISTOR, 1.0), "A", Count(1)), created=True, change=1),
        upgrade.Upgrade(None, "0001", None),
    ],
    ids=lambda record: type(record).__name__,
)
def test_records_cannot_be_changed(record):
    for field in dataclasses.fields(record):
        with pytest.raises(dataclasses.FrozenInstanceError):
            setattr(record, field.name, None)


@pytest.mark.parametrize(
    ("column", "value"),
    [
        ("value", 0.0),
        ("value", -1.0),
        ("value", math.nan),
        ("measured", 0.0),
        ("tolerance_minus", 1.0),
        ("tolerance_plus", None),
        ("kind", "inductor"),
        ("taper", "cubic"),
        ("value", "ten"),
        ("drawer_id", 77),
        ("pack", 0),
    ],
)
def test_the_database_itself_refuses_nonsense(db, say_entry, column, value):
    loading.apply(db, [say_entry()])
    with closing(sqlite3.connect(db)) as connection:
        connection.execute("PRAGMA foreign_keys = ON")
        with pytest.raises(sqlite3.IntegrityError):
            connection.execute(f"UPDATE holdings SET {column} = ?", (value,))  # noqa: S608
