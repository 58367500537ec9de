"""All states of a bench solved at once: potentials, ties to earth, contact currents, currents of the sources."""

from dataclasses import dataclass
from functools import cached_property

import numpy as np
from numpy.typing import NDArray

from faultloop.assessment.benches.contacts import Contact, accessible, usual_contacts, worked_at
from faultloop.assessment.benches.network import EARTH, Bench, Link, node_names
from faultloop.assessment.benches.states import UNPLUGGED, States, states_of
from faultloop.assessment.benches.typical import typical
from faultloop.assessment.benches.variants import variants_of
from faultloop.assessment.benches.wires import Variant, Wire, meanings, present, wires_of
from faultloop.electrical.circuit_elements import Phasor
from faultloop.electrical.circuit_wirings import EARTH as EARTH_NODE
from faultloop.electrical.circuit_wirings import (
    Branches,
    Places,
    Wired,
    contact,
    contact_with_earth,
    nearest_path,
    solve_wirings,
)
from faultloop.electrical.measurement import Array, Mask

NO_CURRENT_A, ROUNDING = 1e-9, 1e-6


@dataclass(frozen=True, slots=True)
class Ends:
    """Least, nominal and greatest magnitude over all that is not known, (...,) each."""

    least: Array
    nominal: Array
    greatest: Array


@dataclass(frozen=True)
class SolvedBench:
    """A bench with all its states solved; rows of `wired` are states by variants, state first."""

    bench: Bench
    states: States
    variants: tuple[Variant, ...]
    nodes: dict[str, int]
    wires: list[Wire]
    wire_of: Places
    branches: Branches
    wired: Wired
    weight: Array
    path_ohm: Array
    following: Places
    body_ohm: float
    tie_ohm: float

    @property
    def count(self) -> int:
        """Number of states."""
        return len(self.states.every)

    @property
    def told(self) -> int:
        """How many of the first states are told in full: as found, and with the planned link."""
        return self.states.base + 1

    def ends(self, phasor: Phasor) -> Ends:
        """Ends over the variants of something found for every row, (states·variants, ...)."""
        size = np.abs(phasor).reshape(-1, len(self.variants), *phasor.shape[1:])
        nominal = next(at for at, variant in enumerate(self.variants) if variant.level == "nominal")
        return Ends(size.min(axis=1), size[:, nominal], size.max(axis=1))

    @cached_property
    def meanings(self) -> dict[str, tuple[int, tuple[str, ...]]]:
        """What the poles of items are, by place."""
        return meanings(self.bench)

    @cached_property
    def _places_of(self) -> dict[str, Places]:
        """Places of names that were looked up already."""
        return {}

    def node(self, name: str) -> Places:
        """Place of a name in every state, (states,)."""
        if name not in self._places_of:
            self._places_of[name] = self._look_up(name)
        return self._places_of[name]

    def _look_up(self, name: str) -> Places:
        if name not in self.meanings:
            return np.full(self.count, self.nodes[name])
        item, names = self.meanings[name]
        # A place that no state takes has no node.
        by_place = np.array([self.nodes.get(of, EARTH_NODE) for of in names])
        picked: Places = by_place[self.places[:, item]]
        return picked

    @cached_property
    def places(self) -> Places:
        """Where every item stands, (states, items)."""
        return self.states.column("places")

    def rows(self, of_states: Places) -> Places:
        """The same for every row."""
        return np.repeat(of_states, len(self.variants), axis=0)

    def touched(self, contacts: list[Contact]) -> tuple[Ends, Ends]:
        """Voltage [V] and current [A] through a body at contacts, in the states told in full, (told, contacts)."""
        one, other = (
            self.rows(np.stack([self.node(name)[: self.told] for name in names], axis=1))
            for names in ([c.one for c in contacts], [c.other for c in contacts])
        )
        voltage, current = contact(self.wired, one, other, self.body_ohm)
        return self.ends(voltage), self.ends(_flowing(current))

    def through_link(self, link: Link) -> Ends:
        """Current [A] that a link would carry if it were made at the bench as found."""
        ohm = np.array([variant.ohm(link.ohm, ("link", link.id)) for variant in self.variants])[:, None]
        one, other = (np.full_like(ohm, self.node(name)[0], np.int64) for name in (link.one, link.other))
        _, current = contact(self.wired, one, other, ohm)
        ends = self.ends(_flowing(current))
        return Ends(ends.least[0, 0], ends.nominal[0, 0], ends.greatest[0, 0])

    @cached_property
    def tied(self) -> Mask:
        """Whether a node is tied by some way to earth: surely, and by what is not known perhaps, (2, states, nodes)."""
        ways = self.path_ohm.reshape(self.count, len(self.variants), -1) < self.tie_ohm
        return np.array([ways.all(axis=1), ways.any(axis=1)])

    def tied_at(self, names: list[str]) -> Mask:
        """Whether any of some nodes is tied surely, and perhaps, (2, states); a pulled plug is no node."""
        where, found = np.arange(self.count), np.zeros((2, self.count), np.bool_)
        for name in names:
            here = self.tied[:, where, self.node(name)]
            if name in self.meanings:
                here = here & (self.places[:, self.meanings[name][0]] != UNPLUGGED)
            found |= here
        return found

    @cached_property
    def worst(self) -> Places:
        """Which contact of one hand carries most in each state, the first where several do but for rounding."""
        most = self.single_currents.greatest
        first: Places = (most >= most.max(axis=1, keepdims=True) * (1.0 - ROUNDING)).argmax(axis=1)
        return first

    @cached_property
    def bench_tied(self) -> Mask:
        """Whether anything is tied that is to float, surely and perhaps, (2, states)."""
        separated = [supply for supply in self.bench.supplies if supply.kind == "separated"]
        poles = [name for supply in separated for name in (supply.l1, supply.l2)]
        return self.tied_at(poles + [touched.one for touched in worked_at(self.bench)])

    @property
    def floats(self) -> Mask:
        """Whether the bench floats whatever is not known, (states,)."""
        return np.asarray(~self.bench_tied[1], np.bool_)

    @cached_property
    def ways_to_pole(self) -> dict[str, Array]:
        """Resistance of the best way from every node to the poles of a separated supply, (states, variants, nodes)."""
        rows, found = self.count * len(self.variants), {}
        for supply in (supply for supply in self.bench.supplies if supply.kind == "separated"):
            ways, _ = nearest_path(rows, len(self.nodes), self.branches, self.weight, self.nodes[supply.l1])
            found[supply.id] = ways.reshape(self.count, len(self.variants), -1)
        return found

    @cached_property
    def shorts(self) -> Mask:
        """Whether a link carries so much that it shorts a source, by whatever is not known, (states,)."""
        links = np.array([wire.kind == "link" for wire in self.wires], np.bool_)
        if not links.any():
            return np.zeros(self.count, np.bool_)
        much = links[self.wire_of] & (np.abs(self.branch_current()) >= typical().short_circuit_from.usual)
        found = np.zeros(self.count, np.bool_)
        found[self.branches.network[much] // len(self.variants)] = True
        return found

    @cached_property
    def live_at(self) -> dict[str, dict[str, Mask]]:
        """By separated supply: parts of items that nobody works at, joined to a pole of it without being earthed.

        An oscilloscope without its protective conductor, clipped to a pole, is such a part: (2, states) each, surely,
        and by what is not known perhaps.
        """
        names = [part for part in accessible(self.bench) if not self._worked_at(part)]
        if not names or not self.bench.all_links:
            return {}
        found, earthed = {}, self.path_ohm.reshape(self.count, len(self.variants), -1) < self.tie_ohm
        for supply, ways in self.ways_to_pole.items():
            live = np.asarray((ways < self.tie_ohm) & ~earthed, np.bool_)
            surely, perhaps = np.logical_and.reduce(live, axis=1), np.logical_or.reduce(live, axis=1)
            at = {name: self.nodes[name] for name in names}
            found[supply] = {name: np.array([surely[:, node], perhaps[:, node]]) for name, node in at.items()}
        return found

    @cached_property
    def live_parts(self) -> dict[str, Mask]:
        """The same parts at whichever supply, by name: (2, states) each."""
        found: dict[str, Mask] = {}
        for parts in self.live_at.values():
            for name, live in parts.items():
                found[name] = live | found.get(name, np.zeros_like(live))
        return found

    def _worked_at(self, part: str) -> bool:
        """Whether a part is of an item that somebody works at."""
        owner = part.partition(".")[0]
        return any(item.id == owner and self.bench.under_test(item) for item in self.bench.items)

    @cached_property
    def singles(self) -> list[Contact]:
        """Contacts of one hand, of poles and of accessible parts."""
        return [*(c for c in usual_contacts(self.bench) if c.single), *worked_at(self.bench)]

    @cached_property
    def single_currents(self) -> Ends:
        """Their currents [A], (states, contacts)."""
        touched = self.rows(np.stack([self.node(single.one) for single in self.singles], axis=1))
        return self.ends(_flowing(contact_with_earth(self.wired, touched, self.body_ohm)))

    def branch_current(self) -> Phasor:
        """Current of every branch from plus to minus [A], (k,)."""
        b, v = self.branches, self.wired.potential_v
        return b.admittance * (v[b.network, b.plus] - v[b.network, b.minus] - b.emf)

    def summed(self, current: Phasor, wires: list[int], signs: list[float]) -> Ends:
        """Ends of a sum of some wires' currents in every state, (states,)."""
        sign = np.zeros(len(self.wires))
        sign[wires] = signs
        total = np.zeros(self.count * len(self.variants), np.complex128)
        np.add.at(total, self.branches.network, sign[self.wire_of] * current)
        return self.ends(_flowing(total))


def _flowing(current: Phasor) -> Phasor:
    """The current without what is left of sums that cancel."""
    return np.where(np.abs(current) < NO_CURRENT_A, 0.0, current)


def solve_bench(bench: Bench, body_ohm: float, tie_ma: float) -> SolvedBench:
    """Solve a bench in all its states; the order of its parts is of no account.

    A way to earth ties where the highest voltage of a source drives more through it than `tie_ma`.
    """
    bench = bench.in_order()
    states, variants = states_of(bench), variants_of(bench)
    wires = wires_of(bench, variants)
    columns = {what: states.column(what) for what in ("places", "links", "bonding")}
    there = present(wires, columns, len(states.every))
    used = np.flatnonzero(there.any(axis=0))
    wires, there = [wires[at] for at in used.tolist()], there[:, used]
    nodes = _nodes(bench, states, wires)
    branches, wire_of = _branches(wires, there, nodes, len(variants))
    rows = len(states.every) * len(variants)
    wired = solve_wirings(rows, len(nodes), branches, (states.base + 1) * len(variants))
    conductive = np.array([wire.conductive for wire in wires], np.bool_)[wire_of]
    weight = np.where(conductive, 1.0 / np.abs(branches.admittance), np.inf)
    path_ohm, following = nearest_path(rows, len(nodes), branches, weight)
    return SolvedBench(
        bench, states, variants, nodes, wires, wire_of, branches, wired, weight, path_ohm, following, body_ohm,
        1000.0 * max(supply.voltage_v for supply in bench.supplies) / tie_ma,
    )  # fmt: skip


def _nodes(bench: Bench, states: States, wires: list[Wire]) -> dict[str, int]:
    """Place of every node, earth first: what wires end at, and what no wire ends at in any state."""
    names = {end for wire in wires for end in (wire.plus, wire.minus)} | set(node_names(bench))
    told = meanings(bench)
    used = {nodes[place] for at, nodes in told.values() for place in {state.places[at] for state in states.every}}
    return {name: at for at, name in enumerate([EARTH, *sorted((names - set(told)) - {EARTH} | used)])}


def _branches(
    wires: list[Wire], there: NDArray[np.bool_], nodes: dict[str, int], variants: int
) -> tuple[Branches, Places]:
    """The wires of every row as branches; what is zero in a variant is no branch of it."""
    siemens = np.array([wire.siemens for wire in wires], np.complex128)
    state, wire = np.nonzero(there)
    row = (state[:, None] * variants + np.arange(variants)).ravel()
    wire_of = np.repeat(wire, variants)
    admittance = siemens[wire].ravel()
    kept = admittance != 0.0
    row, wire_of, admittance = row[kept], wire_of[kept], admittance[kept]
    plus, minus = (np.array([nodes[getattr(w, end)] for w in wires])[wire_of] for end in ("plus", "minus"))
    emf = np.array([wire.emf_v for wire in wires], np.complex128)[wire_of]
    return Branches(row, plus, minus, admittance, emf), wire_of
