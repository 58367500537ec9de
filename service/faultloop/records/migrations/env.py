"""What Alembic runs around every migration: one connection, one lock, one transaction.

The engine comes from `faultloop.records.migrate`. Developers writing a new revision name a database
instead: `alembic -x url=sqlite:///scratch.sqlite3 revision --autogenerate -m "..."`.
"""

from alembic import context
from sqlalchemy import Connection, Engine, text

from faultloop.records.database import open_engine
from faultloop.records.tables import Base

LOCK_WAIT_S = 60
LOCK_KEY = 0x6661756C746C6F6F  # the same in every version, or two versions could migrate at once


def _engine() -> Engine:
    given = context.config.attributes.get("connection")
    if isinstance(given, Engine):
        return given
    return open_engine(context.get_x_argument(as_dictionary=True)["url"])


def _lock(connection: Connection) -> Connection:
    """Let one starter migrate at a time; the lock goes with the transaction or with the session."""
    connection.detach()  # closed for good at the end, with whatever it locked or set
    if connection.dialect.name == "sqlite":
        cursor = connection.connection.cursor()
        cursor.execute(f"PRAGMA busy_timeout = {LOCK_WAIT_S * 1000}")
        cursor.execute("PRAGMA foreign_keys = OFF")  # a table that is rebuilt must not take others along
        cursor.close()
        return connection.execution_options(sqlite_begin="BEGIN EXCLUSIVE")
    connection.execute(text(f"SET lock_timeout = '{LOCK_WAIT_S}s'"))
    connection.execute(text("SELECT pg_advisory_lock(:key)"), {"key": LOCK_KEY})
    connection.commit()
    return connection


def _run() -> None:
    with _engine().connect() as fresh:
        connection = _lock(fresh)
        context.configure(
            connection=connection,
            target_metadata=Base.metadata,
            render_as_batch=True,
            transactional_ddl=True,
        )
        with context.begin_transaction():
            context.run_migrations()


_run()
