"""The tables, and the plain values that go in and come out in their place.

Table classes describe storage only: `table=True` does not validate, so the CHECK constraints are the
last wall, and rows leave this room as frozen dataclasses.
"""

from dataclasses import dataclass, fields
from datetime import datetime
from typing import Any, ClassVar

from sqlalchemy import BigInteger, CheckConstraint, Index, Integer, MetaData, RowMapping, Table
from sqlmodel import Field, SQLModel

VERDICTS = ("fail", "undetermined", "marginal", "pass-with-conditions", "pass")
FORMATS = ("csv", "json")
URGENCIES = ("stop-use", "urgent", "planned", "note", "none")

NAMING = {
    "ix": "ix_%(table_name)s_%(column_0_N_name)s",
    "uq": "uq_%(table_name)s_%(column_0_N_name)s",
    "ck": "ck_%(table_name)s_%(constraint_name)s",
    "fk": "fk_%(table_name)s_%(column_0_N_name)s_%(referred_table_name)s",
    "pk": "pk_%(table_name)s",
}


class Base(SQLModel):
    """What every table shares: one metadata, in which each constraint has a predictable name."""

    metadata: ClassVar[MetaData] = MetaData(naming_convention=NAMING)


def _one_of(column: str, words: tuple[str, ...]) -> CheckConstraint:
    """Give the constraint that a column holds one of these words."""
    listed = ", ".join(f"'{word}'" for word in words)
    return CheckConstraint(f"{column} IN ({listed})", name=column)


class StoredAssessment(Base, table=True):
    """One assessment as it was asked and answered; rows are added and never changed."""

    __tablename__ = "assessment"
    __table_args__: ClassVar[Any] = (
        _one_of("verdict", VERDICTS),
        _one_of("urgency", URGENCIES),
        Index(None, "verdict", "sequence"),
        Index(None, "urgency", "sequence"),
        {"sqlite_autoincrement": True},
    )

    # SQLite numbers rows by itself only in a column declared INTEGER
    sequence: int | None = Field(default=None, primary_key=True, sa_type=BigInteger().with_variant(Integer(), "sqlite"))
    id: str = Field(max_length=36, unique=True)
    input_digest: str = Field(max_length=64)
    verdict: str = Field(max_length=20)
    urgency: str = Field(max_length=20)
    rules: str
    label: str | None = None
    engine: str
    rules_digest: str = Field(max_length=64)
    devices_digest: str = Field(max_length=64)
    stored_at: datetime
    # the long columns stand last, so that SQLite lists the short ones without reading through them
    request: bytes
    answer: bytes


class StoredBatch(Base, table=True):
    """One batch as it was sent and answered; rows are added and never changed. The bytes are compressed."""

    __tablename__ = "batch"
    __table_args__: ClassVar[Any] = (
        _one_of("format", FORMATS),
        CheckConstraint("results + held + refused = rows", name="counts"),
        {"sqlite_autoincrement": True},
    )

    sequence: int | None = Field(default=None, primary_key=True, sa_type=BigInteger().with_variant(Integer(), "sqlite"))
    id: str = Field(max_length=36, unique=True)
    input_digest: str = Field(max_length=64)
    format: str = Field(max_length=4)
    rows: int
    results: int
    held: int
    refused: int
    engine: str
    devices_digest: str = Field(max_length=64)
    stored_at: datetime
    parameters: bytes
    content: bytes
    answer: bytes


BATCH: Table = StoredBatch.__table__  # type: ignore[attr-defined]
ASSESSMENT: Table = StoredAssessment.__table__  # type: ignore[attr-defined]


class RuleSetContent(Base, table=True):
    """What a caller's set of rules says, by its digest: what was judged by it can be computed again."""

    __tablename__ = "rule_set"

    digest: str = Field(max_length=64, primary_key=True)
    name: str = Field(max_length=60, index=True)
    stored_at: datetime
    content: bytes


class RuleSetName(Base, table=True):
    """The names under which callers stored their sets; a name stands for one content for good."""

    __tablename__ = "rule_set_name"

    name: str = Field(max_length=60, primary_key=True)
    digest: str = Field(max_length=64, foreign_key="rule_set.digest")
    stored_at: datetime


RULE_SET: Table = RuleSetContent.__table__  # type: ignore[attr-defined]
RULE_SET_NAME: Table = RuleSetName.__table__  # type: ignore[attr-defined]


@dataclass(frozen=True, slots=True)
class Record:
    """What there is to remember of one assessment."""

    id: str
    input_digest: str
    verdict: str
    urgency: str
    rules: str
    label: str | None
    engine: str
    rules_digest: str
    devices_digest: str
    request: bytes
    answer: bytes


RECORD_FIELDS = tuple(field.name for field in fields(Record))


@dataclass(frozen=True, slots=True)
class Stored:
    """A record that the database has confirmed, with its place in the order and its time (UTC)."""

    record: Record
    sequence: int
    stored_at: datetime


def stored(row: RowMapping) -> Stored:
    """Turn a row of the assessment table into the value that leaves this room."""
    return Stored(Record(**{name: row[name] for name in RECORD_FIELDS}), row["sequence"], row["stored_at"])


@dataclass(frozen=True, slots=True)
class Listed:
    """One line of a list of assessments: all but the bytes."""

    sequence: int
    id: str
    input_digest: str
    verdict: str
    urgency: str
    rules: str
    label: str | None
    engine: str
    rules_digest: str
    devices_digest: str
    stored_at: datetime


LISTED_FIELDS = tuple(field.name for field in fields(Listed))


@dataclass(frozen=True, slots=True)
class BatchRecord:
    """What there is to remember of one batch; the bytes are as they were sent and answered."""

    id: str
    input_digest: str
    format: str
    rows: int
    results: int
    held: int
    refused: int
    engine: str
    devices_digest: str
    parameters: bytes
    content: bytes
    answer: bytes


@dataclass(frozen=True, slots=True)
class KeptBatch:
    """A batch that the database has confirmed, and its time (UTC)."""

    record: BatchRecord
    stored_at: datetime
