from __future__ import annotations

from pathlib import Path

import pytest

from chooser.parts import Count, Entry, Kind, Part, Sureness, Tolerance


@pytest.fixture
def db(tmp_path: Path) -> Path:
    return tmp_path / "stock.db"


@pytest.fixture
def say_entry():
    """Make an entry as a sheet row would: a value in ohm, a drawer, a count."""

    def make(value=10e3, count=5, drawer="A1", sureness=Sureness.EXACT, place="row 2", **traits):
        traits.setdefault("kind", Kind.RESISTOR)
        traits.setdefault("tolerance", Tolerance(0.05, 0.05))
        return Entry(Part(value=value, **traits), drawer, Count(count, sureness), place)

    return make
