"""What links make of several supplies and of exposed parts: supplies joined to one, cases bonded to each other."""

from dataclasses import dataclass
from heapq import heappop, heappush

import numpy as np

from faultloop.assessment.benches.network import Item, Supply
from faultloop.assessment.benches.solving import SolvedBench
from faultloop.assessment.benches.states import AS_FOUND, MADE, State
from faultloop.assessment.benches.typical import typical
from faultloop.electrical.measurement import Array, Mask

# Two parts, and the least and greatest resistance between them [Ω].
Edge = tuple[str, str, float, float]


@dataclass(frozen=True, slots=True)
class Bonded:
    """Least and greatest resistance between the two cases that are farthest apart [Ω]."""

    least_ohm: float
    greatest_ohm: float


def joined_supplies(solved: SolvedBench, supply: Supply) -> dict[str, Mask]:
    """Separated supplies that conductors join to one, by id: surely and perhaps, (2, states); itself is among them."""
    others = [other for other in solved.bench.supplies if other.kind == "separated"]
    ways = np.asarray(solved.ways_to_pole[supply.id] < solved.tie_ohm, np.bool_)
    surely, perhaps = np.logical_and.reduce(ways, axis=1), np.logical_or.reduce(ways, axis=1)
    return {other.id: np.array([way[:, solved.nodes[other.l1]] for way in (surely, perhaps)]) for other in others}


def counted(solved: SolvedBench, supply: Supply, which: list[int]) -> Array:
    """How many of some items a supply feeds with those that are joined to it, (states,); nan where nobody knows."""
    here = solved.places[:, which] == AS_FOUND
    joined = joined_supplies(solved, supply)
    nothing = np.zeros((2, solved.count), np.bool_)
    mine = [joined.get(solved.bench.items[at].fed_by, nothing) for at in which]
    of = np.array(mine, np.bool_).reshape(-1, 2, solved.count)
    surely, perhaps = ((here & of[:, end].T).sum(axis=1).astype(np.float64) for end in (0, 1))
    return np.where(surely == perhaps, surely, np.nan)


def bonded_by_links(solved: SolvedBench, supply: Supply, state: int) -> Bonded | None:
    """Whether every exposed part of a supply and of those joined to it is bonded to every other; at least two are."""
    joined, every = joined_supplies(solved, supply), solved.states.every[state]
    exposed = [item for item in _here(solved, every) if item.fed_by in joined and joined[item.fed_by][1, state]]
    if len(exposed) < 2:
        return None
    edges = _edges(solved, every)
    ends = [(0.0, 0.0)]
    for item in exposed[:-1]:
        least, greatest = (_distances(item.case, edges, end) for end in (2, 3))
        for other in exposed:
            if other.case not in greatest:
                return None
            ends.append((least[other.case], greatest[other.case]))
    return Bonded(max(end[0] for end in ends), max(end[1] for end in ends))


def _here(solved: SolvedBench, state: State) -> list[Item]:
    """Items of class I that stand where they were found."""
    told = zip(solved.bench.items, state.places, strict=True)
    return [item for item, place in told if place == AS_FOUND and item.protection_class == "I"]


def _edges(solved: SolvedBench, state: State) -> list[Edge]:
    """Conductors between cases, signal grounds and bonded earth contacts; no way leads by a pole or by earth."""
    bench, conductor = solved.bench, typical().protective_conductor.usual
    parts = {part for item in bench.items for part in (item.case, item.signal_ground)}
    parts |= {supply.bond for supply in bench.supplies if supply.bonding != "none"}
    edges = [
        (link.one, link.other, link.ohm.least, link.ohm.greatest)
        for link, made in zip(bench.all_links, state.links, strict=True)
        if made == MADE and {link.one, link.other} <= parts
    ]
    edges += [
        (item.case, item.signal_ground, conductor, conductor)
        for item in bench.items
        if item.protection_class == "I" and item.ground == "earthed"
    ]
    edges += [
        (item.case, bench.supply(item.fed_by).bond, conductor, conductor)
        for item in _here(solved, state)
        if bench.supply(item.fed_by).kind == "separated" and bench.supply(item.fed_by).bonding != "none"
    ]
    return edges


def _distances(begin: str, edges: list[Edge], end: int) -> dict[str, float]:
    """Least resistance from a part to every other that is reached."""
    beside: dict[str, list[tuple[str, float]]] = {}
    for edge in edges:
        ohm = float(edge[end])
        beside.setdefault(edge[0], []).append((edge[1], ohm))
        beside.setdefault(edge[1], []).append((edge[0], ohm))
    found, heap = dict[str, float](), [(0.0, begin)]
    while heap:
        ohm, part = heappop(heap)
        if part in found:
            continue
        found[part] = ohm
        for other, more in beside.get(part, []):
            heappush(heap, (ohm + more, other))
    return found
