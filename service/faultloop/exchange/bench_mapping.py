"""A bench in words -> the graph that is solved, with what had to be assumed."""

from dataclasses import dataclass, field, replace
from typing import Any

from faultloop.assessment.benches.network import Bench, Item, Link, Span, Stored, Supply
from faultloop.assessment.benches.typical import Typical, TypicalTable, typical
from faultloop.exchange.bench_networks import (
    BatteryBenchSupply,
    BenchItem,
    BenchLink,
    BenchRequest,
    BenchSupply,
    EarthedBenchSupply,
    SeparatedBenchSupply,
)

DEVICE_FREE = 0.0
BATTERY_OHM = Span(0.1, 0.1, 0.1)


@dataclass(frozen=True, slots=True)
class Assumed:
    """What was taken because nothing was stated: of what part, which quantity, between which ends."""

    what: str
    owner: str
    span: Span
    unit: str
    asks: bool = True


@dataclass(slots=True)
class MappedBench:
    """A bench ready to be solved."""

    bench: Bench
    assumed: list[Assumed] = field(default_factory=list)

    def span(self, told: Any, what: str, owner: str, otherwise: Typical, *, asks: bool = True) -> Span:
        """A stated number or its ends, else what is usual, noted as assumed."""
        if told is not None:
            return stated(told)
        span = Span(otherwise.least, otherwise.usual, otherwise.greatest, stated=False)
        self.assumed.append(Assumed(what, owner, span, otherwise.unit, asks))
        return span


def stated(told: Any) -> Span:
    """A number, or its two ends with the middle as nominal."""
    if isinstance(told, int | float):
        return Span(float(told), float(told), float(told))
    return Span(told.least, 0.5 * (told.least + told.greatest), told.greatest)


def mapped_bench(request: BenchRequest) -> MappedBench:
    """Turn a validated body into a graph; its parts may stand in any order."""
    table = typical()
    found = MappedBench(Bench(request.frequency_hz, (), (), (), None))
    by_id = {supply.id: supply for supply in request.supplies}
    found.bench = Bench(
        request.frequency_hz,
        tuple(_supply(found, supply, by_id, table) for supply in sorted(request.supplies, key=lambda s: s.id)),
        tuple(_item(found, item, by_id[item.fed_by], table) for item in sorted(request.items, key=lambda i: i.id)),
        tuple(_link(found, link, table) for link in sorted(request.links, key=lambda link: link.id)),
        None if request.planned_link is None else _link(found, request.planned_link, table),
    ).in_order()
    _leave_chassis_open(found, request)
    if not any(isinstance(supply, EarthedBenchSupply) for supply in request.supplies):
        found.span(None, "outlet", "", table.mains, asks=False)
    return found


def _leave_chassis_open(found: MappedBench, request: BenchRequest) -> None:
    """Note items worked at of which nobody said whether a pole is joined to their chassis."""
    bench, silent = found.bench, {item.id for item in request.items if item.live_chassis is None}
    direct = typical().joined_directly
    joined = Span(direct.least, direct.usual, direct.greatest, stated=False)
    items = []
    for item in bench.items:
        chassis_open = item.id in silent and _may_be_live(bench, item)
        items.append(replace(item, chassis_open=chassis_open))
        if chassis_open:
            found.assumed.append(Assumed("live-chassis", item.id, joined, direct.unit))
    found.bench = replace(bench, items=tuple(items))


def _may_be_live(bench: Bench, item: Item) -> bool:
    """Whether a chassis may be joined to a pole: of class I only a signal ground that stands off the earthed case."""
    if not bench.under_test(item) or item.protection_class == "III" or bench.supply(item.fed_by).kind == "battery":
        return False
    if item.protection_class == "I":
        return item.ground in ("floating", "resistance")
    # The case of class II is a chassis only where somebody clips to it.
    linked = any(item.case in (link.one, link.other) for link in bench.all_links)
    return item.ground != "none" or linked


def _supply(found: MappedBench, body: BenchSupply, by_id: dict[str, BenchSupply], table: TypicalTable) -> Supply:
    if isinstance(body, BatteryBenchSupply):
        return Supply(body.id, "battery", DEVICE_FREE, BATTERY_OHM)
    if isinstance(body, EarthedBenchSupply):
        loop = found.span(body.earth_fault_loop_impedance_ohm, "earth-loop", body.id, table.earth_loop)
        return Supply(body.id, "earthed", body.nominal_voltage_to_earth_v, loop)
    feeding = by_id.get(body.fed_from or "")
    told = body.transformer
    if isinstance(feeding, EarthedBenchSupply):
        primary = feeding.nominal_voltage_to_earth_v
    else:
        primary = found.span(None, "primary", body.id, table.mains, asks=False).nominal
    return Supply(
        id=body.id,
        kind="separated",
        voltage_v=body.nominal_voltage_between_lines_v,
        source_ohm=_source(found, body, table),
        bonding=body.bonding,
        cable_nf=found.span(body.cable_capacitance_to_earth_nf, "cable", body.id, table.cable),
        interwinding_nf=found.span(told.interwinding_capacitance_nf, "interwinding", body.id, table.interwinding),
        screen=told.screen,
        primary_v=primary,
        fed_from=body.fed_from,
    )


def _source(found: MappedBench, body: SeparatedBenchSupply, table: TypicalTable) -> Span:
    """u_k/100·U²/S, by what is stated of it."""
    told = body.transformer
    if told.rated_power_va is None:
        return found.span(None, "source-impedance", body.id, table.source_impedance, asks=False)
    percent = found.span(
        told.short_circuit_voltage_percent, "short-circuit-voltage", body.id, table.short_circuit_voltage, asks=False
    )
    base = body.nominal_voltage_between_lines_v**2 / told.rated_power_va / 100.0
    return Span(percent.least * base, percent.nominal * base, percent.greatest * base, percent.stated)


def _item(found: MappedBench, body: BenchItem, supply: BenchSupply, table: TypicalTable) -> Item:
    ground = "none" if body.signal_ground is None else body.signal_ground.kind
    floats = ground == "floating" and body.protection_class == "I"
    ohm = beside = None
    if floats:
        beside = found.span(None, "signal-ground-capacitance", body.id, table.signal_ground_to_case)
    if body.signal_ground is not None and ground == "resistance":
        ohm = found.span(body.signal_ground.resistance_ohm, "signal-ground", body.id, table.links["antistatic-mat"])
    chassis = None
    if body.live_chassis in ("L1", "L2"):
        direct = table.joined_directly
        chassis = found.span(body.chassis_resistance_ohm, "chassis", body.id, direct, asks=False)
    return Item(
        id=body.id,
        label=body.label or body.id,
        fed_by=body.fed_by,
        protection_class=body.protection_class,
        filter_nf=_filter(found, body, supply, table),
        ground=ground,
        ground_ohm=ohm,
        ground_nf=beside,
        live_chassis=None if body.live_chassis == "none" else body.live_chassis,
        chassis_ohm=chassis,
        load_ohm=None if body.load_resistance_ohm is None else stated(body.load_resistance_ohm),
        stored=_stored(body),
        role=body.role,
    )


def _filter(found: MappedBench, body: BenchItem, supply: BenchSupply, table: TypicalTable) -> Span | None:
    """Line to case or signal ground; what runs on a battery has none unless it is stated."""
    if body.filter_capacitance_nf is None and isinstance(supply, BatteryBenchSupply):
        return None
    if body.protection_class == "I":
        return found.span(body.filter_capacitance_nf, "filter-class-1", body.id, table.filter_class_1)
    return found.span(body.filter_capacitance_nf, "filter-class-2", body.id, table.filter_class_2)


def _stored(body: BenchItem) -> Stored | None:
    told = body.stored
    return None if told is None else Stored(told.capacitance_uf, told.voltage_v, told.discharge_resistance_ohm)


def _link(found: MappedBench, body: BenchLink, table: TypicalTable) -> Link:
    usual = table.links[body.kind]
    # Only where its ends differ does it matter which it is.
    asks = usual.least != usual.greatest
    ohm = found.span(body.resistance_ohm, f"link-{body.kind}", body.id, usual, asks=asks)
    return Link(body.id, body.kind, body.one, body.other, ohm)
