"""The body of a bench: supplies, the items that they feed, links between them, and a link that is planned."""

import re
from typing import Annotated, Any, Literal, Self

from pydantic import (
    BaseModel,
    BeforeValidator,
    Discriminator,
    Field,
    Tag,
    ValidationError,
    ValidatorFunctionWrapHandler,
    WrapValidator,
    model_validator,
)
from pydantic_core import InitErrorDetails, PydanticCustomError

from faultloop.exchange.fields import WHOLE, Closed, Label, number
from faultloop.exchange.overcurrent import OvercurrentDevice
from faultloop.exchange.requests import ResidualCurrentDevice, Ruled
from faultloop.exchange.unearthed import CorePair

MOST_SUPPLIES, MOST_ITEMS, MOST_LINKS, MOST_CONTACTS = 6, 16, 16, 40
# Every choice of their ends is solved.
MOST_OPEN_RESISTANCES = 4
_ID = re.compile(r"[A-Za-z0-9][A-Za-z0-9_-]{0,39}")


def _named(value: Any) -> Any:
    if isinstance(value, str) and not _ID.fullmatch(value):
        told = "an id is 1 to 40 letters, digits, - and _, with no space, and begins with a letter or digit"
        raise PydanticCustomError("id_form", told)
    return value


def _object(shown: str) -> BeforeValidator:
    """Of a text where an object is expected the object is shown."""

    def checked(value: Any) -> Any:
        if isinstance(value, str):
            raise PydanticCustomError("object_expected", "an object is expected, such as {shown}", {"shown": shown})
        return value

    return BeforeValidator(checked)


def _kind_known(value: Any, handler: ValidatorFunctionWrapHandler) -> Any:
    """A kind of supply that there is not is told at its own place."""
    if not isinstance(value, dict) or value.get("kind") in ("separated", "earthed", "battery"):
        return handler(value)
    wrong = PydanticCustomError("unknown_kind", "a supply is separated, earthed or battery")
    fault = InitErrorDetails(type=wrong if "kind" in value else "missing", loc=("kind",), input=value.get("kind"))
    raise ValidationError.from_exception_data("BenchSupply", [fault])


Id = Annotated[
    str,
    BeforeValidator(_named),
    Field(
        min_length=1,
        max_length=40,
        pattern=r"^[A-Za-z0-9][A-Za-z0-9_-]*$",
        description="Short name of the part: letters, digits, - and _; links and contacts refer to it",
    ),
]
NodeName = Annotated[
    str,
    Field(
        min_length=1,
        max_length=60,
        pattern=r"^[A-Za-z0-9][A-Za-z0-9_-]*(\.[A-Za-z0-9_]+)?$",
        description="earth, or a part and its terminal: supply.L1, .L2, .bonding; item.case, .signal_ground, .L1, .L2",
        examples=["scope.signal_ground"],
    ),
]


def _shape(value: Any) -> str:
    return "range" if isinstance(value, (dict, BaseModel)) else "number"


class Ends(Closed):
    """Two ends between which a value lies."""

    @model_validator(mode="after")
    def _in_order(self) -> Self:
        told = self.model_dump()
        if told["least"] > told["greatest"]:
            raise ValueError("least must not exceed greatest")
        return self


class NanofaradEnds(Ends):
    """Two ends between which a capacitance lies."""

    least: Annotated[float, number("nF", most=1e6, description="Least")]
    greatest: Annotated[float, number("nF", most=1e6, description="Greatest")]


class OhmEnds(Ends):
    """Two ends between which a resistance lies."""

    least: Annotated[float, number("ohm", most=1e12, description="Least")]
    greatest: Annotated[float, number("ohm", most=1e12, description="Greatest")]


class PercentEnds(Ends):
    """Two ends between which a short-circuit voltage lies."""

    least: Annotated[float, number("%", least=0.5, most=100, description="Least")]
    greatest: Annotated[float, number("%", least=0.5, most=100, description="Greatest")]


# A number, or two ends between which it lies; left out it is unknown, and never zero.
Nanofarads = Annotated[
    Annotated[Annotated[float, number("nF", most=1e6, description="Capacitance")], Tag("number")]
    | Annotated[NanofaradEnds, Tag("range")],
    Discriminator(_shape),
]
Ohms = Annotated[
    Annotated[Annotated[float, number("ohm", most=1e12, description="Resistance")], Tag("number")]
    | Annotated[OhmEnds, Tag("range")],
    Discriminator(_shape),
]
Percent = Annotated[
    Annotated[Annotated[float, number("%", least=0.5, most=100, description="Short-circuit voltage")], Tag("number")]
    | Annotated[PercentEnds, Tag("range")],
    Discriminator(_shape),
]


Breaker = Annotated[
    OvercurrentDevice,
    _object('{"kind": "miniature-circuit-breaker", "characteristic": "B", "rated_current_a": 16}'),
]
Residual = Annotated[
    ResidualCurrentDevice, _object('{"residual_type": "A", "rated_residual_operating_current_ma": 30}')
]


class BenchTransformer(Closed):
    """The separating transformer."""

    rated_power_va: Annotated[float, number("VA", most=1e6, positive=True, description="Rated power")] | None = None
    short_circuit_voltage_percent: Percent | None = Field(default=None, description="Short-circuit voltage u_k [%]")
    interwinding_capacitance_nf: Nanofarads | None = Field(
        default=None, description="Between primary and secondary; with a screen, secondary to screen [nF]"
    )
    screen: Annotated[bool, Field(strict=True, description="An earthed screen lies between the windings")] = False


Volts = Annotated[float, number("V", most=1000, positive=True, description="Nominal, not measured")]


class SeparatedBenchSupply(Closed):
    """A supply behind a separating transformer."""

    id: Id
    kind: Literal["separated"]
    nominal_voltage_between_lines_v: Volts
    transformer: Annotated[BenchTransformer, _object('{"rated_power_va": 500}')] = Field(
        default_factory=BenchTransformer
    )
    cable_capacitance_to_earth_nf: Nanofarads | None = Field(default=None, description="Each pole to earth [nF]")
    overcurrent_device: Breaker | None = None
    bonding: Literal["none", "non-earthed", "earthed"] = Field(
        description="What the outlets' earth contacts are joined to: nothing, each other only, or earth"
    )
    fed_from: Id | None = Field(default=None, description="Earthed supply that feeds the primary")
    outlets: Annotated[int, Field(strict=True, ge=1, le=1000), WHOLE] | None = None
    bonding_conductor: CorePair | None = Field(default=None, description="Between the outlets' earth contacts")
    wiring_length_m: (
        Annotated[float, number("m", most=100_000, description="Of all wiring and leads together")] | None
    ) = None


class EarthedBenchSupply(Closed):
    """Ordinary earthed outlets."""

    id: Id
    kind: Literal["earthed"]
    nominal_voltage_to_earth_v: Volts
    overcurrent_device: Breaker | None = None
    residual_current_device: Residual | None = None
    earth_fault_loop_impedance_ohm: Ohms | None = Field(default=None, description="Zs at the outlets [ohm]")


class BatteryBenchSupply(Closed):
    """A battery: it floats; direct current is not solved here."""

    id: Id
    kind: Literal["battery"]
    nominal_voltage_v: Volts | None = None


BenchSupply = Annotated[
    SeparatedBenchSupply | EarthedBenchSupply | BatteryBenchSupply,
    Field(discriminator="kind"),
    WrapValidator(_kind_known),
]


class SignalGround(Closed):
    """How signal ground stands to the case of class I, else to earth."""

    kind: Literal["earthed", "floating", "resistance"]
    resistance_ohm: Ohms | None = Field(default=None, description="Where the kind is resistance [ohm]")


class StoredCharge(Closed):
    """A capacitor that stays charged after everything is unplugged."""

    capacitance_uf: Annotated[float, number("uF", most=1e7, positive=True, description="Capacitance")]
    voltage_v: Annotated[float, number("V", most=1e5, positive=True, description="Voltage when charged")]
    discharge_resistance_ohm: (
        Annotated[float, number("ohm", most=1e12, positive=True, description="Resistor across it")] | None
    ) = None


class BenchItem(Closed):
    """An item of equipment at the bench."""

    id: Id
    label: Label | None = None
    fed_by: Id
    protection_class: Literal["I", "II", "III"]
    role: Literal["under-test", "instrument"] | None = Field(
        default=None, description="Whether its live parts are worked at; else told by links, charge, chassis"
    )
    filter_capacitance_nf: Nanofarads | None = Field(
        default=None, description="Each line conductor to its case, or to signal ground for class II [nF]"
    )
    signal_ground: SignalGround | None = None
    live_chassis: Literal["none", "L1", "L2"] | None = Field(
        default=None,
        description="Pole that its chassis is joined to, or none; left out it is unknown for an item worked at,"
        " unless its chassis is the case of class I",
    )
    chassis_resistance_ohm: Ohms | None = Field(default=None, description="Between chassis and pole [ohm]")
    load_resistance_ohm: Ohms | None = Field(default=None, description="What it draws, as a resistance [ohm]")
    lead: CorePair | None = Field(default=None, description="Its flexible lead, for a second fault")
    stored: StoredCharge | None = None


LinkKind = Literal["probe-clip", "usb", "screen", "antistatic-mat", "bonding-lead", "other"]


class BenchLink(Closed):
    """Something conductive between two nodes."""

    id: Id
    kind: LinkKind
    one: NodeName = Field(alias="from")
    other: NodeName = Field(alias="to")
    resistance_ohm: Ohms | None = Field(default=None, description="Left out, as usual for its kind, or asked for [ohm]")


class BenchContact(Closed):
    """Two nodes that somebody may touch at once; earth is what everybody stands on."""

    one: NodeName = Field(alias="from")
    other: NodeName = Field(alias="to")


class BenchRequest(Ruled):
    """A bench as it stands now, and the link that somebody is about to make."""

    label: Label
    location: Label | None = None
    frequency_hz: Annotated[float, number("Hz", most=1000, positive=True, description="Frequency")] = 50.0
    supplies: Annotated[list[BenchSupply], Field(min_length=1, max_length=MOST_SUPPLIES)]
    items: Annotated[list[BenchItem], Field(max_length=MOST_ITEMS)] = Field(default_factory=list)
    links: Annotated[list[BenchLink], Field(max_length=MOST_LINKS)] = Field(default_factory=list)
    planned_link: BenchLink | None = None
    contacts: Annotated[list[BenchContact], Field(max_length=MOST_CONTACTS)] = Field(default_factory=list)
