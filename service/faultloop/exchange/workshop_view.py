"""The workshop view of a batch as a body: what to do first, what to ask, what was not looked at."""

from typing import Any, Literal

from pydantic import Field

from faultloop.exchange.answers import Answer, CautionBody, Text, UrgencyWord, VerdictWord
from faultloop.exchange.batches import BatchProvenance, Counts


class WorkItem(Answer):
    """One point to be dealt with: its governing row, what decides, and who acts."""

    row: int
    point_id: Text | None = None
    label: Text | None = None
    location: Text | None = None
    verdict: VerdictWord
    urgency: UrgencyWord
    check: Text | None = None
    title: Text | None = None
    explanation: Text
    who: Text
    touch_voltage_v: float | None = Field(default=None, description="Greatest touch voltage during a fault [V]")
    also: Text | None = None


class QuestionGroup(Answer):
    """One question and the rows that its answer releases."""

    question: Text
    who: Text
    where: Text | None = Field(default=None, description="Column, or JSON Pointer into the row")
    rows: list[int]
    raw: list[str] = Field(default_factory=list, description="The texts as they came, each once")


class ConditionGroup(Answer):
    """A condition on which verdicts rest, its owner, and the rows that rest on it."""

    condition: Text
    text: Text
    owner: Text
    rows: list[int]


class WrittenGroup(Answer):
    """Values over several rows that look written rather than read; a note that decides nothing."""

    reason: Text
    text: Text
    rows: list[int]


class NotTested(Answer):
    """What was not examined, for what reason, at how many of the judged rows."""

    subject: Text
    reason: Text
    text: Text
    rows: int


class Sample(Answer):
    """What the sample does and does not show."""

    decided: int = Field(description="Different points with a verdict that says met or failed")
    failed: int
    population: int | None = None
    greatest_failing: int | None = Field(
        default=None, description="Largest number of failing points in the population that the sample allows at 95 %"
    )
    text: list[Text]


class Workshop(Answer):
    """A batch as a list of work."""

    id: Text | None = None
    stored_at: Text | None = None
    counts: Counts
    points: int
    verdicts: dict[VerdictWord, int]
    defaults: dict[str, Any]
    stop_use: list[WorkItem]
    fix: list[WorkItem]
    questions: list[QuestionGroup]
    conditions: list[ConditionGroup]
    written: list[WrittenGroup]
    not_judged: Text | None = None
    not_tested: list[NotTested]
    sample: Sample
    cautions: list[CautionBody]
    changed: list[Literal["engine", "rules", "devices"]]
    provenance: BatchProvenance
