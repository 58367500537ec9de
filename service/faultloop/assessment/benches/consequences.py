"""What a planned link would do: its current before it is made, what it ties, and what any device sees of it."""

from dataclasses import dataclass

import numpy as np

from faultloop.assessment.benches.network import Supply
from faultloop.assessment.benches.solving import Ends, SolvedBench
from faultloop.assessment.codes import PlannedLink
from faultloop.assessment.points import Ints


@dataclass(frozen=True, slots=True)
class Planned:
    """The planned link: its current [A] as it is made, and what comes of it in every state, (states,)."""

    current_a: Ends
    codes: Ints

    @property
    def code(self) -> int:
        """What comes of it at the bench as it stands."""
        return int(self.codes[1])


@dataclass(frozen=True, slots=True)
class Seen:
    """What a supply's devices see in one state: the current that it gives, and what of it does not come back [A]."""

    supply: Supply
    given_a: Ends
    residual_a: Ends


def planned_link(solved: SolvedBench) -> Planned | None:
    """The planned link, if there is one."""
    if solved.bench.planned is None:
        return None
    current = solved.through_link(solved.bench.planned)
    surely, perhaps = solved.bench_tied
    tied = PlannedLink.TIED_BEFORE if surely[0] else PlannedLink.TIES
    unsure = np.where(perhaps, PlannedLink.MAY_TIE, PlannedLink.KEEPS)
    return Planned(current, np.where(solved.shorts, PlannedLink.SHORTS, np.where(surely, tied, unsure)))


def seen(solved: SolvedBench, state: int) -> list[Seen]:
    """What the devices of every supply see in a state; a battery has none."""
    current = solved.branch_current()
    return [
        Seen(
            supply,
            _picked(solved.summed(current, *_source(solved, supply)), state),
            _picked(solved.summed(current, *_residual(solved, supply)), state),
        )
        for supply in solved.bench.supplies
        if supply.kind != "battery"
    ]


def _picked(ends: Ends, state: int) -> Ends:
    return Ends(ends.least[state], ends.nominal[state], ends.greatest[state])


def _wires(solved: SolvedBench, supply: str, *kinds: str) -> list[int]:
    return [at for at, wire in enumerate(solved.wires) if wire.owner == supply and wire.kind in kinds]


def _source(solved: SolvedBench, supply: Supply) -> tuple[list[int], list[float]]:
    wires = _wires(solved, supply.id, "source")
    shares = [1.0] * len(wires)
    # What a transformer gives its supply gives too, by the ratio of its windings.
    for other in solved.bench.supplies:
        if other.fed_from == supply.id:
            behind = _wires(solved, other.id, "source")
            wires += behind
            shares += [solved.wires[at].emf_v / other.primary_v for at in behind]
    return wires, shares


def _residual(solved: SolvedBench, supply: Supply) -> tuple[list[int], list[float]]:
    """What goes out by the line and does not come back by the neutral, with what crosses a transformer's windings.

    A transformer fed from here takes as much as it gives back, but for what crosses between its windings: whatever
    happens behind it otherwise is no residual current ahead of it.
    """
    if supply.kind != "earthed":
        return [], []
    # Both wires are counted from the supply's pole to earth: their sum is what comes back by neither.
    own = _wires(solved, supply.id, "source", "neutral")
    windings = [
        at
        for other in solved.bench.supplies
        if other.fed_from == supply.id and not other.screen
        for at in _wires(solved, other.id, "interwinding")
    ]
    return [*own, *windings], [1.0] * (len(own) + len(windings))
