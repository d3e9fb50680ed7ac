"""Drawers, holdings, and the ledger of movements and claims.

Revision 0001, the first one.
"""

from __future__ import annotations

import sqlalchemy as sa
from alembic import op

revision = "0001"
down_revision = None
branch_labels = None
depends_on = None


def upgrade() -> None:
    op.execute("PRAGMA application_id = 0x43484F4F")  # "CHOO": tells our files from foreign ones
    _drawers()
    _holdings()
    _changes()
    _movements()
    _claims()
    _only_ever_added("movements")
    _only_ever_added("claims")
    _only_ever_added("changes")
    _free_never_negative("movements", "NEW.sureness")
    _free_never_negative(
        "claims",
        "(SELECT sureness FROM movements WHERE holding_id = NEW.holding_id"
        " ORDER BY id DESC LIMIT 1)",
    )
    _claimed_never_negative()


def _drawers() -> None:
    op.create_table(
        "drawers",
        sa.Column("id", sa.Integer(), nullable=False),
        sa.Column("name", sa.Text(), nullable=False),
        sa.PrimaryKeyConstraint("id", name=op.f("pk_drawers")),
        sa.UniqueConstraint("name", name=op.f("uq_drawers_name")),
        sa.CheckConstraint("trim(name) <> ''", name=op.f("ck_drawers_name_not_blank")),
        sqlite_strict=True,
    )


def _holdings() -> None:
    op.create_table(
        "holdings",
        sa.Column("id", sa.Integer(), nullable=False),
        sa.Column("drawer_id", sa.Integer(), nullable=False),
        sa.Column("kind", sa.Text(), nullable=False),
        sa.Column("value", sa.REAL(), nullable=False),
        sa.Column("marking", sa.Text(), nullable=False),
        sa.Column("tolerance_minus", sa.REAL()),
        sa.Column("tolerance_plus", sa.REAL()),
        sa.Column("technology", sa.Text()),
        sa.Column("power", sa.REAL()),
        sa.Column("voltage", sa.REAL()),
        sa.Column("tempco", sa.REAL()),
        sa.Column("measured", sa.REAL()),
        sa.Column("meter", sa.REAL()),
        sa.Column("leakage", sa.REAL()),
        sa.Column("taper", sa.Text()),
        sa.Column("turns", sa.REAL()),
        sa.Column("end_resistance", sa.REAL()),
        sa.Column("price", sa.REAL()),
        sa.Column("pack", sa.Integer()),
        sa.Column("supplier", sa.Text(), nullable=False),
        sa.Column("order_code", sa.Text(), nullable=False),
        sa.Column("note", sa.Text(), nullable=False),
        *_holding_checks(),
        sa.PrimaryKeyConstraint("id", name=op.f("pk_holdings")),
        sa.ForeignKeyConstraint(
            ["drawer_id"],
            ["drawers.id"],
            name=op.f("fk_holdings_drawer_id"),
            ondelete="RESTRICT",
        ),
        sqlite_strict=True,
    )
    op.create_index(op.f("ix_holdings_drawer_id"), "holdings", ["drawer_id"])


def _holding_checks() -> list[sa.CheckConstraint]:
    checks = {
        "kind_known": "kind IN ('resistor', 'pot', 'trimmer', 'capacitor')",
        "taper_known": "taper IN ('linear', 'log', 'reverse-log')",
        "value_positive": "value > 0",
        "measured_positive": "measured > 0",
        "tolerance_whole": "(tolerance_minus IS NULL) = (tolerance_plus IS NULL)",
        "tolerance_minus": "tolerance_minus >= 0 AND tolerance_minus < 1",
        "tolerance_plus": "tolerance_plus >= 0",
        "power_positive": "power > 0",
        "voltage_positive": "voltage > 0",
        "meter_not_negative": "meter >= 0",
        "leakage_not_negative": "leakage >= 0",
        "turns_positive": "turns > 0",
        "end_resistance_not_negative": "end_resistance >= 0",
        "price_not_negative": "price >= 0",
        "pack_positive": "pack > 0",
    }
    return [
        sa.CheckConstraint(rule, name=op.f(f"ck_holdings_{name}")) for name, rule in checks.items()
    ]


def _changes() -> None:
    op.create_table(
        "changes",
        sa.Column("id", sa.Integer(), nullable=False),
        sa.Column("at", sa.Text(), nullable=False),
        sa.Column("what", sa.Text(), nullable=False),
        sa.PrimaryKeyConstraint("id", name=op.f("pk_changes")),
        sqlite_strict=True,
    )


def _movements() -> None:
    op.create_table(
        "movements",
        *_ledger_columns(),
        sa.Column("quantity", sa.Integer(), nullable=False),
        sa.Column("sureness", sa.Text(), nullable=False),
        sa.CheckConstraint(
            "sureness IN ('exact', 'rough', 'plenty')", name=op.f("ck_movements_sureness_known")
        ),
        *_ledger_keys("movements"),
        sqlite_strict=True,
    )
    _ledger_indexes("movements")


def _claims() -> None:
    op.create_table(
        "claims",
        *_ledger_columns(),
        sa.Column("quantity", sa.Integer(), nullable=False),
        sa.Column("purpose", sa.Text(), nullable=False),
        sa.CheckConstraint("quantity <> 0", name=op.f("ck_claims_quantity_not_zero")),
        *_ledger_keys("claims"),
        sqlite_strict=True,
    )
    _ledger_indexes("claims")


def _ledger_columns() -> list[sa.Column[int]]:
    return [
        sa.Column("id", sa.Integer(), nullable=False),
        sa.Column("change_id", sa.Integer(), nullable=False),
        sa.Column("holding_id", sa.Integer(), nullable=False),
    ]


def _ledger_keys(table: str) -> list[sa.Constraint]:
    keys: list[sa.Constraint] = [sa.PrimaryKeyConstraint("id", name=op.f(f"pk_{table}"))]
    for column, target in (("change_id", "changes.id"), ("holding_id", "holdings.id")):
        name = op.f(f"fk_{table}_{column}")
        keys.append(sa.ForeignKeyConstraint([column], [target], name=name, ondelete="RESTRICT"))
    return keys


def _ledger_indexes(table: str) -> None:
    for column in ("change_id", "holding_id"):
        op.create_index(op.f(f"ix_{table}_{column}"), table, [column])


def _only_ever_added(table: str) -> None:
    """Refuse to change or remove a row: a mistake is put right by its opposite."""
    for verb in ("UPDATE", "DELETE"):
        op.execute(
            f"CREATE TRIGGER {table}_no_{verb.lower()} BEFORE {verb} ON {table} BEGIN"
            f" SELECT RAISE(ABORT, '{table} are only ever added'); END"
        )


def _free_never_negative(table: str, sureness: str) -> None:
    """Refuse a row that leaves more claimed than there is; the second line of defence."""
    total = "(SELECT coalesce(sum(quantity), 0) FROM {} WHERE holding_id = NEW.holding_id)"
    op.execute(
        f"CREATE TRIGGER {table}_free AFTER INSERT ON {table} WHEN {sureness} <> 'plenty'"
        f" AND {total.format('movements')} < {total.format('claims')}"
        " BEGIN SELECT RAISE(ABORT, 'free would fall below zero'); END"
    )


def _claimed_never_negative() -> None:
    """Refuse to give back more than was put aside for the purpose."""
    op.execute(
        "CREATE TRIGGER claims_given_back AFTER INSERT ON claims"
        " WHEN (SELECT sum(quantity) FROM claims"
        " WHERE holding_id = NEW.holding_id AND purpose = NEW.purpose) < 0"
        " BEGIN SELECT RAISE(ABORT, 'claimed would fall below zero'); END"
    )
