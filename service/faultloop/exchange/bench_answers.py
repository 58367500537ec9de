"""The body of an answer about a bench; what is unknown is absent."""

from typing import Literal

from pydantic import Field

from faultloop.exchange.answers import (
    Answer,
    Assumption,
    CautionBody,
    Condition,
    Finding,
    IntervalBody,
    NotApplicable,
    NotExamined,
    PolicyBody,
    Provenance,
    Text,
    UrgencyWord,
    VerdictWord,
)
from faultloop.exchange.bench_networks import LinkKind

ChangeWord = Literal[
    "remove-link",
    "differential-probe",
    "unplug",
    "move-to-earthed",
    "move-to-own",
    "lift-bonding",
    "move-instruments",
]
TiedWord = Literal["no", "perhaps", "yes"]


class PathStep(Answer):
    """One step on the way to earth: what it leads through, whose it is, and the node behind it."""

    through: Text
    of: Text
    to: Text


class NodeState(Answer):
    """How one node stands to earth: tied, floating (coupled at most), or apart from everything."""

    standing: Literal["tied", "floating", "apart"]
    path: Text
    steps: list[PathStep]
    path_impedance_ohm: float | None = None
    potential_v: IntervalBody | None = None


class BenchNode(Answer):
    """A node of the bench, and its other names."""

    node: Text
    same_as: list[Text]
    as_found: NodeState
    with_planned_link: NodeState | None = None


class ContactState(Answer):
    """What a body at a contact carries, the voltage there before, and the line of the rule set that it stays within."""

    current_ma: IntervalBody
    voltage_v: IntervalBody | None = None
    within: Literal["unfelt", "limit", "let-go", "none"]
    explanation: Text = Field(description="Arithmetic at the nominal values")


class ContactBody(Answer):
    """A contact of one hand, with earth, or of two."""

    kind: Literal[
        "pole-to-earth", "part-to-earth", "pole-to-pole", "part-to-part", "part-to-pole", "across-supplies", "asked"
    ]
    hands: Literal["one", "two"]
    one: Text = Field(alias="from")
    other: Text = Field(alias="to")
    text: Text
    as_found: ContactState
    with_planned_link: ContactState | None = None


class SeenBody(Answer):
    """What one protective device sees of the planned link."""

    supply: Text
    sees: Literal["residual-current", "current"]
    device: Text | None = None
    current_a: IntervalBody
    outcome: Literal["stays", "may-operate", "operates", "absent"]
    text: Text


class PlannedLinkBody(Answer):
    """The planned link before it is made."""

    id: Text
    kind: LinkKind
    one: Text = Field(alias="from")
    other: Text = Field(alias="to")
    current_ma: IntervalBody
    ties: TiedWord = Field(description="Whether the bench is tied to earth once it is made")
    devices: list[SeenBody]
    text: Text


class WorstContact(Answer):
    """The contact of one hand that carries most."""

    one: Text = Field(alias="from")
    other: Text = Field(alias="to")


class BenchState(Answer):
    """One state of the bench, judged by the same checks."""

    verdict: VerdictWord
    urgency: UrgencyWord
    floats: bool = Field(description="Whether nothing ties it to earth, whatever is not known")
    tied: TiedWord
    worst_contact: WorstContact
    worst_contact_current_ma: IntervalBody
    live_parts: list[Text] = Field(
        description="Parts of items that nobody works at, which are joined to a pole, or may be, and not earthed"
    )


class ChangedState(BenchState):
    """The bench with one thing changed."""

    rank: int
    change: ChangeWord
    subject: Text | None = None
    helps: bool = Field(
        description="Whether it floats then, a contact of one hand is within the limit, no instrument becomes live, and"
        " the verdict gets no worse; what fails even so the text says"
    )
    text: Text


class BenchFinding(Finding):
    """One check at one separated supply."""

    supply: Text


class StoredBody(Answer):
    """What an item keeps when everything is unplugged."""

    item: Text
    energy_j: float
    charge_c: float
    discharge_time_s: float | None = None
    discharged_to_v: float
    text: Text


class BenchProvenance(Provenance):
    """By what was decided, with the table of what is taken where nothing is stated."""

    bench_data_digest: Text


class BenchNetwork(Answer):
    """What is true of a bench now, what a planned link would make of it, and every single change that may help."""

    label: Text
    location: Text | None = None
    judged: Literal["as-found", "with-planned-link"]
    verdict: VerdictWord
    urgency: UrgencyWord
    as_found: BenchState
    with_planned_link: BenchState | None = None
    planned_link: PlannedLinkBody | None = None
    nodes: list[BenchNode]
    contacts: list[ContactBody]
    lines_ma: dict[Literal["unfelt", "limit", "let-go"], float] = Field(
        description="Lines of the rule set that contact currents are held against [mA]"
    )
    touch_voltage_limit_v: float = Field(description="Above it a node that is tied is drawn as dangerous [V]")
    contacts_left_out: int = Field(description="Pairs of accessible parts that were not looked at, being too many")
    changes_as_found: list[ChangedState] = Field(description="Of the bench as it stands, without the planned link")
    changes: list[ChangedState] = Field(description="Of the bench as judged, the best first; none is left out")
    stored: list[StoredBody]
    findings: list[BenchFinding]
    conditions: list[Condition]
    not_examined: list[NotExamined]
    not_applicable: list[NotApplicable]
    assumptions: list[Assumption]
    cautions: list[CautionBody]
    policy: PolicyBody
    provenance: BenchProvenance
