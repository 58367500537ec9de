"""The body of an answer; an unknown quantity is absent, an open end is null and says so."""

from typing import Annotated, Literal

from pydantic import BaseModel, ConfigDict, Field

VerdictWord = Literal["fail", "undetermined", "marginal", "pass-with-conditions", "pass"]
UrgencyWord = Literal["stop-use", "urgent", "planned", "note", "none"]
Text = Annotated[str, Field(max_length=4000)]


class Answer(BaseModel):
    """Base of answer bodies."""

    model_config = ConfigDict(extra="forbid")


class IntervalBody(Answer):
    """Least and greatest value; the end named in `open` is null."""

    least: float | None
    greatest: float | None
    open: Literal["least", "greatest", "both"] | None = None


class TimeBody(IntervalBody):
    """Disconnection time and the device that gives it."""

    by: Literal["overcurrent-device", "residual-current-device", "none"]


class Finding(Answer):
    """One check at one point."""

    check: Text
    title: Text
    verdict: VerdictWord
    quantity: Text
    value: float | None = None
    interval: IntervalBody | None = None
    limit: float | None = None
    unit: Text
    margin_percent: float | None = None
    conformance_probability: float | None = None
    group: Text | None = None
    counts: bool
    clause: Text
    reason: Text
    explanation: Text
    settled_by: Text | None = None
    caution: Text | None = None


class Quantities(Answer):
    """What was computed on the way, with voltage factors, temperature and band in it."""

    prospective_earth_fault_current_a: IntervalBody | None = None
    prospective_short_circuit_current_a: IntervalBody | None = None
    disconnection_time_s: TimeBody | None = None
    required_disconnection_time_s: float | None = None
    touch_voltage_v: IntervalBody | None = None
    earth_fault_loop_impedance_ohm: IntervalBody | None = None
    heated_earth_fault_loop_impedance_ohm: IntervalBody | None = None
    temperature_factor: float | None = None
    residual_current_multiple: float | None = None
    transformer_ratio: float | None = None
    rated_secondary_current_a: float | None = None
    rated_primary_current_a: float | None = None
    regulation_percent: float | None = None
    source_impedance_ohm: IntervalBody | None = None
    line_line_fault_current_a: IntervalBody | None = None
    reflected_fault_current_a: IntervalBody | None = None
    second_fault_current_a: IntervalBody | None = None
    contact_current_ma: IntervalBody | None = None
    first_fault_current_ma: IntervalBody | None = None
    pole_capacitance_to_earth_nf: float | None = None
    stored_energy_j: float | None = None
    discharge_time_s: float | None = None


class Condition(Answer):
    """A condition on which the verdict rests, and who sees to it."""

    condition: Text
    text: Text
    owner: Text


class NotExamined(Answer):
    """What was not looked at, and what would be needed; never a pass."""

    subject: Text
    reason: Text
    text: Text
    settled_by: Text | None = None


class NotApplicable(Answer):
    """A check that does not concern this point."""

    check: Text
    text: Text


class CautionBody(Answer):
    """A caution by id and text."""

    caution: Text
    text: Text


class Assumption(Answer):
    """What had to be assumed because it was not stated."""

    assumption: Text
    text: Text


class PolicyBody(Answer):
    """The policy by which was decided."""

    temperature: Literal["split", "two-thirds", "four-fifths", "none"]
    decision: Literal["guarded", "simple"]
    coverage: float


class Provenance(Answer):
    """By what was decided: enough to compute it again."""

    engine: Text
    rules: Text
    rules_digest: Text
    devices_digest: Text
    language: Annotated[str, Field(max_length=35, description="Language of the words (BCP 47)")]
    texts_digest: Text
    input_digest: Text


class Assessment(Answer):
    """The verdict on one point."""

    verdict: VerdictWord
    urgency: UrgencyWord
    findings: list[Finding]
    quantities: Quantities
    conditions: list[Condition]
    not_examined: list[NotExamined]
    not_applicable: list[NotApplicable]
    assumptions: list[Assumption]
    cautions: list[CautionBody]
    policy: PolicyBody
    provenance: Provenance
