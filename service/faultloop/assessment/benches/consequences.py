"""What a planned link would do: its current before it is made, what it ties, and what any device sees of it."""

from dataclasses import dataclass

from faultloop.assessment.benches.network import Supply
from faultloop.assessment.benches.solving import Ends, SolvedBench
from faultloop.assessment.points import PlannedLink


@dataclass(frozen=True, slots=True)
class Planned:
    """The planned link: its current [A] as it is made, and what comes of it."""

    current_a: Ends
    code: int


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
    (found, after), (_, perhaps) = solved.bench_tied[:, :2]
    if after:
        return Planned(current, PlannedLink.TIED_BEFORE if found else PlannedLink.TIES)
    return Planned(current, PlannedLink.MAY_TIE if perhaps else PlannedLink.KEEPS)


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
    return wires, [1.0] * len(wires)


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
