"""Bodies of supplies whose live parts are not earthed: a separated supply with what hangs on it, an IT supply."""

from typing import Annotated, Literal

from pydantic import Field

from faultloop.exchange.fields import WHOLE, Closed, Label, number

Flag = Annotated[bool, Field(strict=True)]


class Transformer(Closed):
    """The separating transformer, by its plate."""

    label: Label | None = None
    rated_power_va: Annotated[float, number("VA", most=1e7, positive=True, description="Rated power")] | None = None
    primary_voltage_v: (
        Annotated[float, number("V", most=1000, positive=True, description="Rated voltage of the primary")] | None
    ) = None
    secondary_voltage_v: (
        Annotated[float, number("V", most=1000, positive=True, description="Rated voltage of the secondary")] | None
    ) = None
    short_circuit_voltage_percent: (
        Annotated[float, number("%", most=100, positive=True, description="Short-circuit voltage u_k")] | None
    ) = None
    short_circuit_tolerance_percent: (
        Annotated[float, number("%", most=100, description="Tolerance of u_k where the maker states one")] | None
    ) = None
    load_loss_w: Annotated[float, number("W", most=1e6, description="Load loss at rated current")] | None = None
    winding_insulation: Literal["basic", "double-or-reinforced"] | None = Field(
        default=None, description="Insulation between the windings, by the plate or the maker"
    )
    dielectric_test_v: (
        Annotated[float, number("V", most=100_000, positive=True, description="Test voltage between windings")] | None
    ) = None
    interwinding_capacitance_nf: (
        Annotated[float, number("nF", most=10_000, description="Capacitance between the windings")] | None
    ) = None
    screen: Flag | None = Field(default=None, description="Whether an earthed screen lies between the windings")


class CorePair(Closed):
    """A flexible lead or a bonding conductor: its length and the area of a core."""

    length_m: Annotated[float, number("m", most=10_000, description="Length")]
    area_mm2: Annotated[float, number("mm2", most=1000, positive=True, description="Area of one core")]
    material: Literal["copper", "aluminium"] = "copper"


class Stored(Closed):
    """A capacitor that stays charged after switching off."""

    capacitance_uf: Annotated[float, number("uF", most=1e7, positive=True, description="Capacitance")]
    voltage_v: Annotated[float, number("V", most=100_000, description="Voltage to which it is charged")]
    discharge_resistance_ohm: (
        Annotated[float, number("ohm", most=1e12, positive=True, description="Resistance that discharges it")] | None
    ) = None


class Item(Closed):
    """One item of equipment that the separated supply feeds."""

    label: Label | None = None
    protection_class: Literal["I", "II", "III"] | None = None
    filter_capacitance_nf: (
        Annotated[float, number("nF", most=100_000, description="From each line conductor to the case")] | None
    ) = None
    lead: CorePair | None = None
    stored: Stored | None = None


class SeparatedSupply(Closed):
    """One separating transformer, its outlets, and what is plugged in now."""

    transformer: Transformer = Field(default_factory=Transformer)
    outlets: Annotated[int, Field(strict=True, ge=1, le=1000), WHOLE] | None = None
    items: Annotated[list[Item], Field(max_length=200)] | None = Field(
        default=None, description="What is plugged in; leave it out where that is not known"
    )
    earth_contacts: Literal["unconnected", "bonded", "earthed"] | None = Field(
        default=None, description="What the outlets' earth contacts are joined to: nothing, each other, or earth"
    )
    bonding_conductor: CorePair | None = None
    pole_earthed: Flag | None = Field(
        default=None, description="Whether a live part is known to be joined to earth, by a link or a clip"
    )
    wiring_length_m: (
        Annotated[float, number("m", most=100_000, description="Of all wiring and leads together")] | None
    ) = None


class InsulationMonitor(Closed):
    """The device that tells of a first fault."""

    fitted: Flag
    set_point_kohm: Annotated[float, number("kohm", most=1e6, positive=True, description="Alarm below")] | None = None
    alarm_tested: Flag | None = None


class InsulatedSupply(Closed):
    """What an IT supply needs to be judged beside its readings."""

    line_capacitance_to_earth_nf: (
        Annotated[float, number("nF", most=1e6, description="Of each line, with all that is connected")] | None
    ) = None
    neutral_distributed: Flag | None = None
    exposed_parts: Literal["together", "separately"] | None = Field(
        default=None, description="Whether exposed parts share one protective conductor or have electrodes of their own"
    )
    insulation_monitor: InsulationMonitor | None = None
