"""Creating, upgrading and downgrading, and what databases of another schema are told."""

from __future__ import annotations

import stat
from pathlib import Path

import pytest
import signed_story as story
import store_scenario as scenario
from alembic.autogenerate import compare_metadata
from alembic.config import Config
from alembic.migration import MigrationContext
from alembic.script import ScriptDirectory
from sqlalchemy import inspect, text

from featherlog.errors import InputError, RefusedError, StoreError
from featherlog.store import migrate
from featherlog.store.backup import verify
from featherlog.store.engine import migrating, open_engine, reading, sqlite_file, writing
from featherlog.store.ledger import append, entries
from featherlog.store.migrate import create, downgrade, script_location, upgrade
from featherlog.store.queries import properties
from featherlog.store.schema import REVISIONS
from featherlog.store.tables import metadata

CHECKOUT = Path(__file__).parents[2]


def table_names(url: str) -> set[str]:
    with migrating(open_engine(url)) as connection:
        return set(inspect(connection).get_table_names())


def stamp(url: str, statement: str) -> None:
    with migrating(open_engine(url)) as connection:
        connection.execute(text(statement))


@pytest.mark.parametrize(("demo", "value"), [(True, "yes"), (False, "no")])
def test_a_database_is_for_practice_or_not_from_its_creation(
    empty_database_url: str, demo: bool, value: str
) -> None:
    create(empty_database_url, demo=demo)
    with reading(open_engine(empty_database_url)) as connection:
        assert properties(connection) == {"demo": value}


def test_a_database_with_tables_is_not_created_again(database_url: str) -> None:
    before = table_names(database_url)
    with pytest.raises(RefusedError, match="already has tables"):
        create(database_url, demo=True)
    assert table_names(database_url) == before


@pytest.mark.parametrize("backend", ["sqlite"])
def test_a_creation_that_fails_leaves_no_file(
    empty_database_url: str, monkeypatch: pytest.MonkeyPatch, tmp_path: Path
) -> None:
    monkeypatch.setattr(migrate, "REVISIONS", ("0000",))
    with pytest.raises(Exception, match="0000"):
        create(empty_database_url, demo=False)
    assert list(tmp_path.iterdir()) == []


def test_up_down_and_up_again(empty_database_url: str) -> None:
    create(empty_database_url, demo=False)
    full = table_names(empty_database_url)
    downgrade(empty_database_url, "base")
    assert table_names(empty_database_url) == {"alembic_version"}
    upgrade(empty_database_url)
    assert table_names(empty_database_url) == full
    with writing(open_engine(empty_database_url)) as connection:
        append(connection, scenario.staff())


def test_a_downgrade_that_would_lose_records_is_refused_unless_asked_for(
    database_url: str,
) -> None:
    with writing(open_engine(database_url)) as connection:
        append(connection, scenario.staff())
    with pytest.raises(RefusedError, match="would lose"):
        downgrade(database_url, "base")
    with reading(open_engine(database_url)) as connection:
        assert len(list(entries(connection))) == 1
    downgrade(database_url, "base", lose_records=True)
    assert table_names(database_url) == {"alembic_version"}


def test_an_upgrade_of_a_current_database_does_nothing(database_url: str, tmp_path: Path) -> None:
    before = sorted(tmp_path.iterdir())
    assert upgrade(database_url) is None
    assert sorted(tmp_path.iterdir()) == before


@pytest.mark.parametrize("backend", ["sqlite"])
def test_a_file_is_copied_beside_itself_before_its_schema_changes(database_url: str) -> None:
    people = story.everyone()
    written = story.tell(database_url, [*story.opening(people), *story.course(people)])
    backup = downgrade(database_url, "base", lose_records=True)
    file = sqlite_file(database_url)
    assert backup is not None
    assert file is not None
    assert backup.parent == file.parent
    assert stat.S_IMODE(backup.stat().st_mode) == 0o600
    verify(backup)
    with reading(open_engine(f"sqlite:///{backup}")) as connection:
        assert list(entries(connection)) == written


@pytest.mark.parametrize("backend", ["sqlite"])
def test_without_room_for_the_backup_nothing_is_migrated(
    database_url: str, tmp_path: Path, monkeypatch: pytest.MonkeyPatch
) -> None:
    def full(_source: Path, target: Path) -> None:
        raise StoreError(f"{target} has no room")

    monkeypatch.setattr(migrate, "copy_file", full)
    before = table_names(database_url)
    with pytest.raises(StoreError, match="has no room"):
        downgrade(database_url, "base")
    assert table_names(database_url) == before
    assert [path.name for path in tmp_path.iterdir()] == ["featherlog.db"]


def test_the_migrations_make_the_tables_the_program_knows(database_url: str) -> None:
    with reading(open_engine(database_url)) as connection:
        context = MigrationContext.configure(connection, opts={"compare_server_default": True})
        assert compare_metadata(context, metadata) == []
        found = inspect(connection)
        for table in metadata.sorted_tables:
            # Names of checks and keys, which the comparison above does not look at.
            checks = {check["name"] for check in found.get_check_constraints(table.name)}
            keys = {key["name"] for key in found.get_foreign_keys(table.name)}
            primary = found.get_pk_constraint(table.name)["name"]
            named = {constraint.name for constraint in table.constraints}
            unique = {key["name"] for key in found.get_unique_constraints(table.name)}
            assert checks | keys | unique | {primary} == named


@pytest.mark.parametrize(
    ("statement", "advice"),
    [
        ("DELETE FROM alembic_version", r"older .* run `featherlog database upgrade`"),
        ("UPDATE alembic_version SET version_num = '9999'", r"newer .* install a newer"),
        ("UPDATE alembic_version SET version_num = 'ae1027a6acf1'", "not a featherlog database"),
        ("DROP TABLE alembic_version", "not a featherlog database"),
    ],
)
def test_another_schema_is_named_with_what_to_do(
    database_url: str, statement: str, advice: str
) -> None:
    stamp(database_url, statement)
    for use in (reading, writing):
        with pytest.raises(StoreError, match=advice), use(open_engine(database_url)):
            pass


def test_a_newer_database_is_not_upgraded(database_url: str) -> None:
    stamp(database_url, "UPDATE alembic_version SET version_num = '9999'")
    with pytest.raises(StoreError, match="newer than this program"):
        upgrade(database_url)


def test_a_downgrade_goes_to_a_known_revision_only(database_url: str) -> None:
    with pytest.raises(InputError, match="'0099' is not known; allowed: base, 0001"):
        downgrade(database_url, "0099")


def test_the_known_revisions_are_those_of_the_chain() -> None:
    config = Config()
    config.set_main_option("script_location", str(script_location()))
    chain = [script.revision for script in ScriptDirectory.from_config(config).walk_revisions()]
    assert tuple(reversed(chain)) == REVISIONS


def test_a_checkout_uses_its_own_migrations() -> None:
    assert script_location() == CHECKOUT / "migrations"


def test_an_installed_program_uses_the_migrations_inside_it(
    tmp_path: Path, monkeypatch: pytest.MonkeyPatch
) -> None:
    # Another package's folder of that name may stand beside ours in site-packages.
    (tmp_path / "migrations").mkdir()
    (tmp_path / "migrations" / "env.py").touch()
    monkeypatch.setattr(migrate, "_PACKAGE", tmp_path / "featherlog")
    assert script_location() == tmp_path / "featherlog" / "migrations"
