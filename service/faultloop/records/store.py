"""One transaction for a group of records, on a connection that only the writer uses."""

from collections.abc import Iterator
from contextlib import contextmanager
from datetime import UTC, datetime
from functools import lru_cache
from typing import Any

from sqlalchemy import Connection, Engine, select
from sqlalchemy.dialects import sqlite
from sqlalchemy.exc import DataError, DBAPIError, IntegrityError

from .database import reason, write_begin
from .errors import RecordRefused, StorageFailed, StorageUnavailable
from .tables import ASSESSMENT, RECORD_FIELDS, Record, Stored, stored

Created = tuple[Stored, bool]
_COLUMNS = (*RECORD_FIELDS, "stored_at")


class Writing:
    """Transactions that write, on one connection; after any failure the next one gets a fresh connection."""

    def __init__(self, engine: Engine) -> None:
        self._engine = engine
        self._connection: Connection | None = None

    def close(self) -> None:
        """Give the connection up for good, whatever state it is in."""
        if self._connection is not None:
            self._connection.invalidate()
            self._connection.close()
            self._connection = None

    @contextmanager
    def transaction(self) -> Iterator[Connection]:
        """One transaction: what it did is stored when it ends without an error, and only then."""
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


class Store(Writing):
    """Add records group by group."""

    def __init__(self, engine: Engine) -> None:
        super().__init__(engine)
        self._numbered = engine.dialect.name == "postgresql"
        new = sqlite.insert(ASSESSMENT).on_conflict_do_nothing(index_elements=["id"])
        self._insert = new.returning(ASSESSMENT.c.id, ASSESSMENT.c.sequence)

    def add(self, records: list[Record]) -> list[Created]:
        """Store all of them or none; each answer is the row now stored, and whether this call made it."""
        first = {record.id: record for record in reversed(records)}
        stored_at = datetime.now(UTC)
        with self.transaction() as connection:
            # in one order everywhere, or two services that store the same ids could wait for each other
            rows = [_row(first[key], stored_at) for key in sorted(first)]
            sequences = self._inserted(connection, rows)
            found = _existing(connection, first.keys() - sequences.keys())
        made = {key: Stored(first[key], sequence, stored_at) for key, sequence in sequences.items()}
        rows_now = made | found
        return [(rows_now[record.id], made.pop(record.id, None) is not None) for record in records]

    def _inserted(self, connection: Connection, rows: list[dict[str, Any]]) -> dict[str, int]:
        """Insert what is new and give its sequence numbers by id."""
        if not self._numbered:
            return dict(connection.execute(self._insert, rows).all())
        # The driver reads a long statement anew each time, unless it comes with the server's own parameters.
        import psycopg

        driver: Any = connection.connection.driver_connection
        try:
            with psycopg.RawCursor(driver) as cursor:
                cursor.execute(_numbered(len(rows)).encode(), [row[name] for row in rows for name in _COLUMNS])
                return dict(cursor.fetchall())
        except psycopg.Error as error:
            raise DBAPIError.instance("INSERT", None, error, psycopg.Error, hide_parameters=True) from error


@lru_cache(maxsize=1024)
def _numbered(count: int) -> str:
    """PostgreSQL's own insert of so many rows, with numbered parameters."""
    width, numbers = len(_COLUMNS), range(1, count * len(_COLUMNS) + 1)
    rows = (",".join(f"${n}" for n in numbers[at : at + width]) for at in range(0, len(numbers), width))
    values = ",".join(f"({row})" for row in rows)
    names = ",".join(_COLUMNS)
    return f"INSERT INTO {ASSESSMENT.name} ({names}) VALUES {values} ON CONFLICT (id) DO NOTHING RETURNING id, sequence"


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
