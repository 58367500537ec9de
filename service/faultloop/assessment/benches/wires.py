"""The branches that a bench has in any of its states, each with the states in which it is there."""

from dataclasses import dataclass, field
from itertools import product

import numpy as np
from numpy.typing import NDArray

from faultloop.assessment.benches.network import EARTH, Bench, Item, Link, Span, Supply
from faultloop.assessment.benches.states import (
    AS_FOUND,
    BONDED,
    BY_PROBE,
    MADE,
    TO_EARTHED,
    TO_OWN,
    UNPLUGGED,
)
from faultloop.assessment.benches.typical import Typical, typical

# Nodes that only changed states use: poles of a transformer of an item's own, and the dead poles of a pulled plug.
OWN, DEAD, OUTLET = "~own", "~dead", "~outlet"
PLACES = (AS_FOUND, TO_EARTHED, TO_OWN, UNPLUGGED)
# Kind and owner of a wire whose resistance may be unknown.
Part = tuple[str, str]
# Which part, and how it must stand, for a wire to be there.
Holds = tuple[str, int, int]
# Admittance in each variant.
Siemens = tuple[complex, ...]


@dataclass(frozen=True, slots=True)
class Variant:
    """One choice of what is not known: unknown admittances at an end, and which transformers are poled the other way.

    Earthing both poles by resistances can lower the current of a contact with either, so resistances are put at either
    end each by itself: those ``against`` the level at the other one.
    """

    level: str
    turned: frozenset[str] = frozenset()
    against: frozenset[Part] = frozenset()
    # What stands at its least while all other capacitances are at their greatest: "windings", or "others" than these.
    least: str = ""
    # Items whose chassis nobody described, with the pole that it is joined to here; all others stand apart.
    chassis: frozenset[tuple[str, str]] = frozenset()

    def ohm(self, span: Span, part: Part | None = None) -> float:
        """A resistance; of parts that stand against the level it is the other end."""
        turned = {"low": "high", "high": "low"}.get(self.level, self.level) if part in self.against else self.level
        least = typical().joined_directly.usual
        return max({"low": span.greatest, "nominal": span.nominal, "high": span.least}[turned], least)


@dataclass(frozen=True, slots=True)
class Wire:
    """A branch: what it is, whose, between which nodes, its admittance in each variant, and when it is there."""

    kind: str
    owner: str
    plus: str
    minus: str
    siemens: Siemens
    emf_v: float = 0.0
    holds: tuple[Holds, ...] = ()

    @property
    def conductive(self) -> bool:
        """Whether direct current finds a way."""
        return self.kind not in ("filter", "cable", "interwinding", "ground-capacitance")


def span_of(of: Typical) -> Span:
    """What is taken where nothing is stated."""
    return Span(of.least, of.usual, of.greatest, stated=False)


@dataclass(slots=True)
class Wiring:
    """All wires of a bench in the making."""

    bench: Bench
    variants: tuple[Variant, ...]
    meanings: dict[str, tuple[int, tuple[str, ...]]]
    wires: list[Wire] = field(default_factory=list)

    @property
    def omega(self) -> float:
        """Angular frequency [rad/s]."""
        return 2.0 * np.pi * self.bench.frequency_hz

    def resistance(self, span: Span, part: Part | None = None) -> Siemens:
        """Admittance of a resistance in each variant; no joint is better than the least that is taken."""
        return tuple(complex(1.0 / variant.ohm(span, part)) for variant in self.variants)

    def reactance(self, span: Span) -> Siemens:
        """Admittance of a transformer's impedance in each variant, taken as leakage: it makes no contact smaller."""
        return tuple(-1j * y for y in self.resistance(span))

    def capacitance(self, span: Span, share: float = 1.0, sort: str = "others") -> Siemens:
        """Admittance of a capacitance in each variant."""
        ends = {"low": span.least, "nominal": span.nominal, "high": span.greatest}
        levels = ("low" if variant.least == sort else variant.level for variant in self.variants)
        return tuple(complex(0.0, self.omega * ends[level] * share * 1e-9) for level in levels)

    def perhaps(self, item: Item, which: str) -> Siemens:
        """Admittance between a pole and a chassis of which nobody said whether it is joined to one."""
        joined = 1.0 / typical().joined_directly.usual
        return tuple(complex(joined) if (item.id, which) in variant.chassis else 0j for variant in self.variants)

    def put(
        self,
        kind: str,
        owner: str,
        plus: str,
        minus: str,
        siemens: Siemens,
        *holds: Holds,
        emf: float = 0.0,
    ) -> None:
        """Add a wire; both ends at one node make none."""
        if plus != minus:
            self.wires.append(Wire(kind, owner, plus, minus, siemens, emf, holds))


def earthed_outlet(bench: Bench) -> str:
    """The earthed supply to whose outlets an item may be moved."""
    return next((supply.id for supply in bench.supplies if supply.kind == "earthed"), OUTLET)


def meanings(bench: Bench) -> dict[str, tuple[int, tuple[str, ...]]]:
    """What an item's poles are, by its place: the number of the item, and the node in each of `PLACES`."""
    outlet = earthed_outlet(bench)
    return {
        item.pole(which): (at, tuple(f"{feed}.{which}" for feed in (item.fed_by, outlet, OWN, DEAD)))
        for at, item in enumerate(bench.items)
        for which in ("L1", "L2")
    }


def wires_of(bench: Bench, variants: tuple[Variant, ...]) -> list[Wire]:
    """Every wire of a bench."""
    wiring = Wiring(bench, variants, meanings(bench))
    table = typical()
    for at, supply in enumerate(bench.supplies):
        _put_supply(wiring, supply)
        if supply.kind == "separated" and supply.bonding == "earthed":
            earth = wiring.resistance(span_of(table.protective_conductor))
            wiring.put("bonding-to-earth", supply.id, supply.bond, EARTH, earth, ("bonding", at, BONDED))
    if earthed_outlet(bench) == OUTLET:
        _put_supply(wiring, Supply(OUTLET, "earthed", table.mains.usual, span_of(table.earth_loop)))
    for at, item in enumerate(bench.items):
        _put_item(wiring, at, item)
    for at, link in enumerate(bench.all_links):
        _put_link(wiring, at, link)
    return wiring.wires


def _put_supply(wiring: Wiring, supply: Supply, *holds: Holds) -> None:
    source = wiring.resistance(supply.source_ohm)
    if supply.kind == "earthed":
        wiring.put("source", supply.id, supply.l1, EARTH, source, *holds, emf=supply.voltage_v)
        # Half of the loop lies in the neutral (common practice).
        wiring.put("neutral", supply.id, supply.l2, EARTH, tuple(2.0 * y for y in source), *holds)
        return
    source = wiring.reactance(supply.source_ohm) if supply.kind == "separated" else source
    ways = _poled(wiring, supply, source)
    for siemens, emf in zip(ways, (supply.voltage_v, -supply.voltage_v), strict=True):
        if any(siemens):
            wiring.put("source", supply.id, supply.l1, supply.l2, siemens, *holds, emf=emf)
    if supply.cable_nf is not None:
        for pole in (supply.l1, supply.l2):
            wiring.put("cable", supply.id, pole, EARTH, wiring.capacitance(supply.cable_nf), *holds)
    if supply.interwinding_nf is not None:
        _put_windings(wiring, supply, supply.interwinding_nf, *holds)


def _put_windings(wiring: Wiring, supply: Supply, interwinding_nf: Span, *holds: Holds) -> None:
    """Half of the windings' capacitance at each pole: to the screen, else to the primary's ends, poled either way."""
    half = wiring.capacitance(interwinding_nf, 0.5, "windings")
    for pole, turned in ((supply.l1, False), (supply.l2, True)):
        if supply.screen:
            wiring.put("interwinding", supply.id, pole, EARTH, half, *holds)
            continue
        live, dead = _poled(wiring, supply, half) if not turned else reversed(_poled(wiring, supply, half))
        wiring.put("interwinding", supply.id, pole, EARTH, live, *holds, emf=supply.primary_v)
        wiring.put("interwinding", supply.id, pole, EARTH, dead, *holds)


def _poled(wiring: Wiring, supply: Supply, siemens: Siemens) -> tuple[Siemens, Siemens]:
    """Admittances where a transformer stands as it is drawn, and where it is poled the other way.

    Turned over, the other pole lies beside the live end of the primary, and the secondary's voltage is turned too.
    """
    turned = [supply.id in variant.turned for variant in wiring.variants]
    as_drawn = tuple(0j if over else y for y, over in zip(siemens, turned, strict=True))
    return as_drawn, tuple(y if over else 0j for y, over in zip(siemens, turned, strict=True))


def _put_item(wiring: Wiring, at: int, item: Item) -> None:
    bench, table = wiring.bench, typical()
    supply = bench.supply(item.fed_by)
    conductor = wiring.resistance(span_of(table.protective_conductor))
    for place in PLACES:
        l1, l2 = (wiring.meanings[item.pole(which)][1][place] for which in ("L1", "L2"))
        here: Holds = ("places", at, place)
        if item.filter_nf is not None:
            for pole in (l1, l2):
                wiring.put("filter", item.id, pole, item.filtered_to, wiring.capacitance(item.filter_nf), here)
        if item.chassis_open:
            for which, pole in (("L1", l1), ("L2", l2)):
                wiring.put("chassis", item.id, pole, item.chassis, wiring.perhaps(item, which), here)
        if item.live_chassis is not None and item.chassis_ohm is not None:
            pole = l1 if item.live_chassis == "L1" else l2
            wiring.put(
                "chassis", item.id, pole, item.chassis, wiring.resistance(item.chassis_ohm, ("chassis", item.id)), here
            )
        if item.load_ohm is not None:
            wiring.put("load", item.id, l1, l2, wiring.resistance(item.load_ohm), here)
        if item.protection_class == "I":
            contact = _earth_contact(supply, place)
            if contact is not None:
                wiring.put("protective-conductor", item.id, item.case, contact, conductor, here)
    if supply.kind != "battery":
        own = Supply(
            OWN, "separated", supply.voltage_v, span_of(table.source_impedance), "none", span_of(table.cable),
            span_of(table.interwinding), primary_v=table.mains.usual,
        )  # fmt: skip
        _put_supply(wiring, own, ("places", at, TO_OWN))
    _put_ground(wiring, item)


def _earth_contact(supply: Supply, place: int) -> str | None:
    """What the earth contact of the outlet is joined to."""
    if place == TO_EARTHED or (place == AS_FOUND and supply.kind == "earthed"):
        return EARTH
    if place == AS_FOUND and supply.kind == "separated" and supply.bonding != "none":
        return supply.bond
    return None


def _put_ground(wiring: Wiring, item: Item) -> None:
    """How the signal ground stands to the case of class I, else to earth by a lead of its own."""
    beside = item.case if item.protection_class == "I" else EARTH
    if item.ground == "earthed":
        ohm = wiring.resistance(span_of(typical().protective_conductor))
        wiring.put("signal-ground", item.id, item.signal_ground, beside, ohm)
    if item.ground == "resistance" and item.ground_ohm is not None:
        wiring.put(
            "signal-ground",
            item.id,
            item.signal_ground,
            beside,
            wiring.resistance(item.ground_ohm, ("signal-ground", item.id)),
        )
    if item.ground_nf is not None:
        nf = wiring.capacitance(item.ground_nf)
        wiring.put("ground-capacitance", item.id, item.signal_ground, item.case, nf)


def _put_link(wiring: Wiring, at: int, link: Link) -> None:
    """The link, and in its place the two inputs of a differential probe, each to earth; an item's poles may move."""
    ends = [_alternatives(wiring, end) for end in (link.one, link.other)]
    ohm = wiring.resistance(link.ohm, ("link", link.id))
    probe = wiring.resistance(span_of(typical().differential_probe))
    for (plus, first), (minus, second) in product(*ends):
        if first and second and first[0][1] == second[0][1] and first != second:
            continue  # one item cannot stand in two places
        wiring.put("link", link.id, plus, minus, ohm, *first, *second, ("links", at, MADE))
    for end in ends:
        for node, holds in end:
            wiring.put("probe", link.id, node, EARTH, probe, *holds, ("links", at, BY_PROBE))


def _alternatives(wiring: Wiring, name: str) -> list[tuple[str, tuple[Holds, ...]]]:
    """The nodes that a name may mean, with the places in which it does."""
    if name not in wiring.meanings:
        return [(name, ())]
    at, nodes = wiring.meanings[name]
    return [(node, (("places", at, place),)) for place, node in zip(PLACES, nodes, strict=True)]


def present(wires: list[Wire], columns: dict[str, NDArray[np.int64]], states: int) -> NDArray[np.bool_]:
    """In which states (rows) each wire (column) is there."""
    there = np.ones((states, len(wires)), np.bool_)
    for which in range(max((len(wire.holds) for wire in wires), default=0)):
        held = [(at, wire.holds[which]) for at, wire in enumerate(wires) if len(wire.holds) > which]
        for sort, column in columns.items():
            chosen = [(at, part, code) for at, (own, part, code) in held if own == sort]
            if chosen:
                at, part, code = (np.array(values) for values in zip(*chosen, strict=True))
                there[:, at] &= column[:, part] == code
    return there
