"""The body of one measured point, as it comes in."""

from collections.abc import Mapping
from typing import Annotated, Any, Literal, Self

from pydantic import Discriminator, Field, PrivateAttr, Tag, ValidationInfo, field_validator, model_validator
from pydantic.functional_validators import AfterValidator
from pydantic_core import PydanticCustomError

from faultloop.exchange.fields import WHOLE, Closed, Label, Measured, number
from faultloop.exchange.overcurrent import OvercurrentDevice, listed
from faultloop.exchange.own_rules import OwnRules, own_rules
from faultloop.exchange.unearthed import InsulatedSupply, SeparatedSupply
from faultloop.protection.residual import residual_table
from faultloop.rules.loader import LoadedRules, resolve, shipped


class Point(Closed):
    """The socket-outlet, bench outlet or equipment terminal."""

    id: Label | None = None
    label: Label
    location: Label | None = None


class MeansOfEarthing(Closed):
    """What is believed of the means of earthing, and why."""

    evidence: Label
    state: Literal["proven", "doubtful", "lost"] | None = None


class Supply(Closed):
    """The supply as seen from the point."""

    earthing: Literal["TN-S", "TN-C-S", "TN-C", "TT", "IT", "separated"] | None = None
    current: Literal["ac", "dc"] = "ac"
    nominal_voltage_to_earth_v: (
        Annotated[float, number("V", most=1000, positive=True, description="Nominal, not measured")] | None
    ) = None
    nominal_voltage_between_lines_v: (
        Annotated[float, number("V", most=1000, positive=True, description="Nominal between lines")] | None
    ) = None
    frequency_hz: Annotated[float, number("Hz", most=1000, description="Frequency")] | None = None
    phases: Annotated[int, Field(strict=True, ge=1, le=3), WHOLE] | None = None
    means_of_earthing: MeansOfEarthing | None = None
    declared_prospective_current_ka: (
        Annotated[float, number("kA", most=1000, description="Declared by the distributor")] | None
    ) = None
    source: Label | None = None


class Conductor(Closed):
    """One conductor of the circuit."""

    material: Literal["copper", "aluminium", "steel"]
    insulation: Literal["pvc", "xlpe", "epr", "rubber", "mineral", "bare"]
    area_mm2: Annotated[float, number("mm2", most=1000, positive=True, description="Cross-sectional area")]


class Circuit(Closed):
    """The circuit that feeds the point."""

    role: Literal["final", "distribution"] | None = None
    feeds: Literal["socket-outlets", "fixed-equipment", "mobile-equipment-outdoors"] | None = None
    rated_current_a: Annotated[float, number("A", most=6300, positive=True, description="Rated current")] | None = None
    arrangement: Literal["radial", "ring"] = "radial"
    users: Literal["ordinary", "instructed", "skilled"] = "ordinary"
    designated_equipment: Annotated[bool, Field(strict=True)] = False
    line_conductor: Conductor | None = None
    neutral_conductor: Conductor | None = None
    protective_conductor: Conductor | None = None
    length_m: Annotated[float, number("m", most=100_000, description="Route length")] | None = None
    current_carrying_capacity_a: (
        Annotated[float, number("A", most=6300, description="Iz of the live conductors")] | None
    ) = None


class Board(Closed):
    """Readings and ratings at the board that holds the device."""

    line_neutral_loop_impedance_ohm: Measured | None = None
    earth_fault_loop_impedance_ohm: Measured | None = None
    prospective_current_ka: Measured | None = None
    assembly_conditional_rating_ka: Annotated[float, number("kA", most=1000, description="Rating")] | None = None


def _residual_rated(value: float) -> float:
    return listed(value, residual_table().rated_residual_operating_currents_ma)


class ResidualCurrentDevice(Closed):
    """A residual current device, or the residual part of a combined device."""

    residual_type: Literal["AC", "A", "F", "B"] | None = None
    rated_residual_operating_current_ma: Annotated[
        float,
        AfterValidator(_residual_rated),
        Field(
            strict=True,
            allow_inf_nan=False,
            description="Rated residual operating current IΔn [mA]",
            json_schema_extra=lambda schema: schema.update(enum=residual_table().rated_residual_operating_currents_ma),
        ),
    ]
    delay: Literal["general", "selective", "time-delayed"] = "general"
    delay_ms: Annotated[float, number("ms", most=10_000, description="Set delay")] | None = None


class OperatingTimes(Closed):
    """Operating times in millisecond by multiple of IΔn, the slower half-cycle of each."""

    half: Measured | None = Field(default=None, alias="0.5")
    one: Measured | None = Field(default=None, alias="1")
    two: Measured | None = Field(default=None, alias="2")
    five: Measured | None = Field(default=None, alias="5")
    loads_connected: Annotated[bool, Field(strict=True)] | None = None


class Readings(Closed):
    """What was measured."""

    earth_fault_loop_impedance_ohm: Measured | None = None
    external_earth_fault_loop_impedance_ohm: Measured | None = None
    line_neutral_loop_impedance_ohm: Measured | None = None
    line_line_loop_impedance_ohm: Measured | None = None
    line_plus_protective_resistance_ohm: Measured | None = None
    protective_conductor_resistance_ohm: Measured | None = None
    earth_electrode_resistance_ohm: Measured | None = None
    insulation_resistance_megohm: Measured | None = None
    residual_operating_time_ms: OperatingTimes | None = None
    residual_operating_current_ma: Measured | None = None
    standing_leakage_ma: Measured | None = None
    voltage_v: Measured | None = None
    voltage_neutral_to_earth_v: Measured | None = None
    voltage_l1_to_earth_v: Measured | None = None
    voltage_l2_to_earth_v: Measured | None = None
    contact_current_l1_ma: Measured | None = None
    contact_current_l2_ma: Measured | None = None
    winding_insulation_resistance_megohm: Measured | None = None
    bonding_resistance_ohm: Measured | None = None
    first_fault_current_ma: Measured | None = None
    monitored_insulation_kohm: Measured | None = None
    polarity: Literal["correct", "reversed", "not-tested"] | None = None


class Policy(Closed):
    """How the decision is made; what is left out comes from the rule set."""

    temperature: Literal["split", "two-thirds", "four-fifths", "none"] | None = None
    decision: Literal["guarded", "simple"] | None = None
    coverage: Annotated[float, number("1", least=0.5, most=0.9999, description="Coverage probability")] | None = None


UNKNOWN_RULES = "unknown_rules"


def _unknown_rules() -> PydanticCustomError:
    return PydanticCustomError(UNKNOWN_RULES, "no such rule set; expected one of " + ", ".join(rule_names()))


def _known_rules(name: str) -> str:
    if resolve(name) is None:
        raise _unknown_rules()
    return name


def rule_names() -> list[str]:
    """Names under which a rule set may be asked for: with edition, or the newest without."""
    return sorted({loaded.rules.id for loaded in shipped().values()} | set(shipped()))


RulesName = Annotated[
    str,
    AfterValidator(_known_rules),
    Field(
        max_length=60,
        description="Rule set, with an edition or its newest",
        json_schema_extra=lambda schema: schema.update(enum=rule_names()),
    ),
]


def _kind_of_rules(told: Any) -> str:
    return "name" if isinstance(told, str) else "set"


NamedRules = Annotated[
    str,
    Field(
        max_length=60,
        description="A published set, with an edition or its newest, or a stored set of your own as id:edition",
        examples=["bs-7671", "iec-60364:2017"],
        # Refused by naming the known ones, not by its form.
        json_schema_extra={"pattern": r"^[a-z0-9]+(-[a-z0-9]+)*(:[0-9]{4}(-[0-9]{2})?)?$"},
    ),
]
RulesChoice = Annotated[
    Annotated[NamedRules, Tag("name")] | Annotated[OwnRules, Tag("set")],
    Discriminator(_kind_of_rules),
    Field(description="By which rules: the name of a set, or a set of the caller's own"),
]


class Ruled(Closed):
    """A request that is judged by a rule set, under a policy."""

    rules: RulesChoice = "iec-60364"
    policy: Policy = Field(default_factory=Policy)
    _rule_set: LoadedRules = PrivateAttr()

    @property
    def rule_set(self) -> LoadedRules:
        """The rule set that was chosen, resolved."""
        # Read where it is kept: the framework's own look-up of a private name takes longer than the rest of it.
        kept: LoadedRules = (self.__pydantic_private__ or {})["_rule_set"]
        return kept

    def under(self, rules: LoadedRules) -> Self:
        """The same request, to be judged by the very set that its choice stood for before."""
        same = self.model_copy()
        same._rule_set = rules
        return same

    @field_validator("rules")
    @classmethod
    def _resolve(cls, told: Any, info: ValidationInfo) -> Any:
        """Refuse a set that is not known or cannot be judged by, at its place."""
        _resolved(told, info.context)
        return told

    @model_validator(mode="after")
    def _keep(self, info: ValidationInfo) -> Self:
        self._rule_set = _resolved(self.rules, info.context)
        return self


class AssessmentRequest(Ruled):
    """One measured point: what protects it, what was read, by which rules it is to be judged."""

    point: Point
    supply: Supply = Field(default_factory=Supply)
    separated_supply: SeparatedSupply | None = None
    it_supply: InsulatedSupply | None = None
    circuit: Circuit = Field(default_factory=Circuit)
    board: Board | None = None
    overcurrent_device: OvercurrentDevice | None = None
    upstream_overcurrent_devices: Annotated[list[OvercurrentDevice], Field(max_length=8)] = Field(default_factory=list)
    residual_current_device: ResidualCurrentDevice | None = None
    upstream_residual_current_devices: Annotated[list[ResidualCurrentDevice], Field(max_length=8)] = Field(
        default_factory=list
    )
    readings: Readings = Field(default_factory=Readings)


def _resolved(told: Any, stored: Mapping[str, LoadedRules] | None) -> LoadedRules:
    """The set that is named, or said; the context of a validation holds callers' stored sets by name."""
    if not isinstance(told, str):
        return own_rules(told)
    found = stored[told] if stored is not None and told in stored else resolve(told)
    if found is None:
        raise _unknown_rules()
    return found
