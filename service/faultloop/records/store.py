"""One transaction for a group of records, on a connection that only the writer uses."""

from collections.abc import Iterator
from contextlib import contextmanager
from datetime import UTC, datetime
from typing import Any

from sqlalchemy import Connection, Engine, select
from sqlalchemy.dialects import postgresql, sqlite
from sqlalchemy.exc import DataError, DBAPIError, IntegrityError

from .database import reason, write_begin
from .errors import RecordRefused, StorageFailed, StorageUnavailable
from .tables import ASSESSMENT, RECORD_FIELDS, Record, Stored, stored

Created = tuple[Stored, bool]


class Store:
    """Add records group by group; after any failure the next group gets a fresh connection."""

    def __init__(self, engine: Engine) -> None:
        self._engine = engine
        self._connection: Connection | None = None
        insert = sqlite.insert if engine.dialect.name == "sqlite" else postgresql.insert
        new = insert(ASSESSMENT).on_conflict_do_nothing(index_elements=["id"])
        self._insert = new.returning(ASSESSMENT.c.id, ASSESSMENT.c.sequence)

    def add(self, records: list[Record]) -> list[Created]:
        """Store all of them or none; each answer is the row now stored, and whether this call made it."""
        first = {record.id: record for record in reversed(records)}
        stored_at = datetime.now(UTC)
        with self._transaction() as connection:
            # in one order everywhere, or two services that store the same ids could wait for each other
            rows = [_row(first[key], stored_at) for key in sorted(first)]
            sequences: dict[str, int] = dict(connection.execute(self._insert, rows).all())
            found = _existing(connection, first.keys() - sequences.keys())
        made = {key: Stored(first[key], sequence, stored_at) for key, sequence in sequences.items()}
        rows_now = made | found
        return [(rows_now[record.id], made.pop(record.id, None) is not None) for record in records]

    def close(self) -> None:
        """Give the connection up for good, whatever state it is in."""
        if self._connection is not None:
            self._connection.invalidate()
            self._connection.close()
            self._connection = None

    @contextmanager
    def _transaction(self) -> Iterator[Connection]:
        try:
            if self._connection is None:
                self._connection = write_begin(self._engine.connect())
            transaction = self._connection.begin()
        except Exception as error:
            self.close()
            raise StorageUnavailable(f"the database cannot be written to now: {reason(error)}") from error
        try:
            with transaction:
                yield self._connection
        except Exception as error:
            self.close()
            raise _failure(error) from error


def _row(record: Record, stored_at: datetime) -> dict[str, Any]:
    row = {name: getattr(record, name) for name in RECORD_FIELDS}
    row["stored_at"] = stored_at
    return row


def _existing(connection: Connection, ids: set[str]) -> dict[str, Stored]:
    if not ids:
        return {}
    found = connection.execute(select(ASSESSMENT).where(ASSESSMENT.c.id.in_(ids))).mappings()
    return {row["id"]: stored(row) for row in found}


def _failure(error: Exception) -> StorageFailed:
    """Tell the database's trouble, which may pass, from a record that can never be stored."""
    if isinstance(error, DBAPIError) and not isinstance(error, IntegrityError | DataError):
        return StorageFailed(f"the database did not store the record: {reason(error)}")
    return RecordRefused(f"the database does not take the record: {reason(error)}")
