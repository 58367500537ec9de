"""Bodies of the resources beside assessments: devices, curves, limits, rule sets, lists, replays."""

from typing import Annotated, Any, Literal

from pydantic import BaseModel, ConfigDict, Field

from faultloop.exchange.answers import Answer, CautionBody, Provenance, Text, UrgencyWord, VerdictWord
from faultloop.exchange.fields import Closed
from faultloop.exchange.requests import RulesName

Designation = Annotated[str, Field(min_length=1, max_length=40, description="Trade shorthand, such as B32 or 30 mA")]


class LimitQuery(Closed):
    """What the greatest loop impedance is asked for."""

    device: Designation
    rules: RulesName = "iec-60364"
    time_s: Annotated[float, Field(gt=0, le=3600, description="Required disconnection time [s]")] = 0.4
    policy: Literal["split", "two-thirds", "four-fifths", "none"] = "none"
    nominal_voltage_to_earth_v: Annotated[float, Field(gt=0, le=1000, description="Nominal voltage to earth [V]")] = (
        230.0
    )


class CurveQuery(Closed):
    """Under which rule set a device is looked at, and in which form."""

    rules: RulesName = "iec-60364"
    format: Literal["json", "svg"] | None = Field(default=None, description="Goes before the Accept header")


class DrawingQuery(Closed):
    """In which form a stored assessment is drawn."""

    format: Literal["svg"] | None = Field(default=None, description="Goes before the Accept header")


class ListQuery(Closed):
    """Which page of stored assessments is wanted."""

    page_size: Annotated[int, Field(ge=1, description="Greatest number of items; more than 200 gives 200")] = 50
    cursor: Annotated[str, Field(max_length=200, pattern=r"^[A-Za-z0-9_-]+$")] | None = None
    verdict: VerdictWord | None = None
    urgency: UrgencyWord | None = None


class DataProvenance(Answer):
    """By which data a value was found."""

    engine: Text
    rules: Text
    rules_digest: Text
    devices_digest: Text


class LimitBody(Answer):
    """Greatest loop impedance; absent where no current guarantees the time."""

    device: Text
    time_s: float
    greatest_loop_impedance_ohm: float | None = None
    least_operating_current_a: float | None = None
    explanation: Text
    clause: Text
    cautions: list[CautionBody]
    provenance: DataProvenance


class DeviceBody(Answer):
    """One device held here."""

    designation: Text
    kind: Literal["miniature-circuit-breaker", "fuse", "residual-current-device"]
    standard: Text
    rated_current_a: float | None = None
    rated_residual_operating_current_ma: float | None = None
    delay: Literal["general", "selective"] | None = None


class DeviceList(Answer):
    """Devices whose bands are held here."""

    items: list[DeviceBody]


class CurvePoint(Answer):
    """A point of a band's edge."""

    current_a: float
    time_s: float


class Curve(Answer):
    """Guaranteed band as steps: the slow edge it keeps at and above, the fast edge at and below each current."""

    designation: Text
    rules: Text
    slow: list[CurvePoint]
    fast: list[CurvePoint]
    provenance: DataProvenance


class RuleSetBody(Answer):
    """A rule set held here."""

    rules: Text
    id: Text
    edition: Text
    title: Text
    editions_named: Text
    newest: bool = Field(description="Whether the id alone means this edition")
    published: bool = Field(description="False for a caller's own set")
    digest: Text


class RuleSetListQuery(Closed):
    """Which page of rule sets is wanted."""

    page_size: Annotated[int, Field(ge=1, le=200, description="Greatest number of callers' own sets")] = 50
    cursor: Annotated[str, Field(max_length=60, pattern=r"^[a-z0-9:-]+$")] | None = None


class RuleSetList(Answer):
    """Rule sets held here: published ones first, then callers' own by name."""

    items: list[RuleSetBody]
    next: Text | None = Field(default=None, description="Address of the next page; absent on the last")


class RuleSetDetail(RuleSetBody):
    """A rule set with every value, its clause and its source."""

    values: dict[str, Any]


class RuleSetDifference(Answer):
    """A value in which a set differs from its base; absent where one of them says nothing."""

    pointer: Text
    base: Any = None
    own: Any = None


class RuleSetValidation(Answer):
    """A caller's set as it would be judged by."""

    valid: Literal[True]
    rules: Text
    id: Text
    edition: Text
    title: Text
    extends: Text | None = None
    digest: Text
    values: dict[str, Any]
    differences: list[RuleSetDifference]


class ListedBody(Answer):
    """One stored assessment in a list."""

    id: Text
    label: Text | None = None
    verdict: VerdictWord
    urgency: UrgencyWord
    rules: Text
    input_digest: Text
    stored_at: Text


class AssessmentList(Answer):
    """A page of stored assessments, newest first."""

    items: list[ListedBody]
    next: Text | None = Field(default=None, description="Address of the next page; absent on the last")


class Difference(BaseModel):
    """A place at which the stored and the recomputed answer differ."""

    model_config = ConfigDict(extra="forbid")
    pointer: Text
    stored: Any = None
    recomputed: Any = None


class ReplayBody(Answer):
    """Whether a stored assessment computes to the same bytes today."""

    id: Text
    identical: bool
    stored: Provenance
    recomputed: Provenance | None = None
    differences: list[Difference]


class Health(Answer):
    """Whether the service lives, or is ready."""

    status: Literal["live", "ready", "not-ready"]


class ProblemItem(Answer):
    """One bad field."""

    pointer: Text
    code: Text
    detail: Text


class Problem(Answer):
    """An error, as RFC 9457 says it."""

    type: Text
    title: Text
    status: int
    detail: Text
    instance: Text
    errors: list[ProblemItem] | None = None
