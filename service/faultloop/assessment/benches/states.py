"""The bench as found, with the planned link, and with every single thing changed: each is one state."""

from dataclasses import dataclass

import numpy as np
from numpy.typing import NDArray

from faultloop.assessment.benches.network import Bench, Item

AS_FOUND, TO_EARTHED, TO_OWN, UNPLUGGED = range(4)
REMOVED, MADE, BY_PROBE = range(3)
BONDED, LIFTED = range(2)
# Changes that are looked at for the bench without the planned link too.
STANDING = ("unplug", "lift-bonding", "move-instruments")
# How much a change takes, from the hand's turn to another outlet or transformer (common practice).
INTRUSION = {
    "remove-link": 0,
    "unplug": 1,
    "differential-probe": 2,
    "move-to-earthed": 3,
    "lift-bonding": 4,
    "move-instruments": 5,
    "move-to-own": 6,
}


@dataclass(frozen=True, slots=True)
class State:
    """One state of the bench: what was changed, at which part, and where every part then stands."""

    kind: str
    subject: str
    places: tuple[int, ...]
    links: tuple[int, ...]
    bonding: tuple[int, ...]
    planned: bool = False


@dataclass(frozen=True, slots=True)
class States:
    """All states: as found, with the planned link if there is one, and single changes of the one and of the other.

    `found_changes` are changes of the bench as found, `changes` those of its base: with the planned link, if any.
    """

    every: tuple[State, ...]
    base: int
    found_changes: tuple[int, ...]
    changes: tuple[int, ...]

    def column(self, what: str) -> NDArray[np.int64]:
        """Where the parts of one sort stand, (states, parts)."""
        return np.array([getattr(state, what) for state in self.every], np.int64).reshape(len(self.every), -1)


def states_of(bench: Bench) -> States:
    """List all states; a change is made to the bench with the planned link, where there is one."""
    places, bonding = (AS_FOUND,) * len(bench.items), (BONDED,) * len(bench.supplies)
    made = (MADE,) * len(bench.links)
    found = State("as-found", "", places, (*made, REMOVED) if bench.planned else made, bonding)
    if bench.planned is None:
        changes = _changes(bench, found)
        standing = tuple(1 + at for at, state in enumerate(changes) if state.kind in STANDING)
        return States((found, *changes), 0, standing, tuple(range(1, 1 + len(changes))))
    base = State("planned-link", bench.planned.id, places, (*made, MADE), bonding, planned=True)
    without = [state for state in _changes(bench, found) if state.kind in STANDING]
    changes = _changes(bench, base)
    ahead = 2 + len(without)
    every = (found, base, *without, *changes)
    return States(every, 1, tuple(range(2, ahead)), tuple(range(ahead, ahead + len(changes))))


def _changes(bench: Bench, base: State) -> list[State]:
    """Every single change of one state, and the one that moves all instruments together."""
    found = []

    def changed(kind: str, subject: str, **parts: tuple[int, ...]) -> None:
        kept = {"places": base.places, "links": base.links, "bonding": base.bonding} | parts
        planned = bench.planned is not None and kept["links"][-1] == MADE
        found.append(State(kind, subject, planned=planned, **kept))

    for at, link in enumerate(bench.all_links):
        if base.links[at] == MADE:
            changed("remove-link", link.id, links=_put(base.links, at, REMOVED))
            if link.kind == "probe-clip":
                changed("differential-probe", link.id, links=_put(base.links, at, BY_PROBE))
    for at, item in enumerate(bench.items):
        kind = bench.supply(item.fed_by).kind
        changed("unplug", item.id, places=_put(base.places, at, UNPLUGGED))
        if kind == "separated":
            changed("move-to-earthed", item.id, places=_put(base.places, at, TO_EARTHED))
        if kind == "earthed" or (kind == "separated" and _shares(bench, item)):
            changed("move-to-own", item.id, places=_put(base.places, at, TO_OWN))
    for at, supply in enumerate(bench.supplies):
        if supply.bonding == "earthed":
            changed("lift-bonding", supply.id, bonding=_put(base.bonding, at, LIFTED))
    instruments = [at for at, item in enumerate(bench.items) if _instrument(bench, item)]
    if len(instruments) > 1:
        places = tuple(TO_EARTHED if at in instruments else place for at, place in enumerate(base.places))
        changed("move-instruments", "", places=places)
    return found


def _instrument(bench: Bench, item: Item) -> bool:
    """Whether an item stands on a separated outlet without being worked at."""
    return bench.supply(item.fed_by).kind == "separated" and not bench.under_test(item)


def _shares(bench: Bench, item: Item) -> bool:
    return sum(other.fed_by == item.fed_by for other in bench.items) > 1


def _put(parts: tuple[int, ...], at: int, code: int) -> tuple[int, ...]:
    return (*parts[:at], code, *parts[at + 1 :])
