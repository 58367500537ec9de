"""Bodies of batches: what is sent, what is answered in compact rows, one row in full."""

from typing import Annotated, Any, Literal

from pydantic import Field

from faultloop.exchange.answers import Answer, Assessment, Text, UrgencyWord, VerdictWord
from faultloop.exchange.fields import Closed
from faultloop.exchange.tables import MOST_ROWS

CompactFinding = Annotated[
    list[str | float | None],
    Field(
        min_length=4,
        max_length=4,
        description="verdict, value, limit, reason id; verdict null: not examined, for that reason",
    ),
]
Number = Annotated[int, Field(ge=1, description="Row as a spreadsheet shows it (the heading is 1); of JSON from 1")]


class BatchRequest(Closed):
    """Points to be judged as one batch."""

    defaults: dict[str, Any] = Field(
        default_factory=dict,
        description="Parts of an assessment request that stand for whatever a row leaves out",
    )
    rows: Annotated[list[Any], Field(max_length=MOST_ROWS)] = Field(
        description="Each an assessment request (see AssessmentRequest); a reading may also be the text that an "
        'instrument printed, such as ">2000", "<0.05", "OL" or "---"'
    )


class BatchQuery(Closed):
    """How a file is to be read; bodies in JSON say it themselves."""

    default: Annotated[list[str], Field(max_length=60)] = Field(
        default_factory=list, description="column=value for a column that the file lacks, such as earthing=TN-S"
    )
    decimal: Literal["point", "comma"] | None = Field(
        default=None,
        description="Decimal mark; unstated: a point in comma-separated files, else either where it is unambiguous",
    )
    ignore: Annotated[list[str], Field(max_length=60)] = Field(
        default_factory=list, description="Heading of a column that holds nothing to be judged"
    )


class WorkshopQuery(Closed):
    """What the workshop view is asked besides."""

    population: Annotated[int, Field(ge=1, le=100_000)] | None = Field(
        default=None, description="Number of points that there are, tested or not"
    )


class Counts(Answer):
    """Counts that add up: rows = results + held + refused."""

    rows: int
    results: int
    held: int
    refused: int


class BatchResult(Answer):
    """One judged row; `findings` stand in the order of `checks`, null where a check does not apply."""

    row: Number
    point_id: Text | None = None
    verdict: VerdictWord
    urgency: UrgencyWord
    decided_by: Text | None = Field(default=None, description="The counted check that gives the verdict")
    findings: list[CompactFinding | None]


class QuestionBody(Answer):
    """What must be answered before a row can be judged."""

    column: Text | None = None
    pointer: Text | None = None
    raw: str = Field(description="The text as it came")
    question: Text


class HeldRow(Answer):
    """A row that waits for an answer; until then it is undetermined."""

    row: Number
    point_id: Text | None = None
    verdict: Literal["undetermined"]
    urgency: UrgencyWord
    questions: list[QuestionBody]


class RefusedItem(Answer):
    """One bad field of a refused row."""

    column: Text | None = None
    pointer: Text | None = None
    code: Text
    detail: Text


class RefusedRow(Answer):
    """A row that cannot be read as a point; the others are judged all the same."""

    row: Number
    point_id: Text | None = None
    verdict: Literal["undetermined"]
    urgency: UrgencyWord
    errors: list[RefusedItem]


class RepeatedPoint(Answer):
    """A point that several rows name: all are kept, and the least favourable governs."""

    point_id: Text
    rows: list[int]
    governing_row: int


class ReadAs(Answer):
    """How the body was read."""

    format: Literal["csv", "json"]
    separator: Text | None = None
    decimal: Literal["point", "comma", "either"] | None = None
    blank_lines: int = 0
    ignored_columns: list[Text] = Field(default_factory=list)
    defaults: dict[str, Any]


class RulesAsked(Answer):
    """The edition that a rule set's name stood for."""

    asked: Text
    rules: Text
    rules_digest: Text


class BatchProvenance(Answer):
    """By what a batch was decided."""

    engine: Text
    rules: list[RulesAsked]
    devices_digest: Text
    input_digest: Text


class Batch(Answer):
    """A batch judged: compact rows, and counts that reconcile."""

    id: Text
    counts: Counts
    verdicts: dict[VerdictWord, int]
    urgencies: dict[UrgencyWord, int]
    reading: ReadAs
    repeated_points: list[RepeatedPoint]
    checks: list[Text]
    results: list[BatchResult]
    held: list[HeldRow]
    refused: list[RefusedRow]
    provenance: BatchProvenance


class BatchRow(Answer):
    """One row of a stored batch in full, computed again under the edition that was stored."""

    row: Number
    status: Literal["judged", "held", "refused"]
    raw: Any = Field(description="The row as it came")
    stored: BatchResult | HeldRow | RefusedRow
    assessment: Assessment | None = None
    identical: bool = Field(description="Whether the row computes to what was stored")
    changed: list[Literal["engine", "rules", "devices"]] = Field(
        description="What has changed since the batch was judged"
    )
