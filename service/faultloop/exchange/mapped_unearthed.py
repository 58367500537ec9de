"""A separated or an IT supply in words -> numbers and choices of its row, with what had to be assumed."""

import math

import numpy as np

from faultloop.assessment.points import (
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
from faultloop.exchange.mapped import Mapped
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
    elif request.it_supply is not None:
        _put_insulated(point, request.it_supply)


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
        found += ["residual_current_device"] if request.residual_current_device is not None else []
        found += ["upstream_residual_current_devices"] if request.upstream_residual_current_devices else []
        found += ["supply.nominal_voltage_to_earth_v"] if request.supply.nominal_voltage_to_earth_v is not None else []
    found += ["separated_supply"] if earthing != "separated" and request.separated_supply is not None else []
    found += ["it_supply"] if earthing != "IT" and request.it_supply is not None else []
    found += ["supply.frequency_hz"] if earthing not in _UNEARTHED and request.supply.frequency_hz is not None else []
    return found


def _put_separated(point: Mapped, request: rq.AssessmentRequest) -> None:
    body, numbers, choices = request.separated_supply or ue.SeparatedSupply(), point.row.numbers, point.row.choices
    _put_transformer(point, body.transformer)
    if request.supply.nominal_voltage_between_lines_v is None and body.transformer.secondary_voltage_v is not None:
        numbers[Number.BETWEEN_LINES_V] = body.transformer.secondary_voltage_v
    _put_dielectric(point, body.transformer)
    if request.circuit.length_m is None:
        point.assumptions.append("wiring-none")
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
    mine = [row for row in rows if row.insulation == body.winding_insulation]
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
    filters = [math.nan if item.filter_capacitance_nf is None else item.filter_capacitance_nf for item in exposed]
    numbers[Number.FILTERS_NF] = math.fsum(filters)
    leads = [math.nan if item.lead is None else 2.0 * _core_ohm(item.lead) for item in exposed]
    known = sorted(ohm for ohm in leads if not math.isnan(ohm))
    # Two faults may lie in the two items of the longest leads; one that is not known makes the loop no shorter.
    numbers[Number.LEADS_LEAST_OHM] = math.fsum(known[-2:])
    if len(known) == len(leads):
        numbers[Number.LEADS_OHM] = numbers[Number.LEADS_LEAST_OHM]
    if charged := [item.stored for item in items if item.stored is not None]:
        to_v = point.rules.rules.separation.discharged.value
        slowest = max(charged, key=lambda stored: (_discharge(stored, to_v), stored.voltage_v, stored.capacitance_uf))
        numbers[Number.STORED_UF], numbers[Number.STORED_V] = slowest.capacitance_uf, slowest.voltage_v
        _put(numbers, Number.DISCHARGE_OHM, slowest.discharge_resistance_ohm)


def _discharge(stored: ue.Stored, to_v: float) -> float:
    """Time to discharge, without an end where nothing is known to discharge it."""
    resistance = math.inf if stored.discharge_resistance_ohm is None else stored.discharge_resistance_ohm
    values = (np.array([of]) for of in (stored.capacitance_uf, stored.voltage_v, resistance, to_v))
    return float(discharge_time(*values)[0])


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
