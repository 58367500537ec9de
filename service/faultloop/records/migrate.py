"""Moving a database to the tables that this code expects, and telling where it stands."""

import threading
from functools import cache
from pathlib import Path
from typing import Literal

from alembic import command
from alembic.config import Config
from alembic.runtime.migration import MigrationContext
from alembic.script import ScriptDirectory
from sqlalchemy import Engine

from .database import reaching

State = Literal["empty", "behind", "current", "unknown"]

# Alembic keeps its context in module globals: one migration a process, whatever the database
_ONE_AT_A_TIME = threading.Lock()


def migrate(engine: Engine) -> None:
    """Upgrade the database to the newest revision; several starters may do so at once."""
    with _ONE_AT_A_TIME, reaching(engine):
        command.upgrade(configuration(engine), "head")


def state(engine: Engine) -> State:
    """Tell whether the database holds no tables yet, older ones, the right ones or ones not known here."""
    with reaching(engine), engine.connect() as connection:
        found = set(MigrationContext.configure(connection).get_current_heads())
    heads, known = _revisions()
    if not found:
        return "empty"
    if found == heads:
        return "current"
    return "behind" if found <= known else "unknown"


def configuration(engine: Engine) -> Config:
    """Give Alembic's configuration for an engine, without any file beside the package."""
    config = _configuration()
    config.attributes["connection"] = engine
    return config


def _configuration() -> Config:
    config = Config()
    location = str(Path(__file__).parent / "migrations")
    config.set_main_option("script_location", location.replace("%", "%%"))
    return config


@cache
def _revisions() -> tuple[frozenset[str], frozenset[str]]:
    script = ScriptDirectory.from_config(_configuration())
    known = frozenset(step.revision for step in script.walk_revisions())
    return frozenset(script.get_heads()), known
