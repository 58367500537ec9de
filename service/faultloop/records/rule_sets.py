"""Callers' sets of rules: remembered by digest, stored under a name once and for all."""

from datetime import UTC, datetime
from typing import Any

from sqlalchemy import Connection, Engine, Table, select
from sqlalchemy.dialects import postgresql, sqlite

from .database import reaching, write_begin
from .tables import RULE_SET, RULE_SET_NAME

_INSERT: dict[str, Any] = {"sqlite": sqlite.insert, "postgresql": postgresql.insert}


def remember(engine: Engine, digest: str, name: str, content: bytes) -> None:
    """Keep what a set says; the same content again changes nothing."""
    with reaching(engine), write_begin(engine.connect()) as connection, connection.begin():
        _add(connection, RULE_SET, digest=digest, name=name, content=content)


def store(engine: Engine, digest: str, name: str, content: bytes) -> tuple[str, bool]:
    """Store a set under its name; gives the digest that the name stands for, and whether this call made it so."""
    with reaching(engine), write_begin(engine.connect()) as connection, connection.begin():
        _add(connection, RULE_SET, digest=digest, name=name, content=content)
        created = _add(connection, RULE_SET_NAME, digest=digest, name=name)
        named = select(RULE_SET_NAME.c.digest).where(RULE_SET_NAME.c.name == name)
        return str(connection.execute(named).scalar_one()), created


def _add(connection: Connection, table: Table, **row: Any) -> bool:
    """Insert a row unless its key is there already; whether it was not."""
    new = _INSERT[connection.dialect.name](table).values(**row, stored_at=datetime.now(UTC))
    return connection.execute(new.on_conflict_do_nothing().returning(table.c.digest)).first() is not None


def content_of(engine: Engine, digest: str) -> bytes | None:
    """What the set of this digest says."""
    return _one(engine, select(RULE_SET.c.content).where(RULE_SET.c.digest == digest))


def content_named(engine: Engine, name: str) -> bytes | None:
    """What the set stored under this name says."""
    joined = RULE_SET_NAME.join(RULE_SET, RULE_SET_NAME.c.digest == RULE_SET.c.digest)
    return _one(engine, select(RULE_SET.c.content).select_from(joined).where(RULE_SET_NAME.c.name == name))


def _one(engine: Engine, wanted: Any) -> bytes | None:
    with reaching(engine), engine.connect() as connection:
        found = connection.execute(wanted).scalar_one_or_none()
    return None if found is None else bytes(found)


def contents(engine: Engine, *, after: str = "", size: int) -> list[bytes]:
    """What stored sets say, by rising name, those behind a name only; an empty list is the end."""
    joined = RULE_SET_NAME.join(RULE_SET, RULE_SET_NAME.c.digest == RULE_SET.c.digest)
    wanted = select(RULE_SET.c.content).select_from(joined).where(RULE_SET_NAME.c.name > after)
    with reaching(engine), engine.connect() as connection:
        return [bytes(row[0]) for row in connection.execute(wanted.order_by(RULE_SET_NAME.c.name).limit(size))]
