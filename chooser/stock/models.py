"""The typed models of the database; migrations/ builds the same tables, a test compares them.

Values are stored as the core has them: SI units as REAL, tolerances as fractions. SQLite keeps
every double exactly, so what is read equals what was written.
"""

from __future__ import annotations

from enum import StrEnum
from typing import Any, ClassVar

from sqlalchemy import (
    REAL,
    CheckConstraint,
    Dialect,
    ForeignKey,
    Integer,
    MetaData,
    Text,
    TypeDecorator,
    UniqueConstraint,
)
from sqlalchemy.orm import DeclarativeBase, Mapped, mapped_column

from chooser.parts import Kind, Sureness, Taper

NAMING = {
    "pk": "pk_%(table_name)s",
    "fk": "fk_%(table_name)s_%(column_0_name)s",
    "uq": "uq_%(table_name)s_%(column_0_name)s",
    "ix": "ix_%(table_name)s_%(column_0_name)s",
    "ck": "ck_%(table_name)s_%(constraint_name)s",
}


class Word(TypeDecorator[StrEnum]):
    """An enum stored by its value in a TEXT column (STRICT tables refuse VARCHAR)."""

    impl = Text
    cache_ok = True

    def __init__(self, words: type[StrEnum]) -> None:
        self.words = words
        super().__init__()

    def process_bind_param(self, value: StrEnum | None, dialect: Dialect) -> str | None:  # noqa: ARG002
        """Store the value of the enum."""
        return None if value is None else str(value)

    def process_result_value(self, value: str | None, dialect: Dialect) -> StrEnum | None:  # noqa: ARG002
        """Give back the enum."""
        return None if value is None else self.words(value)


class Base(DeclarativeBase):
    """One metadata: explicit column types, every constraint named."""

    metadata = MetaData(naming_convention=NAMING)
    type_annotation_map: ClassVar[dict[Any, Any]] = {
        str: Text,
        int: Integer,
        float: REAL,
        Kind: Word(Kind),
        Taper: Word(Taper),
        Sureness: Word(Sureness),
    }


def _one_of(column: str, words: type[StrEnum]) -> str:
    return f"{column} IN ({', '.join(repr(str(word)) for word in words)})"


class Drawer(Base):
    """A place where parts lie."""

    __tablename__ = "drawers"
    __table_args__ = (
        UniqueConstraint("name"),
        CheckConstraint("trim(name) <> ''", name="name_not_blank"),
        {"sqlite_strict": True},
    )

    id: Mapped[int] = mapped_column(primary_key=True)
    name: Mapped[str]


class Holding(Base):
    """A line of the stock; its fields are those of `chooser.parts.Part`, in one drawer."""

    __tablename__ = "holdings"
    __table_args__ = (
        CheckConstraint(_one_of("kind", Kind), name="kind_known"),
        CheckConstraint(_one_of("taper", Taper), name="taper_known"),
        CheckConstraint("value > 0", name="value_positive"),
        CheckConstraint("measured > 0", name="measured_positive"),
        CheckConstraint(
            "(tolerance_minus IS NULL) = (tolerance_plus IS NULL)", name="tolerance_whole"
        ),
        CheckConstraint("tolerance_minus >= 0 AND tolerance_minus < 1", name="tolerance_minus"),
        CheckConstraint("tolerance_plus >= 0", name="tolerance_plus"),
        CheckConstraint("power > 0", name="power_positive"),
        CheckConstraint("voltage > 0", name="voltage_positive"),
        CheckConstraint("meter >= 0", name="meter_not_negative"),
        CheckConstraint("leakage >= 0", name="leakage_not_negative"),
        CheckConstraint("turns > 0", name="turns_positive"),
        CheckConstraint("end_resistance >= 0", name="end_resistance_not_negative"),
        CheckConstraint("price >= 0", name="price_not_negative"),
        CheckConstraint("pack > 0", name="pack_positive"),
        {"sqlite_strict": True},
    )

    id: Mapped[int] = mapped_column(primary_key=True)
    drawer_id: Mapped[int] = mapped_column(
        ForeignKey("drawers.id", ondelete="RESTRICT"), index=True
    )
    kind: Mapped[Kind]
    value: Mapped[float]
    marking: Mapped[str]
    tolerance_minus: Mapped[float | None]
    tolerance_plus: Mapped[float | None]
    technology: Mapped[str | None]
    power: Mapped[float | None]
    voltage: Mapped[float | None]
    tempco: Mapped[float | None]
    measured: Mapped[float | None]
    meter: Mapped[float | None]
    leakage: Mapped[float | None]
    taper: Mapped[Taper | None]
    turns: Mapped[float | None]
    end_resistance: Mapped[float | None]
    price: Mapped[float | None]
    pack: Mapped[int | None]
    supplier: Mapped[str]
    order_code: Mapped[str]
    note: Mapped[str]


class Change(Base):
    """One command that changed the stock: when (UTC, ISO 8601) and what."""

    __tablename__ = "changes"
    __table_args__ = ({"sqlite_strict": True},)

    id: Mapped[int] = mapped_column(primary_key=True)
    at: Mapped[str]
    what: Mapped[str]


class Movement(Base):
    """Pieces into (> 0) or out of (< 0) a drawer; the count is the sum, rows are only added.

    The sureness of the last movement is the sureness of the count.
    """

    __tablename__ = "movements"
    __table_args__ = (
        CheckConstraint(_one_of("sureness", Sureness), name="sureness_known"),
        {"sqlite_strict": True},
    )

    id: Mapped[int] = mapped_column(primary_key=True)
    change_id: Mapped[int] = mapped_column(
        ForeignKey("changes.id", ondelete="RESTRICT"), index=True
    )
    holding_id: Mapped[int] = mapped_column(
        ForeignKey("holdings.id", ondelete="RESTRICT"), index=True
    )
    quantity: Mapped[int]
    sureness: Mapped[Sureness]


class Claim(Base):
    """Pieces put aside (> 0) or given back (< 0) for a purpose; claimed is the sum."""

    __tablename__ = "claims"
    __table_args__ = (
        CheckConstraint("quantity <> 0", name="quantity_not_zero"),
        {"sqlite_strict": True},
    )

    id: Mapped[int] = mapped_column(primary_key=True)
    change_id: Mapped[int] = mapped_column(
        ForeignKey("changes.id", ondelete="RESTRICT"), index=True
    )
    holding_id: Mapped[int] = mapped_column(
        ForeignKey("holdings.id", ondelete="RESTRICT"), index=True
    )
    quantity: Mapped[int]
    purpose: Mapped[str]
