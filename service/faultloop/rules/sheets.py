"""The shape of a rule-set file: what may stand in it, and in which unit."""

from typing import Annotated, Literal

from pydantic import AfterValidator, Field

from faultloop.rules.strict import Parameter, Sheet, Sourced, Text


def _in_unit(unit: str) -> AfterValidator:
    def check(parameter: Parameter) -> Parameter:
        if parameter.unit != unit:
            raise ValueError(f"unit must be {unit!r}, not {parameter.unit!r}")
        return parameter

    return AfterValidator(check)


Ratio = Annotated[Parameter, _in_unit("1")]
Volts = Annotated[Parameter, _in_unit("V")]
VoltMetres = Annotated[Parameter, _in_unit("V*m")]
Metres = Annotated[Parameter, _in_unit("m")]
Nanofarads = Annotated[Parameter, _in_unit("nF")]
NanofaradsPerMetre = Annotated[Parameter, _in_unit("nF/m")]
Amperes = Annotated[Parameter, _in_unit("A")]
Milliamperes = Annotated[Parameter, _in_unit("mA")]
Seconds = Annotated[Parameter, _in_unit("s")]
Ohms = Annotated[Parameter, _in_unit("ohm")]
Megohms = Annotated[Parameter, _in_unit("Mohm")]
Percent = Annotated[Parameter, _in_unit("%")]
PerKelvin = Annotated[Parameter, _in_unit("1/K")]
Celsius = Annotated[Parameter, _in_unit("degC")]


class VoltageFactors(Sheet):
    """Factors on the nominal voltage for the least and the greatest current."""

    least: Ratio
    greatest: Ratio


class TimeRow(Sourced):
    """One cell of the table of disconnection times of final circuits."""

    earthing: Literal["TN", "TT"]
    current: Literal["ac", "dc"]
    above_v: Annotated[float, Field(description="Nominal voltage to earth above this [V]")]
    to_v: Annotated[float, Field(description="and up to this; open above without it [V]")] | None = None
    value: Annotated[float, Field(description="Required disconnection time [s]")]
    unit: Literal["s"]


class Disconnection(Sheet):
    """Required disconnection times and the circuits that the table is for."""

    table: list[TimeRow] = Field(min_length=1)
    distribution_tn: Seconds
    distribution_tt: Seconds
    scope_socket_outlets: Amperes
    scope_fixed_equipment: Amperes
    touch_voltage_ac: Volts


class NominalVoltages(Sourced):
    """Nominal voltages to earth that pick a row of the table; any other is asked about."""

    values: list[float] = Field(min_length=1)
    unit: Literal["V"]


class AdditionalProtection(Sheet):
    """Which outlets need a sensitive residual device, and whom the rule exempts."""

    residual_current: Milliamperes
    socket_outlets_to: Amperes
    mobile_outdoors_to: Amperes
    exempt: list[Literal["instructed", "skilled", "designated-equipment"]]
    exempt_clause: Text


class Electrode(Sheet):
    """How far an earth-electrode reading is trusted."""

    stability_threshold: Ohms
    season_factor: Ratio
    source_allowance: Ohms
    touch_limit_on_tn: Ratio


class Instrument(Sheet):
    """Uncertainty assumed (k = 2) where the request states no instrument."""

    percent: Percent
    constant: Ohms


class Instruments(Sheet):
    """Uncertainty by method of measurement."""

    high_current: Instrument
    no_trip: Instrument
    continuity: Instrument
    electrode: Instrument
    residual_time: Percent
    insulation: Percent
    voltage: Percent
    no_trip_uplift: Ohms


class Temperature(Sheet):
    """Constants of the temperature correction."""

    alpha_20: PerKelvin
    test_default: Celsius
    two_thirds: Ratio
    four_fifths: Ratio


class Policy(Sheet):
    """The decision made where the request asks for none."""

    temperature: Literal["split", "two-thirds", "four-fifths", "none"]
    decision: Literal["guarded", "simple"]
    coverage: Annotated[float, Field(ge=0.5, le=0.9999, description="Coverage probability [1]")]


class Expected(Sheet):
    """What a reading is held against before it is believed."""

    tn_loop: Ohms
    length_uncertainty: Percent
    length_constant: Ohms
    least_plausible: Ohms
    greatest_insulation: Megohms
    least_time: Seconds
    greatest_time: Seconds
    voltage_tolerance: Percent
    voltage_to_earth_asked_above: Volts
    neutral_earth_voltage: Volts


class Urgency(Sheet):
    """Constants that order work; they permit nothing."""

    body_dry: Ohms
    body_wet: Ohms
    sustained_current: Milliamperes


class DielectricRow(Sourced):
    """One cell of the table of test voltages between windings, by insulation and working voltage."""

    insulation: Literal["basic", "double-or-reinforced"]
    above_v: Annotated[float, Field(description="Working voltage above this [V]")]
    to_v: Annotated[float, Field(description="and up to this [V]")]
    value: Annotated[float, Field(gt=0, le=20_000, description="Test voltage asked for [V]")]
    unit: Literal["V"]


class Separation(Sheet):
    """Limits of supplies whose live parts are not earthed, and what is taken where it is not stated."""

    voltage: Volts
    wiring_length: Metres
    voltage_length: VoltMetres
    contact_unfelt: Milliamperes
    contact_most: Milliamperes
    contact_referenced: Milliamperes
    pole_at_earth: Percent
    short_circuit_tolerance: Percent
    capacitance_tolerance: Percent
    interwinding: Nanofarads
    interwinding_screened: Nanofarads
    wiring_capacitance: NanofaradsPerMetre
    winding_basic: Megohms
    winding_reinforced: Megohms
    dielectric: list[DielectricRow] = Field(min_length=1)
    discharged: Volts
    discharge_time: Seconds


class OperatingCurrent(Sourced):
    """A current that the rule set itself prints for a device and a time."""

    devices: list[Text] = Field(min_length=1)
    time_s: Annotated[float, Field(gt=0, description="Time within which the device then operates [s]")]
    value: Annotated[float, Field(gt=0, description="Least operating current, in the unit beside it [unit]")]
    unit: Literal["A", "x In"]


class RuleSet(Sheet):
    """One edition of one set of wiring rules."""

    id: Annotated[str, Field(pattern=r"^[a-z0-9]+(-[a-z0-9]+)*$")]
    edition: Annotated[str, Field(pattern=r"^[0-9]{4}(-[0-9]{2})?$")]
    title: Text
    editions_named: Text
    cautions: list[Text] = Field(default_factory=list)
    voltage_factor: VoltageFactors
    nominal_voltage_to_earth: NominalVoltages
    disconnection: Disconnection
    additional_protection: AdditionalProtection
    electrode: Electrode
    instruments: Instruments
    temperature: Temperature
    policy: Policy
    expected: Expected
    urgency: Urgency
    separation: Separation
    insulation: Megohms
    clauses: dict[str, Text]
    operating_current: list[OperatingCurrent] = Field(default_factory=list)

    @property
    def key(self) -> str:
        """Identifier with edition, as stored with every verdict."""
        return f"{self.id}:{self.edition}"
