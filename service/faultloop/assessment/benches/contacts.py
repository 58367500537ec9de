"""What a person may touch at a bench: poles and accessible parts to earth with one hand, two of them with both."""

from dataclasses import dataclass
from itertools import combinations

from faultloop.assessment.benches.network import EARTH, Bench, Item

MOST_PARTS_PAIRED = 12


@dataclass(frozen=True, slots=True)
class Contact:
    """Two nodes that a body may join, and how that comes about."""

    kind: str
    one: str
    other: str

    @property
    def single(self) -> bool:
        """Whether one hand is enough: the other end is earth, which everybody stands on."""
        return EARTH in (self.one, self.other)


def accessible(bench: Bench) -> list[str]:
    """Conductive parts that may be touched: cases of class I, signal grounds, what a filter or a clip ends at."""
    ends = {end for link in bench.all_links for end in (link.one, link.other)}
    parts = []
    for item in bench.items:
        if item.ground != "none":
            parts.append(item.signal_ground)
        if item.protection_class == "I" or item.case in ends or _live_case(item):
            parts.append(item.case)
    return sorted(parts)


def _live_case(item: Item) -> bool:
    return item.ground == "none" and (item.filter_nf is not None or item.live_chassis is not None)


def usual_contacts(bench: Bench) -> list[Contact]:
    """The contacts that are looked at without being asked for."""
    separated = [supply for supply in bench.supplies if supply.kind == "separated"]
    parts = accessible(bench)
    found = [Contact("pole-to-earth", pole, EARTH) for supply in separated for pole in (supply.l1, supply.l2)]
    found += [Contact("part-to-earth", part, EARTH) for part in parts]
    found += [Contact("pole-to-pole", supply.l1, supply.l2) for supply in separated]
    found += [Contact("part-to-part", *pair) for pair in combinations(parts[:MOST_PARTS_PAIRED], 2)]
    return found


def worked_at(bench: Bench) -> list[Contact]:
    """Poles of the items that somebody works at, wherever these are fed from."""
    items = [item for item in bench.items if bench.under_test(item) and bench.supply(item.fed_by).kind != "battery"]
    return [Contact("pole-to-earth", item.pole(which), EARTH) for item in items for which in ("L1", "L2")]
