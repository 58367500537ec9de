"""Where everything of a bench stands on its drawing: supplies one below the other, items hanging on their lines."""

from dataclasses import dataclass, field

from faultloop.assessment.benches.network import EARTH, Bench, Item, Supply

WIDTH, LEFT = 1024.0, 178.0
CARD, GAP, ROW = 144.0, 22.0, 5
CARD_HEIGHT, DROP, BUS = 112.0, 56.0, 20.0
FOOT, BETWEEN = 24.0, 30.0
TERMINAL, STEP = 66.0, 27.0


@dataclass(frozen=True, slots=True)
class Place:
    """Where a link ends at a node, the upright lane beside it, and the level lane above its row."""

    x: float
    y: float
    lane: float
    level: float


@dataclass(frozen=True, slots=True)
class Card:
    """One item: its corner."""

    item: Item
    x: float
    y: float


@dataclass(slots=True)
class Band:
    """One row of cards on the lines of a supply: the heights of its lines, and of its earth contacts if it has any."""

    supply: Supply
    first: bool
    top: float
    cards: list[Card] = field(default_factory=list)

    @property
    def l1(self) -> float:
        """Height of the first pole's line."""
        return self.top

    @property
    def l2(self) -> float:
        """Height of the second pole's line."""
        return self.top + BUS

    @property
    def contacts(self) -> float:
        """Height of the line of earth contacts."""
        return self.top + DROP + CARD_HEIGHT + FOOT - 6.0

    @property
    def right(self) -> float:
        """Where its lines end."""
        return self.cards[-1].x + CARD if self.cards else LEFT + CARD


@dataclass(slots=True)
class Layout:
    """All rows, the rail of earth below them, and the place of every node by name."""

    bands: list[Band]
    earth: float
    places: dict[str, Place]


def laid_out(bench: Bench, top: float) -> Layout:
    """Give everything its place, from a height downwards."""
    bands, places, y = [], dict[str, Place](), top
    order = {"separated": 0, "battery": 1, "earthed": 2}
    for supply in sorted(bench.supplies, key=lambda s: (order[s.kind], s.id)):
        items = [item for item in bench.items if item.fed_by == supply.id]
        rows = [items[at : at + ROW] for at in range(0, len(items), ROW)] or [[]]
        for at, row in enumerate(rows):
            band = Band(supply, at == 0, y + 14.0)
            for column, item in enumerate(row):
                band.cards.append(Card(item, LEFT + 6.0 + column * (CARD + GAP), band.top + DROP))
            bands.append(band)
            y = (band.contacts if row else band.l2) + BETWEEN
    for band in bands:
        _place(places, band)
    places[EARTH] = Place(LEFT, y + 4.0, LEFT, y + 4.0)
    return Layout(bands, y + 4.0, places)


def drops(card: Card) -> tuple[float, float]:
    """Where the leads of an item's two poles come down."""
    return card.x + 18.0, card.x + 42.0


def terminals(item: Item) -> list[str]:
    """What a card shows inside: its signal ground and its case."""
    return [*([item.signal_ground] if item.ground != "none" else []), item.case]


def _place(places: dict[str, Place], band: Band) -> None:
    supply, level = band.supply, band.l2 + 12.0
    if band.first:
        for name, y in ((supply.l1, band.l1), (supply.l2, band.l2), (supply.bond, band.contacts)):
            places[name] = Place(LEFT - 8.0, y, LEFT - 8.0, level)
    for card in band.cards:
        lane = card.x + CARD + GAP / 2.0
        first, second = drops(card)
        places[card.item.pole("L1")] = Place(first, card.y - 12.0, lane, level)
        places[card.item.pole("L2")] = Place(second, card.y - 12.0, lane, level)
        for at, name in enumerate(terminals(card.item)):
            places[name] = Place(card.x + CARD - 4.0, card.y + TERMINAL + STEP * at, lane, level)
