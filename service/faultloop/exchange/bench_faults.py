"""What cannot be meant in a bench's body: names that nothing has, ids that stand twice, links that join nothing."""

from collections import Counter
from collections.abc import Iterator
from difflib import get_close_matches
from typing import Any

from pydantic import ValidationError
from pydantic_core import InitErrorDetails, PydanticCustomError

from faultloop.assessment.benches.typical import typical
from faultloop.assessment.benches.variants import open_resistances
from faultloop.exchange.bench_mapping import mapped_bench
from faultloop.exchange.bench_networks import (
    MOST_OPEN_RESISTANCES,
    BatteryBenchSupply,
    BenchContact,
    BenchItem,
    BenchLink,
    BenchRequest,
    EarthedBenchSupply,
    SeparatedBenchSupply,
)

Loc = tuple[str | int, ...]
Fault = tuple[Loc, str, str]
MOST_NAMED = 60


def validated(body: Any) -> BenchRequest:
    """The bench of a body given as Python objects."""
    return consistent(BenchRequest.model_validate(body))


def consistent(request: BenchRequest) -> BenchRequest:
    """Refuse a bench whose parts do not fit together; every fault is told at its place."""
    faults = [*_ids(request), *_feeding(request)]
    if not faults:  # names mean something only once ids and feeding do
        faults = [*_ends(request), *_supplies_needed(request)]
    if not faults:
        faults = [*_open_resistances(request)]
    if not faults:
        return request
    raise ValidationError.from_exception_data(
        "BenchRequest",
        [
            InitErrorDetails(type=PydanticCustomError(code, "{told}", {"told": told}), loc=place, input=None)
            for place, code, told in faults
        ],
    )


def _ids(request: BenchRequest) -> Iterator[Fault]:
    parts: list[tuple[Loc, str]] = [(("supplies", at, "id"), supply.id) for at, supply in enumerate(request.supplies)]
    parts += [(("items", at, "id"), item.id) for at, item in enumerate(request.items)]
    links: list[tuple[Loc, str]] = [(("links", at, "id"), link.id) for at, link in enumerate(request.links)]
    if request.planned_link is not None:
        links.append((("planned_link", "id"), request.planned_link.id))
    for named in (parts, links):
        seen = Counter[str]()
        for place, name in named:
            seen[name] += 1
            if seen[name] > 1:
                yield place, "id_stands_twice", "another part has this id; supplies and items differ, and so do links"
    for place, name in parts:
        if name == "earth":
            yield place, "id_reserved", "earth is what everything is counted from; give the part another id"


def _feeding(request: BenchRequest) -> Iterator[Fault]:
    kinds = {supply.id: supply.kind for supply in request.supplies}
    for at, item in enumerate(request.items):
        if item.fed_by not in kinds:
            known = ", ".join(sorted(kinds))
            yield ("items", at, "fed_by"), "unknown_supply", f"no supply has this id; there are: {known}"
        else:
            yield from _class_fits(request, at, item)
        ground = item.signal_ground
        if ground is not None and ground.kind != "resistance" and ground.resistance_ohm is not None:
            told = "a resistance goes with the kind resistance; here leave it out"
            yield ("items", at, "signal_ground", "resistance_ohm"), "resistance_not_asked", told
        if item.chassis_resistance_ohm is not None and item.live_chassis not in ("L1", "L2"):
            told = "say by live_chassis which pole the chassis is joined to"
            yield ("items", at, "chassis_resistance_ohm"), "chassis_not_live", told
    for at, supply in enumerate(request.supplies):
        fed_from = supply.fed_from if isinstance(supply, SeparatedBenchSupply) else None
        if fed_from is not None and kinds.get(fed_from) != "earthed":
            earthed = ", ".join(s.id for s in request.supplies if isinstance(s, EarthedBenchSupply)) or "none yet"
            told = f"the primary is fed from an earthed supply of this bench; there are: {earthed}"
            yield ("supplies", at, "fed_from"), "unknown_supply", told


def _class_fits(request: BenchRequest, at: int, item: BenchItem) -> Iterator[Fault]:
    """Class III takes extra-low voltage only, and class I has an earth contact, which no battery has."""
    supply = next(supply for supply in request.supplies if supply.id == item.fed_by)
    place: Loc = ("items", at, "protection_class")
    limits = request.rule_set.rules.disconnection
    most = limits.touch_voltage_ac.value
    if isinstance(supply, BatteryBenchSupply):
        most = typical().extra_low_dc.usual
        volts = supply.nominal_voltage_v or 0.0
        if item.protection_class == "I":
            told = "class I means a protective conductor, and a battery has none; say II or III, or what feeds it"
            yield place, "class_does_not_fit", told
    elif isinstance(supply, SeparatedBenchSupply):
        volts = supply.nominal_voltage_between_lines_v
    else:
        volts = supply.nominal_voltage_to_earth_v
    if item.protection_class == "III" and volts > most:
        told = (
            f"class III takes extra-low voltage, at most {most:g} V, and {supply.id} has {volts:g} V; "
            "state the class of what is plugged in there, such as II of its power supply"
        )
        yield place, "class_does_not_fit", told


def names_of(request: BenchRequest) -> list[str]:
    """Every node that a link or contact may end at."""
    names = ["earth"]
    for supply in request.supplies:
        names += [f"{supply.id}.L1", f"{supply.id}.L2"]
        if isinstance(supply, SeparatedBenchSupply) and supply.bonding != "none":
            names.append(f"{supply.id}.bonding")
    for item in request.items:
        names += [f"{item.id}.{end}" for end in ("case", "L1", "L2")]
        if item.signal_ground is not None:
            names.append(f"{item.id}.signal_ground")
    return names


def _ends(request: BenchRequest) -> Iterator[Fault]:
    names = names_of(request)
    feeds = {item.id: item.fed_by for item in request.items}
    joints: list[tuple[Loc, BenchLink | BenchContact]] = [
        (("links", at), link) for at, link in enumerate(request.links)
    ]
    if request.planned_link is not None:
        joints.append((("planned_link",), request.planned_link))
    joints += [(("contacts", at), contact) for at, contact in enumerate(request.contacts)]
    for place, joint in joints:
        told = [((*place, end), name) for end, name in (("from", joint.one), ("to", joint.other))]
        wrong = [(where, name) for where, name in told if name not in names]
        for where, name in wrong:
            yield where, "unknown_node", _unknown(name, names, feeds)
        if not wrong and _meant(joint.one, feeds) == _meant(joint.other, feeds):
            yield (*place, "to"), "same_node", "both ends are the same node, so nothing is joined"


def _meant(name: str, feeds: dict[str, str]) -> str:
    """A pole of an item is that of its supply."""
    part, _, end = name.partition(".")
    return f"{feeds[part]}.{end}" if part in feeds and end in ("L1", "L2") else name


def _unknown(name: str, names: list[str], feeds: dict[str, str]) -> str:
    part, _, end = name.partition(".")
    if part in feeds and end == "signal_ground":
        return "nothing is said of this item's signal ground: state signal_ground with its kind"
    own = [known for known in names if known.partition(".")[0] == part]
    if own:
        return f"this part has no such node; it has: {', '.join(own)}"
    near = get_close_matches(name, names, n=1, cutoff=0.75)
    listed = ", ".join(names[:MOST_NAMED]) + (", …" if len(names) > MOST_NAMED else "")
    return f"no part of this bench has this node; there are: {listed}" + (f"; did you mean {near[0]}?" if near else "")


def _supplies_needed(request: BenchRequest) -> Iterator[Fault]:
    if not any(isinstance(supply, SeparatedBenchSupply) for supply in request.supplies):
        told = "a bench needs a separated supply: nothing else can float; judge earthed outlets as points"
        yield ("supplies",), "no_separated_supply", told


def _open_resistances(request: BenchRequest) -> Iterator[Fault]:
    """Every choice of ends of what is not known is solved, and these double with each of them."""
    parts = open_resistances(mapped_bench(request).bench)
    if len(parts) > MOST_OPEN_RESISTANCES:
        named = ", ".join(f"{kind} of {owner}" for kind, owner in parts)
        told = f"at most {MOST_OPEN_RESISTANCES} resistances may be left open; state some of these: {named}"
        yield (), "too_many_open_resistances", told
