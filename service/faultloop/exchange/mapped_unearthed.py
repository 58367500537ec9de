"""A separated or an IT supply in words -> numbers and choices of its row, with what had to be assumed."""

import math

import numpy as np

from faultloop.assessment.codes import (
    Bound,
    Choice,
    Distributed,
    EarthContacts,
    ExposedParts,
    Method,
    Monitor,
    Number,
    Reading,
    Reference,
    Windings,
)
from faultloop.electrical.body import discharge_time
from faultloop.exchange import requests as rq
from faultloop.exchange import unearthed as ue
from faultloop.exchange.fields import Reading as Reading_
from faultloop.exchange.mapped import Mapped
from faultloop.exchange.mapped_readings import PLAIN_READINGS
from faultloop.rules.conductors import ohm_per_km

# Taken where none is stated: the higher of the usual two drives the greater current.
HIGHER_USUAL_HZ = 60.0
_CONTACTS, _WINDINGS = EarthContacts.codes(), {"basic": Windings.BASIC, "double-or-reinforced": Windings.REINFORCED}
_EXPOSED = ExposedParts.codes()
_UNEARTHED = ("separated", "IT")
_SEPARATED_READINGS = (
    "voltage_l1_to_earth_v",
    "voltage_l2_to_earth_v",
    "contact_current_l1_ma",
    "contact_current_l2_ma",
    "winding_insulation_resistance_megohm",
    "bonding_resistance_ohm",
    "line_line_loop_impedance_ohm",
)
_INSULATED_READINGS = ("first_fault_current_ma", "monitored_insulation_kohm")
# What a separated supply takes of the readings that other supplies ask for.
_ON_SEPARATED = ("insulation_resistance_megohm", "earth_fault_loop_impedance_ohm")
# What shows that a supply floats must have been read of it.
_TO_BE_READ = (*_SEPARATED_READINGS, "insulation_resistance_megohm")


def put_unearthed(point: Mapped, request: rq.AssessmentRequest) -> None:
    """Put what belongs to a supply whose live parts are not earthed."""
    supply, row = request.supply, point.row
    row.choices[Choice.PHASES] = supply.phases or 0
    if supply.earthing not in _UNEARTHED:
        return
    row.numbers[Number.FREQUENCY_HZ] = supply.frequency_hz or HIGHER_USUAL_HZ
    if not supply.frequency_hz:
        point.assumptions.append("frequency")
    if supply.earthing == "separated":
        _put_separated(point, request)
    else:
        _put_loop_linked(point, request)
        _put_insulated(point, request.it_supply or ue.InsulatedSupply())


def unused_unearthed(request: rq.AssessmentRequest) -> list[str]:
    """What was given of another kind of supply than there is, and on which nothing is decided."""
    earthing, readings = request.supply.earthing, request.readings
    stated = [name for name in sorted(readings.model_fields_set) if getattr(readings, name) is not None]
    other: tuple[str, ...] = _SEPARATED_READINGS if earthing != "separated" else ()
    other += _INSULATED_READINGS if earthing != "IT" else ()
    found = [f"readings.{name}" for name in stated if name in other]
    if earthing == "separated":
        used = (*_SEPARATED_READINGS, *_ON_SEPARATED)
        found = [f"readings.{name}" for name in stated if name not in used]
        found += ["upstream_overcurrent_devices"] if request.upstream_overcurrent_devices else []
        found += ["residual_current_device"] if request.residual_current_device is not None else []
        found += ["upstream_residual_current_devices"] if request.upstream_residual_current_devices else []
        found += ["supply.nominal_voltage_to_earth_v"] if request.supply.nominal_voltage_to_earth_v is not None else []
    found += ["separated_supply"] if earthing != "separated" and request.separated_supply is not None else []
    found += ["it_supply"] if earthing != "IT" and request.it_supply is not None else []
    found += ["supply.frequency_hz"] if earthing not in _UNEARTHED and request.supply.frequency_hz is not None else []
    return found


def _put_separated(point: Mapped, request: rq.AssessmentRequest) -> None:
    body, numbers, choices = request.separated_supply or ue.SeparatedSupply(), point.row.numbers, point.row.choices
    _leave_out_what_nobody_read(point, request)
    _put_transformer(point, body.transformer)
    if request.supply.nominal_voltage_between_lines_v is None and body.transformer.secondary_voltage_v is not None:
        numbers[Number.BETWEEN_LINES_V] = body.transformer.secondary_voltage_v
    _put_dielectric(point, body.transformer)
    if request.circuit.length_m is None:
        _put_wiring(point, body)
    _put(numbers, Number.OUTLETS, body.outlets)
    _put(numbers, Number.WIRING_M, body.wiring_length_m)
    if body.earth_contacts is not None:
        choices[Choice.EARTH_CONTACTS] = _CONTACTS[body.earth_contacts]
    if body.pole_earthed:
        choices[Choice.REFERENCE] = Reference.EARTHED
    if body.bonding_conductor is not None and not point.row.bound[Reading.BONDING]:
        _put_bonding(point, body.bonding_conductor)
    if body.items is not None:
        _put_items(point, body.items)


def _leave_out_what_nobody_read(point: Mapped, request: rq.AssessmentRequest) -> None:
    """A value that was declared or calculated shows nothing of the bench as it stands; it is named as not used."""
    for name in _TO_BE_READ:
        told = getattr(request.readings, name)
        if isinstance(told, Reading_) and told.method in ("declared", "calculated"):
            point.row.value[PLAIN_READINGS[name]], point.row.bound[PLAIN_READINGS[name]] = math.nan, Bound.MISSING
            point.unused.append(f"readings.{name}")


def _put_wiring(point: Mapped, body: ue.SeparatedSupply) -> None:
    """What of the whole length no lead and no bonding accounts for is wiring; none of either is taken as none."""
    leads = [item.lead.length_m for item in body.items or [] if item.lead is not None]
    bonding = [body.bonding_conductor.length_m] if body.bonding_conductor is not None else []
    rest = (body.wiring_length_m or 0.0) - math.fsum([*leads, *bonding])
    if rest > 0.0:
        point.row.numbers[Number.LENGTH_M] = rest
    else:
        point.assumptions.append("wiring-none")


def _put_transformer(point: Mapped, body: ue.Transformer) -> None:
    numbers, limits = point.row.numbers, point.rules.rules.separation
    _put(numbers, Number.TRANSFORMER_VA, body.rated_power_va)
    _put(numbers, Number.PRIMARY_V, body.primary_voltage_v)
    _put(numbers, Number.SECONDARY_V, body.secondary_voltage_v)
    _put(numbers, Number.SHORT_CIRCUIT_PERCENT, body.short_circuit_voltage_percent)
    _put(numbers, Number.SHORT_CIRCUIT_TOLERANCE, body.short_circuit_tolerance_percent)
    _put(numbers, Number.LOAD_LOSS_W, body.load_loss_w)
    _put(numbers, Number.DIELECTRIC_V, body.dielectric_test_v)
    _put(numbers, Number.INTERWINDING_NF, body.interwinding_capacitance_nf)
    if body.winding_insulation is not None:
        point.row.choices[Choice.WINDINGS] = _WINDINGS[body.winding_insulation]
    if body.rated_power_va is not None and not point.row.bound[Reading.ORIGIN_LINE_NEUTRAL]:
        point.assumptions.append("network-ahead")
    if body.short_circuit_voltage_percent is not None and body.short_circuit_tolerance_percent is None:
        point.assumptions.append("short-circuit-tolerance")
    if body.interwinding_capacitance_nf is None:
        known = limits.interwinding_screened if body.screen else limits.interwinding
        numbers[Number.INTERWINDING_NF] = known.value
        point.assumptions.append("interwinding")


def _put_dielectric(point: Mapped, body: ue.Transformer) -> None:
    """What the windings are asked to have been tested with, by their insulation and the higher of their voltages."""
    numbers, rows = point.row.numbers, point.rules.rules.separation.dielectric
    working = np.fmax(numbers[Number.BETWEEN_LINES_V], numbers[Number.PRIMARY_V])
    # Insulation of an unknown kind is held to the higher figures, as its resistance is.
    kind = body.winding_insulation or "double-or-reinforced"
    mine = [row for row in rows if row.insulation == kind]
    held = [row.value for row in mine if row.above_v < working <= row.to_v]
    numbers[Number.DIELECTRIC_ASKED_V] = max(held, default=math.nan)
    if body.dielectric_test_v is not None and not held:
        point.unused.append("separated_supply.transformer.dielectric_test_v")


def _put(numbers: list[float], which: int, value: float | None) -> None:
    if value is not None:
        numbers[which] = value


def _core_ohm(body: ue.CorePair) -> float:
    """Resistance of one core; nan for an area that is not tabled."""
    known = ohm_per_km(body.material, body.area_mm2)
    return math.nan if known is None else known * body.length_m / 1000.0


def _put_bonding(point: Mapped, body: ue.CorePair) -> None:
    """The bonding conductor by its length, as uncertain as lengths are."""
    row, at = point.row, Reading.BONDING
    if math.isnan(core := _core_ohm(body)):
        return
    row.value[at], row.bound[at], row.method[at] = core, Bound.EXACT, Method.CALCULATED
    row.percent[at], row.constant[at] = point.rules.rules.expected.length_uncertainty.value, 0.0


def _put_items(point: Mapped, items: list[ue.Item]) -> None:
    """How many items, how many with exposed parts, and of these the filters, the two longest leads, what is charged."""
    numbers = point.row.numbers
    exposed = [item for item in items if item.protection_class in (None, "I")]
    numbers[Number.ITEMS], numbers[Number.CLASS_I_ITEMS] = len(items), len(exposed)
    filters = [item.filter_capacitance_nf for item in exposed if item.filter_capacitance_nf is not None]
    numbers[Number.FILTERS_LEAST_NF] = math.fsum(filters)
    if len(filters) == len(exposed):
        numbers[Number.FILTERS_NF] = numbers[Number.FILTERS_LEAST_NF]
    leads = [math.nan if item.lead is None else 2.0 * _core_ohm(item.lead) for item in exposed]
    known = sorted(ohm for ohm in leads if not math.isnan(ohm))
    # Two faults may lie in the two items of the longest leads; one that is not known makes the loop no shorter.
    numbers[Number.LEADS_LEAST_OHM] = math.fsum(known[-2:])
    if len(known) == len(leads):
        numbers[Number.LEADS_OHM] = numbers[Number.LEADS_LEAST_OHM]
    _put_stored(point, [item.stored for item in items if item.stored is not None])


def _put_stored(point: Mapped, stored: list[ue.Stored]) -> None:
    """Of what stays charged the slowest to fall, of those alike the one of most energy; a trifle does not count."""
    limits, numbers = point.rules.rules.separation, point.row.numbers
    let_stand = limits.charge_let_stand.value
    charged = [of for of in stored if of.capacitance_uf * of.voltage_v > let_stand] or stored
    if charged:
        to_v = limits.discharged.value
        worst = max(charged, key=lambda of: (_discharge(of, to_v), of.capacitance_uf * of.voltage_v**2, repr(of)))
        numbers[Number.STORED_UF], numbers[Number.STORED_V] = worst.capacitance_uf, worst.voltage_v
        _put(numbers, Number.DISCHARGE_OHM, worst.discharge_resistance_ohm)


def _discharge(stored: ue.Stored, to_v: float) -> float:
    """Time to discharge, without an end where nothing is known to discharge it."""
    resistance = math.inf if stored.discharge_resistance_ohm is None else stored.discharge_resistance_ohm
    values = (np.array([of]) for of in (stored.capacitance_uf, stored.voltage_v, resistance, to_v))
    return float(discharge_time(*values)[0])


def _put_loop_linked(point: Mapped, request: rq.AssessmentRequest) -> None:
    """Whether it is told in which state the loop was read: on an IT supply the source is linked to earth for it."""
    read = request.readings.earth_fault_loop_impedance_ohm
    point.row.choices[Choice.LOOP_LINKED] = int(isinstance(read, Reading_) and read.state is not None)


def _put_insulated(point: Mapped, body: ue.InsulatedSupply) -> None:
    numbers, choices = point.row.numbers, point.row.choices
    _put(numbers, Number.LINE_EARTH_NF, body.line_capacitance_to_earth_nf)
    if body.neutral_distributed is not None:
        choices[Choice.NEUTRAL_DISTRIBUTED] = Distributed.YES if body.neutral_distributed else Distributed.NO
    if body.exposed_parts is not None:
        choices[Choice.EXPOSED_PARTS] = _EXPOSED[body.exposed_parts]
    if (monitor := body.insulation_monitor) is not None:
        tested = Monitor.TESTED if monitor.alarm_tested else Monitor.UNTESTED
        choices[Choice.MONITOR] = tested if monitor.fitted else Monitor.ABSENT
        _put(numbers, Number.SET_POINT_KOHM, monitor.set_point_kohm)
