"""One chain of migrations for both databases: up, down, up again, with rows present, by several starters."""

import threading

import pytest
from alembic import command
from alembic.autogenerate import compare_metadata
from alembic.migration import MigrationContext
from alembic.script import ScriptDirectory
from sqlalchemy import Engine, inspect, text

from faultloop.records import rule_sets
from faultloop.records.database import open_engine
from faultloop.records.errors import DatabaseRefused
from faultloop.records.migrate import configuration, migrate, state
from faultloop.records.queries import find
from faultloop.records.store import Store
from faultloop.records.tables import ASSESSMENT
from tests.records.made import record


def test_there_is_one_head(engine: Engine) -> None:
    assert len(ScriptDirectory.from_config(configuration(engine)).get_heads()) == 1


def test_models_and_migrations_agree(engine: Engine) -> None:
    with engine.connect() as connection:
        context = MigrationContext.configure(connection, opts={"compare_type": False})
        assert compare_metadata(context, ASSESSMENT.metadata) == []


def test_down_and_up_again(engine: Engine) -> None:
    command.downgrade(configuration(engine), "base")
    assert state(engine) == "empty"
    assert "assessment" not in inspect(engine).get_table_names()
    migrate(engine)
    assert state(engine) == "current"


def test_rows_survive_a_second_migration(engine: Engine) -> None:
    made = record()
    store = Store(engine)
    store.add([made])
    store.close()
    migrate(engine)
    found = find(engine, made.id)
    assert found is not None
    assert found.record == made


def test_rows_of_the_first_revision_survive_the_second(engine: Engine) -> None:
    command.downgrade(configuration(engine), "0001")
    assert state(engine) == "behind"
    made = record()
    store = Store(engine)
    store.add([made])
    store.close()
    migrate(engine)
    assert state(engine) == "current"
    found = find(engine, made.id)
    assert found is not None
    assert found.record == made
    assert rule_sets.content_of(engine, made.rules_digest) is None


def test_rule_sets_are_kept_by_digest_and_named_once(engine: Engine) -> None:
    first, second = ("a" * 64, "own:2026", b"{1}"), ("b" * 64, "own:2026", b"{2}")
    rule_sets.remember(engine, *first)
    rule_sets.remember(engine, *first)
    assert rule_sets.content_named(engine, "own:2026") is None
    assert rule_sets.store(engine, *second) == ("b" * 64, True)
    assert rule_sets.store(engine, *second) == ("b" * 64, False)
    assert rule_sets.store(engine, *first) == ("b" * 64, False)
    migrate(engine)
    assert rule_sets.content_named(engine, "own:2026") == b"{2}"
    assert rule_sets.content_of(engine, "a" * 64) == b"{1}"
    assert rule_sets.contents(engine, size=5) == [b"{2}"]
    command.downgrade(configuration(engine), "0001")
    migrate(engine)
    assert rule_sets.contents(engine, size=5) == []


def test_two_starters_at_once(database_url: str) -> None:
    faults: list[BaseException] = []

    def start() -> None:
        opened = open_engine(database_url)
        try:
            migrate(opened)
        except BaseException as error:
            faults.append(error)
        finally:
            opened.dispose()

    starters = [threading.Thread(target=start) for _ in range(4)]
    for starter in starters:
        starter.start()
    for starter in starters:
        starter.join()
    assert faults == []
    opened = open_engine(database_url)
    assert state(opened) == "current"
    opened.dispose()


def test_a_revision_from_the_future_is_known_as_such(engine: Engine) -> None:
    with engine.begin() as connection:
        connection.execute(text("UPDATE alembic_version SET version_num = 'ffffffffffff'"))
    assert state(engine) == "unknown"


@pytest.mark.parametrize(
    "url", ["mysql://u:secret@h/d", "nonsense", "sqlite:///:memory:", "sqlite:////no/such/place/x"]
)
def test_what_cannot_be_opened_is_refused_without_its_password(url: str) -> None:
    with pytest.raises(DatabaseRefused) as caught:
        open_engine(url)
    assert "secret" not in str(caught.value)
