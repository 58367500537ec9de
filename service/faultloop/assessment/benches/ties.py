"""By what a node stands to earth: the chain of wires that ties it, or the one that couples it without tying."""

from dataclasses import dataclass
from functools import cached_property

import numpy as np

from faultloop.assessment.benches.network import EARTH
from faultloop.assessment.benches.solving import SolvedBench
from faultloop.electrical.circuit_wirings import Branches, Places, nearest_path
from faultloop.electrical.measurement import Array

TIED, COUPLED, APART = "tied", "floating", "apart"


@dataclass(frozen=True, slots=True)
class Step:
    """One wire on the way to earth: what it is, whose, and the node behind it."""

    kind: str
    owner: str
    to: str


@dataclass(frozen=True, slots=True)
class Standing:
    """How a node stands to earth: tied, floating with something that couples it, or with nothing joined at all."""

    word: str
    steps: tuple[Step, ...]
    path_ohm: float


class Ties:
    """Ways to earth of every node in one state, by the variant that ties best."""

    def __init__(self, solved: SolvedBench, state: int) -> None:
        self._solved, self._state = solved, state
        count = len(solved.variants)
        mine = solved.path_ohm[state * count : (state + 1) * count]
        reached = np.isfinite(mine)
        # The variant that joins most nodes to earth, and these by the least resistance.
        told = list(zip(-reached.sum(axis=1), np.where(reached, mine, 0.0).sum(axis=1), strict=True))
        self._row = state * count + told.index(min(told))
        self._names = {at: name for name, at in solved.nodes.items()}
        branches = solved.branches
        self._mine = np.flatnonzero(branches.network == self._row)
        self._by_pair: dict[tuple[int, int], list[int]] = {}
        for at in self._mine.tolist():
            pair = sorted((int(branches.plus[at]), int(branches.minus[at])))
            self._by_pair.setdefault((pair[0], pair[1]), []).append(at)

    def standing(self, name: str) -> Standing:
        """How one node stands."""
        node = int(self._solved.node(name)[self._state])
        if self._solved.tied[1, self._state, node]:
            ohm = float(self._solved.path_ohm[self._row, node])
            return Standing(TIED, self._steps(node, self._solved.following[self._row], conductive=True), ohm)
        if int(self._solved.wired.reference[self._row, node]) != self._solved.nodes[EARTH]:
            return Standing(APART, (), float("inf"))
        distance, following = self._coupling
        return Standing(COUPLED, self._steps(node, following[0], conductive=False), float(distance[0, node]))

    @cached_property
    def _coupling(self) -> tuple[Array, Places]:
        """Ways of least impedance by wires of every kind."""
        b, mine = self._solved.branches, self._mine
        one = Branches(b.network[mine] * 0, b.plus[mine], b.minus[mine], b.admittance[mine], b.emf[mine])
        return nearest_path(1, len(self._solved.nodes), one, 1.0 / np.abs(one.admittance))

    def _steps(self, node: int, following: Places, *, conductive: bool) -> tuple[Step, ...]:
        steps = []
        while node != self._solved.nodes[EARTH]:
            after = int(following[node])
            wire = self._solved.wires[self._wire(node, after, conductive)]
            steps.append(Step(wire.kind, wire.owner, self._names[after]))
            node = after
        return tuple(steps)

    def _wire(self, one: int, other: int, conductive: bool) -> int:
        """The wire of least impedance between two nodes."""
        solved = self._solved
        pair = (min(one, other), max(one, other))
        at = [a for a in self._by_pair[pair] if solved.wires[solved.wire_of[a]].conductive or not conductive]
        return int(solved.wire_of[max(at, key=lambda a: abs(solved.branches.admittance[a]))])
