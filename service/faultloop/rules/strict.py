"""Strict reading of the project's TOML tables: every refusal names the file and the key."""

import datetime as dt
import tomllib
from importlib.resources.abc import Traversable
from pathlib import Path
from typing import Annotated, Literal, TypeVar

from pydantic import BaseModel, ConfigDict, Field, ValidationError

Unit = Literal[
    "1",
    "V",
    "V*m",
    "A",
    "mA",
    "kA",
    "s",
    "h",
    "ohm",
    "Mohm",
    "ohm/km",
    "m",
    "nF",
    "nF/m",
    "1/K",
    "degC",
    "%",
    "mm2",
    "A/mm2",
    "A*s^0.5/mm2",
    "A2*s",
]
Sourcing = Literal["seen", "memory", "common-practice", "assumption"]
Text = Annotated[str, Field(min_length=1)]


class DataFileError(ValueError):
    """A data file that may not be used; the message names the file, the key and what is wrong."""


class Sheet(BaseModel):
    """One table of a rule set: unknown keys are refused, nothing is converted."""

    model_config = ConfigDict(extra="forbid", strict=True, frozen=True, allow_inf_nan=False)


class Sourced(Sheet):
    """Where a value comes from and when it was last looked at."""

    clause: Text
    source: Text
    sourcing: Sourcing
    checked: dt.date


class Parameter(Sourced):
    """One value that a standard or a rule set sets."""

    value: Annotated[float, Field(description="In the unit that stands beside it [unit]")]
    unit: Unit


SheetT = TypeVar("SheetT", bound=Sheet)


def read_table(path: Traversable | Path) -> dict[str, object]:
    """Read a TOML file; a duplicate key or a broken line is refused, naming the file."""
    try:
        return tomllib.loads(path.read_text(encoding="utf-8"))
    except (tomllib.TOMLDecodeError, UnicodeDecodeError) as error:
        raise DataFileError(f"{path.name}: not readable as TOML: {error}") from error


def read_sheet(kind: type[SheetT], table: dict[str, object], name: str) -> SheetT:
    """Check a table against its sheet; the first fault is told with file and key."""
    try:
        return kind.model_validate(table)
    except ValidationError as error:
        first = error.errors(include_url=False, include_input=False)[0]
        key = ".".join(str(part) for part in first["loc"]) or "(whole file)"
        told = {"extra_forbidden": "unknown key", "missing": "missing"}.get(first["type"], first["msg"])
        raise DataFileError(f"{name}: {key}: {told}") from error


def refuse_duplicates(name: str, key: str, rows: list[tuple[object, ...]]) -> None:
    """Refuse two rows of one table that speak of the same thing."""
    seen: set[tuple[object, ...]] = set()
    for row in rows:
        if row in seen:
            raise DataFileError(f"{name}: {key}: duplicate row for {' '.join(str(part) for part in row)}")
        seen.add(row)
