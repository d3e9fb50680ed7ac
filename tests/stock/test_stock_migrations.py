from __future__ import annotations

import re
import shutil
import sqlite3
from contextlib import closing
from pathlib import Path

import pytest
from alembic import command
from alembic.script import ScriptDirectory
from sqlalchemy import create_engine

import chooser
from chooser.errors import StockError
from chooser.stock import loading, models, revision, upgrade
from chooser.stock.engine import immediate
from chooser.stock.snapshot import read_stock

NEXT = '''"""Give drawers a colour, rebuilding the table."""
import sqlalchemy as sa
from alembic import op
revision = "0002"
down_revision = "0001"
branch_labels = None
depends_on = None
def upgrade():
    with op.batch_alter_table("drawers", recreate="always") as batch:
        batch.add_column(sa.Column("colour", sa.Text()))
{more}
'''


def tables_of(connection: sqlite3.Connection) -> dict[str, str]:
    rows = connection.execute(
        "SELECT name, sql FROM sqlite_master WHERE sql IS NOT NULL AND type IN ('table', 'index')"
        " AND name <> 'alembic_version'"
    )
    return {name: re.sub(r"[\s\"]+", " ", sql) for name, sql in rows}


def dump_of(path: Path) -> list[str]:
    with closing(sqlite3.connect(path)) as connection:
        return list(connection.iterdump())


@pytest.fixture
def next_revision(tmp_path, monkeypatch):
    """Pretend that this program knows one revision more; `more` is further lines of it."""

    def make(more=""):
        folder = tmp_path / "migrations"
        shutil.copytree(upgrade.migrations_folder(), folder)
        (folder / "versions" / "0002_colour.py").write_text(NEXT.format(more=more))
        monkeypatch.setattr(upgrade, "migrations_folder", lambda: folder)
        for module in (revision, upgrade):
            monkeypatch.setattr(module, "HEAD", "0002")
        monkeypatch.setattr(revision, "REVISIONS", ("0001", "0002"))

    return make


def test_the_revisions_known_are_those_of_the_folder():
    script = ScriptDirectory.from_config(upgrade.alembic_config())
    walked = [step.revision for step in script.walk_revisions()]
    assert tuple(reversed(walked)) == revision.REVISIONS
    assert script.get_current_head() == revision.HEAD


def test_models_and_migrations_build_the_same_tables(db):
    upgrade.upgrade(db)
    with closing(sqlite3.connect(db)) as migrated:
        built = tables_of(migrated)
    engine = create_engine("sqlite://")
    with engine.connect() as connection:
        models.Base.metadata.create_all(connection)
        modelled = tables_of(connection.connection.driver_connection)
    engine.dispose()
    assert built == modelled
    assert set(models.Base.metadata.tables) <= set(built)


def test_alembic_finds_nothing_to_change(db):
    upgrade.upgrade(db)
    config = upgrade.alembic_config()
    with immediate(db) as connection:
        config.attributes["connection"] = connection
        command.check(config)  # raises where models and database differ


def test_every_table_is_strict_and_every_constraint_named(db):
    upgrade.upgrade(db)
    with closing(sqlite3.connect(db)) as connection:
        strict = dict(connection.execute("SELECT name, strict FROM pragma_table_list"))
        built = tables_of(connection)
    for name, table in models.Base.metadata.tables.items():
        assert strict[name] == 1
        sql = built[name]
        for word in ("CHECK", "FOREIGN KEY", "UNIQUE", "PRIMARY KEY"):
            assert len(re.findall(rf"\b{word}\b", sql)) == len(
                re.findall(rf"CONSTRAINT (?:ck|fk|uq|pk)_{name}\w* {word}\b", sql)
            )
        assert all(key.ondelete == "RESTRICT" for key in table.foreign_keys)


def test_the_packaged_folder_is_taken_before_the_one_of_the_checkout(tmp_path, monkeypatch):
    package = tmp_path / "site" / "chooser"
    package.mkdir(parents=True)
    monkeypatch.setattr(chooser, "__file__", str(package / "__init__.py"))
    with pytest.raises(StockError, match="pip install"):
        upgrade.migrations_folder()
    beside = tmp_path / "site" / "migrations"
    beside.mkdir()
    (beside / "env.py").write_text("")
    assert upgrade.migrations_folder() == beside
    inside = package / "migrations"
    inside.mkdir()
    (inside / "env.py").write_text("")
    assert upgrade.migrations_folder() == inside


def test_a_path_with_awkward_signs_is_only_a_path(tmp_path, say_entry):
    awkward = tmp_path / "50% off?" / "stock #1 &mode=ro.db"
    loading.apply(awkward, [say_entry()])
    assert awkward.is_file()
    assert len(read_stock(awkward)) == 1


def test_an_old_stock_is_upgraded_after_a_copy_and_loses_nothing(
    db, say_entry, next_revision, caplog
):
    loading.apply(db, [say_entry(), say_entry(drawer="B2")])
    before, stock = dump_of(db), read_stock(db)
    next_revision()
    assert revision.state_of(db) is revision.State.OLD

    assert read_stock(db) == stock  # reading upgrades first: children of the rebuilt table stay

    assert revision.revision_of(db) == "0002"
    (copy,) = db.parent.glob("stock-before-0002-*.db")
    assert dump_of(copy) == before
    assert str(copy) in caplog.text
    assert upgrade.upgrade(db) == upgrade.Upgrade("0002", "0002", None)


@pytest.mark.parametrize(
    ("more", "error"),
    [
        ("    op.execute('SELECT nonsense')", "no such column"),
        ("    op.execute('DROP TABLE drawers')", "rows without their parents"),
    ],
)
def test_an_upgrade_that_fails_leaves_the_stock_as_it_was(
    db, say_entry, next_revision, more, error
):
    loading.apply(db, [say_entry()])
    before = dump_of(db)
    next_revision(more)
    with pytest.raises(StockError, match=error):
        upgrade.upgrade(db)
    assert dump_of(db) == before


def test_a_newer_stock_is_refused_and_untouched(db, say_entry):
    loading.apply(db, [say_entry()])
    with closing(sqlite3.connect(db)) as connection, connection:
        connection.execute("UPDATE alembic_version SET version_num = '9999'")
    before = db.read_bytes()
    for use in (
        lambda: read_stock(db),
        lambda: upgrade.upgrade(db),
        lambda: loading.compare(db, []),
        lambda: loading.apply(db, [say_entry(count=9)]),
    ):
        with pytest.raises(StockError, match=r"newer chooser \(form 9999, this one knows"):
            use()
    assert db.read_bytes() == before


def test_a_backup_is_the_same_stock_and_never_overwrites(db, say_entry):
    loading.apply(db, [say_entry()])
    first, second = upgrade.backup(db), upgrade.backup(db)
    assert first != second
    assert dump_of(first) == dump_of(second) == dump_of(db)
    with pytest.raises(StockError, match="exists already"):
        upgrade.backup(db, first)
