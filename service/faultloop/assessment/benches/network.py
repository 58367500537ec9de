"""A bench as a graph: supplies, the items that they feed, and the links between items and earth."""

from dataclasses import dataclass, replace
from typing import Literal

EARTH = "earth"
OwnKind = Literal["separated", "earthed", "battery"]
Bonding = Literal["none", "non-earthed", "earthed"]
Ground = Literal["none", "earthed", "floating", "resistance"]


@dataclass(frozen=True, slots=True)
class Span:
    """A value between two ends; `stated` is false where it was taken because nothing was said."""

    least: float
    nominal: float
    greatest: float
    stated: bool = True

    @property
    def open(self) -> bool:
        """Whether its ends differ, so that both must be solved."""
        return self.least != self.greatest


@dataclass(frozen=True, slots=True)
class Supply:
    """A supply: separated by a transformer, earthed, or a battery; its voltage is nominal."""

    id: str
    kind: OwnKind
    voltage_v: float
    source_ohm: Span
    bonding: Bonding = "none"
    cable_nf: Span | None = None
    interwinding_nf: Span | None = None
    screen: bool = False
    primary_v: float = 0.0
    fed_from: str | None = None

    @property
    def l1(self) -> str:
        """Name of its first pole."""
        return f"{self.id}.L1"

    @property
    def l2(self) -> str:
        """Name of its second pole."""
        return f"{self.id}.L2"

    @property
    def bond(self) -> str:
        """Name of what the earth contacts of its outlets are joined to."""
        return f"{self.id}.bonding"


@dataclass(frozen=True, slots=True)
class Stored:
    """A capacitor that stays charged when everything is unplugged."""

    capacitance_uf: float
    voltage_v: float
    discharge_ohm: float | None


@dataclass(frozen=True, slots=True)
class Item:
    """An item of equipment as it stands at the bench."""

    id: str
    label: str
    fed_by: str
    protection_class: Literal["I", "II", "III"]
    filter_nf: Span | None
    ground: Ground = "none"
    ground_ohm: Span | None = None
    ground_nf: Span | None = None
    live_chassis: Literal["L1", "L2"] | None = None
    chassis_open: bool = False
    chassis_ohm: Span | None = None
    load_ohm: Span | None = None
    stored: Stored | None = None
    role: Literal["under-test", "instrument"] | None = None

    @property
    def case(self) -> str:
        """Name of its case."""
        return f"{self.id}.case"

    @property
    def signal_ground(self) -> str:
        """Name of its signal ground."""
        return f"{self.id}.signal_ground"

    @property
    def filtered_to(self) -> str:
        """Where its line filter and a live chassis end."""
        return self.case if self.protection_class == "I" or self.ground == "none" else self.signal_ground

    @property
    def chassis(self) -> str:
        """What a live chassis is: the signal ground where there is one."""
        return self.case if self.ground == "none" else self.signal_ground

    def pole(self, which: str) -> str:
        """Name of one of its own poles."""
        return f"{self.id}.{which}"


@dataclass(frozen=True, slots=True)
class Link:
    """Something conductive between two nodes."""

    id: str
    kind: str
    one: str
    other: str
    ohm: Span


@dataclass(frozen=True, slots=True)
class Bench:
    """Everything at one bench; ids are told apart, and no list's order means anything."""

    frequency_hz: float
    supplies: tuple[Supply, ...]
    items: tuple[Item, ...]
    links: tuple[Link, ...]
    planned: Link | None

    def in_order(self) -> "Bench":
        """The same bench with its parts in the order of their ids."""
        supplies = tuple(sorted(self.supplies, key=lambda part: part.id))
        items = tuple(sorted(self.items, key=lambda part: part.id))
        links = tuple(sorted(self.links, key=lambda part: part.id))
        return replace(self, supplies=supplies, items=items, links=links)

    @property
    def all_links(self) -> tuple[Link, ...]:
        """The links that are made, and the planned one behind them."""
        return (*self.links, self.planned) if self.planned else self.links

    def supply(self, of: str) -> Supply:
        """A supply by its id."""
        return next(supply for supply in self.supplies if supply.id == of)

    def under_test(self, item: Item) -> bool:
        """Whether somebody works at the item's live parts: as stated, else where it is clipped to, charged or live."""
        if item.role is not None:
            return item.role == "under-test"
        poles = {item.pole("L1"), item.pole("L2")}
        linked = any(end in poles for link in self.all_links for end in (link.one, link.other))
        return linked or item.live_chassis is not None or item.stored is not None


def node_names(bench: Bench) -> list[str]:
    """Every name that a link or a contact may end at."""
    names = [EARTH]
    for supply in bench.supplies:
        names += [supply.l1, supply.l2]
        if supply.kind == "separated" and supply.bonding != "none":
            names.append(supply.bond)
    for item in bench.items:
        names += [item.case, item.pole("L1"), item.pole("L2")]
        if item.ground != "none":
            names.append(item.signal_ground)
    return names
