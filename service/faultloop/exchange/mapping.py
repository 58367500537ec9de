"""A request in words -> one row of points: its supply, devices, circuit, and by another file its readings."""

from collections.abc import Sequence
from functools import lru_cache

import numpy as np

from faultloop.assessment.codes import (
    Choice,
    Current,
    Decision,
    Earthing,
    Feeds,
    LetThrough,
    MeansOfEarthing,
    Number,
    Role,
    TemperaturePolicy,
    Users,
)
from faultloop.assessment.points import NO_DEVICE, Row
from faultloop.assessment.tables import Tables, tables
from faultloop.electrical.measurement import coverage_scale
from faultloop.exchange import overcurrent as oc
from faultloop.exchange import requests as rq
from faultloop.exchange.mapped import Mapped
from faultloop.exchange.mapped_readings import put_readings, unused
from faultloop.exchange.mapped_unearthed import put_unearthed, unused_unearthed
from faultloop.exchange.own_rules import is_own
from faultloop.protection import designations as ds
from faultloop.protection.band import Band
from faultloop.protection.catalogue import Described, bands_under, catalogue
from faultloop.protection.curves import OwnCurve, own_band
from faultloop.protection.fuses import fuse_families
from faultloop.protection.let_through import breaker_energy, combined_to_ka
from faultloop.protection.moulded_case import MouldedCase
from faultloop.rules.conductors import adiabatic_k, greatest_loading, ohm_per_km, protective_size, service_temperature
from faultloop.rules.loader import LoadedRules

_EARTHING = {"TN-S": 1, "TN-C-S": 2, "TN-C": 3, "TT": 4, "IT": 5, "separated": 6, None: Earthing.UNKNOWN}
_ROLE = {"final": Role.FINAL, "distribution": Role.DISTRIBUTION, None: Role.UNKNOWN}
_FEEDS = {
    "socket-outlets": Feeds.SOCKET_OUTLETS,
    "fixed-equipment": Feeds.FIXED_EQUIPMENT,
    "mobile-equipment-outdoors": Feeds.MOBILE_OUTDOORS,
    None: Feeds.UNKNOWN,
}
_USERS, _POLICY, _DECISION, _CURRENT = (c.codes() for c in (Users, TemperaturePolicy, Decision, Current))
_MEANS: dict[str | None, int] = {None: 0}
_MEANS.update(MeansOfEarthing.codes())
CLASS_COLUMNS_KA = (3.0, 6.0, 10.0)


def tables_of(requests: Sequence[rq.AssessmentRequest]) -> Tables:
    """The tables that hold every rule set of these requests, callers' own included."""
    own = {request.rule_set for request in requests if is_own(request.rule_set)}
    return tables(tuple(sorted(own, key=lambda loaded: loaded.digest)))


def mapped(request: rq.AssessmentRequest, by: Tables | None = None) -> Mapped:
    """Turn one request into a row of the tables."""
    rules = request.rule_set
    point = Mapped(Row(), by or tables_of([request]), rules, _policy(request.policy, rules), None, None)
    if "rules" not in request.model_fields_set:
        point.assumptions.append("rules")
    _put_supply(point, request)
    _put_devices(point, request)
    _put_circuit(point, request)
    put_readings(point, request)
    put_unearthed(point, request)
    point.unused.extend(dict.fromkeys([*unused(request), *unused_unearthed(request)]))
    return point


def _policy(asked: rq.Policy, rules: LoadedRules) -> dict[str, str | float]:
    """The policy in force; the two flat policies hold a margin already and so default to `simple`."""
    default = rules.rules.policy
    temperature = asked.temperature or default.temperature
    flat = temperature in ("two-thirds", "four-fifths")
    decision = asked.decision or ("simple" if flat else default.decision)
    coverage = default.coverage if asked.coverage is None else asked.coverage
    return {"temperature": temperature, "decision": decision, "coverage": coverage}


def _put_supply(point: Mapped, request: rq.AssessmentRequest) -> None:
    numbers, choices, supply = point.row.numbers, point.row.choices, request.supply
    choices[Choice.RULES] = point.tables.rules_row(point.rules)
    choices[Choice.EARTHING] = _EARTHING[supply.earthing]
    choices[Choice.CURRENT] = _CURRENT[supply.current]
    choices[Choice.TEMPERATURE_POLICY] = _POLICY[str(point.policy["temperature"])]
    choices[Choice.DECISION] = _DECISION[str(point.policy["decision"])]
    numbers[Number.COVERAGE_SCALE] = coverage_scale(float(point.policy["coverage"]))
    if supply.means_of_earthing is not None:
        choices[Choice.MEANS_OF_EARTHING] = _MEANS[supply.means_of_earthing.state]
    if supply.declared_prospective_current_ka is not None:
        numbers[Number.DECLARED_CURRENT_KA] = supply.declared_prospective_current_ka
    if supply.nominal_voltage_between_lines_v is not None:
        numbers[Number.BETWEEN_LINES_V] = supply.nominal_voltage_between_lines_v
    if supply.nominal_voltage_to_earth_v is not None:
        numbers[Number.VOLTAGE] = supply.nominal_voltage_to_earth_v


def overcurrent_device(body: oc.OvercurrentDevice) -> ds.OvercurrentDevice | Described:
    """The device that a body describes."""
    if isinstance(body, oc.Breaker):
        return ds.Breaker(body.characteristic, body.rated_current_a)
    if isinstance(body, oc.OwnCurve):
        return OwnCurve(body.rated_current_a, body.source, own_band(body.rated_current_a, *body.points.edges()))
    if isinstance(body, oc.MouldedCase):
        return MouldedCase(body.rated_current_a, body.settings.told())
    return ds.Fuse(body.fuse_system, body.rated_current_a)


def _picked(point: Mapped, device: ds.OvercurrentDevice | Described) -> int | Band:
    """Row of a device in the compiled table, or the band that it brings along, which is warned of."""
    if isinstance(device, Described):
        point.cautions.append("own-curve" if isinstance(device, OwnCurve) else "settings-as-stated")
        return device.band
    if is_own(point.rules):
        return bands_under(point.rules).get(device, NO_DEVICE)
    return catalogue().rows.get((point.rules.rules.key, device), NO_DEVICE)


def residual_device(request: rq.AssessmentRequest) -> ds.ResidualDevice | None:
    """The residual device that the circuit relies on: its own, else the most sensitive one before it."""
    body = request.residual_current_device
    if body is None and request.upstream_residual_current_devices:
        body = min(request.upstream_residual_current_devices, key=lambda d: d.rated_residual_operating_current_ma)
    if body is None:
        return None
    return ds.ResidualDevice(body.rated_residual_operating_current_ma, body.residual_type, body.delay)


def _put_devices(point: Mapped, request: rq.AssessmentRequest) -> None:
    numbers, choices, table = point.row.numbers, point.row.choices, catalogue()
    choices[Choice.RESIDUAL] = NO_DEVICE
    if (body := request.overcurrent_device) is not None:
        device = overcurrent_device(body)
        point.device, point.row.device = device.designation, _picked(point, device)
        numbers[Number.DEVICE_RATED_CURRENT] = body.rated_current_a
        numbers[Number.OVERLOAD_CURRENT_A] = _overload_current(body)
        choices[Choice.MULTIPOLE] = int((body.poles or 1) > 2 or request.supply.phases == 3)
        if body.breaking_capacity_ka is not None:
            numbers[Number.BREAKING_CAPACITY_KA] = body.breaking_capacity_ka
        _put_let_through(point, body)
    for body in request.upstream_overcurrent_devices:
        device = overcurrent_device(body)
        point.upstream.append(device.designation)
        point.row.upstream.append(_picked(point, device))
    own = [request.residual_current_device] if request.residual_current_device else []
    chain = own + request.upstream_residual_current_devices
    if (relied := residual_device(request)) is not None:
        rated = [device.rated_residual_operating_current_ma for device in chain]
        numbers[Number.RESIDUAL_MA] = relied.rated_ma
        numbers[Number.RESIDUAL_GREATEST_MA], numbers[Number.RESIDUAL_LEAST_MA] = max(rated), min(rated)
        quick = [device.rated_residual_operating_current_ma for device in chain if device.delay == "general"]
        numbers[Number.RESIDUAL_QUICK_MA] = min(quick, default=np.nan)
        choices[Choice.RESIDUAL] = table.residual_rows[relied.delay]
        point.residual = relied.designation


def _overload_current(body: oc.OvercurrentDevice) -> float:
    """Current to be held against what the conductors carry: the setting, or the rating over its family's share."""
    if isinstance(body, oc.MouldedCase):
        return body.settings.overload_current_a
    share = fuse_families()[body.fuse_system].overload_share if isinstance(body, oc.Fuse) else None
    return body.rated_current_a if share is None else body.rated_current_a / share.value


def _put_let_through(point: Mapped, body: oc.OvercurrentDevice) -> None:
    """Let-through energy: the maker's, else by the class that a breaker is marked with or usually has."""
    numbers, choices = point.row.numbers, point.row.choices
    if body.let_through_energy_a2s is not None:
        numbers[Number.LET_THROUGH_A2S], choices[Choice.LET_THROUGH] = body.let_through_energy_a2s, LetThrough.MAKER
    elif isinstance(body, oc.Breaker):
        marked = body.energy_limiting_class
        held = _class_energies(marked or 3, body.characteristic, body.rated_current_a)
        if held is not None:
            numbers[Number.CLASS_ENERGY_3_KA : Number.CLASS_ENERGY_10_KA + 1] = held
            choices[Choice.LET_THROUGH] = LetThrough.CLASS_USUAL if marked is None else LetThrough.CLASS_MARKED
    elif isinstance(body, oc.Fuse) and fuse_families()[body.fuse_system].cartridge:
        choices[Choice.LET_THROUGH] = LetThrough.FUSE


@lru_cache(maxsize=1024)
def _class_energies(energy_limiting_class: int, characteristic: str, rated_current_a: float) -> list[float] | None:
    """Let-through energy of a class by column of the greatest current; None where the class sets none."""
    held = [breaker_energy(energy_limiting_class, characteristic, rated_current_a, ka) for ka in CLASS_COLUMNS_KA]
    return None if None in held else [energy for energy in held if energy is not None]


def _put_circuit(point: Mapped, request: rq.AssessmentRequest) -> None:
    numbers, choices, circuit = point.row.numbers, point.row.choices, request.circuit
    choices[Choice.ROLE], choices[Choice.FEEDS] = _ROLE[circuit.role], _FEEDS[circuit.feeds]
    choices[Choice.USERS] = _USERS[circuit.users]
    choices[Choice.DESIGNATED] = int(circuit.designated_equipment)
    choices[Choice.RING] = int(circuit.arrangement == "ring")
    rated = circuit.rated_current_a
    # A circuit is rated no higher than its device.
    numbers[Number.RATED_CURRENT] = np.fmin(np.nan if rated is None else rated, numbers[Number.DEVICE_RATED_CURRENT])
    if circuit.length_m is not None:
        numbers[Number.LENGTH_M] = circuit.length_m
    if circuit.current_carrying_capacity_a is not None:
        numbers[Number.CARRYING_CAPACITY_A] = circuit.current_carrying_capacity_a
    line, neutral, protective = (
        circuit.line_conductor,
        circuit.neutral_conductor,
        circuit.protective_conductor,
    )
    _put_conductor(numbers, line, Number.LINE_MM2, Number.LINE_OHM_PER_KM)
    _put_conductor(numbers, protective, Number.PROTECTIVE_MM2, Number.PROTECTIVE_OHM_PER_KM)
    _put_conductor(numbers, neutral, Number.NEUTRAL_MM2, None)
    same = neutral is not None and protective is not None and neutral.material == protective.material != "steel"
    choices[Choice.INFERABLE] = int(same)
    numbers[Number.ADIABATIC_K], numbers[Number.PROTECTIVE_K] = _k(line), _k(protective)
    if line is not None and protective is not None:
        _put_protective_size(numbers, request.overcurrent_device, line, protective)
    _put_service_temperature(point, [c for c in (line, protective) if c is not None])


def _put_conductor(numbers: list[float], body: rq.Conductor | None, area: int, per_km: int | None) -> None:
    if body is None:
        return
    numbers[area] = body.area_mm2
    if per_km is not None:
        known = ohm_per_km(body.material, body.area_mm2)
        numbers[per_km] = np.nan if known is None else known


def _put_protective_size(
    numbers: list[float], device: oc.OvercurrentDevice | None, line: rq.Conductor, protective: rq.Conductor
) -> None:
    """What the table of sizes asks, and whether device and cable are a standard combination."""
    line_k, protective_k = numbers[Number.ADIABATIC_K], numbers[Number.PROTECTIVE_K]
    # The table of sizes takes for granted that the line conductor suits its device.
    suited = device is None or device.rated_current_a <= line.area_mm2 * greatest_loading(line.material)
    if suited and not np.isnan(line_k + protective_k):
        numbers[Number.PROTECTIVE_TABLE_MM2] = protective_size(line.area_mm2, line_k, protective_k)
    if isinstance(device, oc.Breaker) and line.material == protective.material == "copper":
        areas = (line.area_mm2, protective.area_mm2)
        to_ka = combined_to_ka(device.characteristic, device.rated_current_a, *areas)
        numbers[Number.COMBINATION_TO_KA] = to_ka


def _k(body: rq.Conductor | None) -> float:
    found = None if body is None else adiabatic_k(body.material, body.insulation, body.area_mm2)
    return np.nan if found is None else found


def _put_service_temperature(point: Mapped, conductors: list[rq.Conductor]) -> None:
    known = [t for c in conductors if (t := service_temperature(c.insulation)) is not None]
    if not known:
        point.assumptions.append("service-temperature")
    point.row.numbers[Number.SERVICE_C] = max(known) if known else service_temperature("pvc") or np.nan
