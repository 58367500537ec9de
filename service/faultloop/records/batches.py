"""Batches: stored whole in one transaction, compressed, and read back as they were."""

import zlib
from dataclasses import asdict, fields
from datetime import UTC, datetime

from sqlalchemy import Connection, Engine, RowMapping, select
from sqlalchemy.dialects import postgresql, sqlite

from .database import reaching
from .store import Writing
from .tables import BATCH, BatchRecord, KeptBatch

_BYTES = ("parameters", "content", "answer")
# Answers repeat themselves, so the quickest level already leaves a tenth; a slower one would cost more than it saves.
_LEVEL = 1


def keep_batch(engine: Engine, record: BatchRecord) -> tuple[KeptBatch, bool]:
    """Store a batch, or find the one that already has its id; True when this call created it.

    Blocks until the database has confirmed: to be called from a worker's thread.
    """
    row = asdict(record) | {name: zlib.compress(getattr(record, name), _LEVEL) for name in _BYTES}
    row["stored_at"] = stored_at = datetime.now(UTC)
    dialect = postgresql if engine.dialect.name == "postgresql" else sqlite
    insert = dialect.insert(BATCH).on_conflict_do_nothing(index_elements=["id"]).returning(BATCH.c.id)
    writing = Writing(engine)
    try:
        with writing.transaction() as connection:
            created = connection.execute(insert, row).one_or_none() is not None
            found = None if created else _found(connection, record.id)
    finally:
        writing.close()
    return found or KeptBatch(record, stored_at), created


def find_batch(engine: Engine, id: str) -> KeptBatch | None:  # noqa: A002
    """Give the batch with this id, if there is one."""
    with reaching(engine), engine.connect() as connection:
        return _found(connection, id)


def _found(connection: Connection, id: str) -> KeptBatch | None:  # noqa: A002
    row = connection.execute(select(BATCH).where(BATCH.c.id == id)).mappings().one_or_none()
    return None if row is None else _kept(row)


def _kept(row: RowMapping) -> KeptBatch:
    told = {field.name: row[field.name] for field in fields(BatchRecord)}
    told |= {name: zlib.decompress(row[name]) for name in _BYTES}
    return KeptBatch(BatchRecord(**told), row["stored_at"])
