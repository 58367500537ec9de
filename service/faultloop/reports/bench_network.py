"""The network of a bench drawn: lines of the supplies, cards of the items, links between their nodes."""

from typing import Any

from faultloop.assessment.benches.network import EARTH, Bench, Link
from faultloop.reports.bench_layout import (
    CARD,
    CARD_HEIGHT,
    LEFT,
    STEP,
    TERMINAL,
    WIDTH,
    Band,
    Card,
    Layout,
    drops,
    terminals,
)
from faultloop.reports.bench_symbols import (
    LIVE,
    PLANNED,
    PLANNED_DASH,
    QUIET,
    TINT,
    dangerous,
    put_earth,
    put_node,
    put_number,
    volts,
)
from faultloop.reports.lettering import width, wrapped
from faultloop.reports.sheet import GREY, INK, MARGIN, PAPER, PLAIN, Sheet, number, put
from faultloop.reports.texts import Words

_SMALL, _BOLD = 10.5, "bold"


class _Network:
    """One network being drawn."""

    def __init__(self, sheet: Sheet, bench: Bench, layout: Layout, answer: dict[str, Any], told: Words) -> None:
        self.sheet, self.bench, self.layout, self.told = sheet, bench, layout, told
        self.nodes = {node["node"]: node for node in answer["nodes"]}
        self.planned, self.limit_v = "with_planned_link" in answer, answer["touch_voltage_limit_v"]
        self.ends: dict[str, int] = {}

    def potential(self, name: str) -> str:
        """A node's potential as found, and behind an arrow with the planned link where that changes it."""
        node = self.nodes[name]
        unknown = self.told.bench["unknown"]
        before = volts(node["as_found"].get("potential_v"), unknown)
        after = volts(node["with_planned_link"].get("potential_v"), unknown) if self.planned else before
        return before if before == after else f"{before}\u00a0→\u00a0{after}"

    def state(self, name: str) -> dict[str, Any]:
        """How a node stands in the state that is judged."""
        state: dict[str, Any] = self.nodes[name]["with_planned_link" if self.planned else "as_found"]
        return state

    def node(self, name: str, x: float, y: float) -> None:
        """The mark of a node."""
        state = self.state(name)
        put_node(self.sheet, x, y, state["standing"], dangerous=dangerous(state, self.limit_v))

    def line(self, x1: float, y1: float, x2: float, y2: float, **style: float | str) -> None:
        """A straight line."""
        drawn: dict[str, float | str] = {"stroke": INK, "stroke_width": 1.2}
        put(self.sheet.sheet, "line", x1=x1, y1=y1, x2=x2, y2=y2, **(drawn | style))


def put_network(sheet: Sheet, bench: Bench, layout: Layout, answer: dict[str, Any], told: Words) -> None:
    """Draw the network at its place."""
    network = _Network(sheet, bench, layout, answer, told)
    for at, band in enumerate(layout.bands):
        following = layout.bands[at + 1] if at + 1 < len(layout.bands) else None
        _put_band(network, band, following)
    _put_feeds(network)
    _put_rail(network)
    links = list(enumerate(bench.all_links))
    routes = [_put_link(network, at + 1, link, planned=link is bench.planned) for at, link in links]
    # Numbers stand above every line.
    for at, (link, ends) in enumerate(zip(bench.all_links, routes, strict=True)):
        for x, y in ends:
            put_number(sheet, x, y, at + 1, planned=link is bench.planned)


def _put_band(network: _Network, band: Band, following: Band | None) -> None:
    supply = band.supply
    for pole, y in ((supply.l1, band.l1), (supply.l2, band.l2)):
        network.line(LEFT - 14.0, y, band.right, y, stroke=LIVE, stroke_width=2.2)
        if band.first:
            network.node(pole, LEFT - 14.0, y)
        if following is not None and following.supply.id == supply.id:
            down = following.l1 if pole == supply.l1 else following.l2
            x = LEFT - 14.0 - (10.0 if pole == supply.l1 else 5.0)
            for height in (y, down):
                network.line(x, height, LEFT - 14.0, height, stroke=LIVE, stroke_width=1.2)
            network.line(x, y, x, down, stroke=LIVE, stroke_width=1.2)
    if band.first:
        _put_supply(network, band)
    _put_contacts(network, band)
    for card in band.cards:
        _put_card(network, band, card)


def _put_supply(network: _Network, band: Band) -> None:
    """Name and kind of a supply above its lines, its potentials beside them."""
    supply, sheet = band.supply, network.sheet
    kind = network.told.bench[f"supply-{supply.kind}"].format(voltage=f"{supply.voltage_v:g}")
    sheet.write(supply.id, MARGIN, band.l1 - 13.0, font_size=PLAIN, font_weight=_BOLD)
    sheet.write(kind, MARGIN + width(supply.id, PLAIN * 1.15) + 10.0, band.l1 - 13.0, font_size=_SMALL, fill=QUIET)
    for name, pole, y in (("L1", supply.l1, band.l1), ("L2", supply.l2, band.l2)):
        if supply.kind == "earthed" and name == "L2":
            name = "N"
        sheet.write(name, MARGIN, y + 4.0, font_size=_SMALL, font_weight=_BOLD)
        sheet.write(network.potential(pole), MARGIN + 20.0, y + 4.0, font_size=_SMALL)


def _put_contacts(network: _Network, band: Band) -> None:
    """The line of the outlets' earth contacts, and what it is joined to."""
    supply = band.supply
    exposed = [card for card in band.cards if card.item.protection_class == "I"]
    if not exposed:
        return
    y = band.contacts
    if supply.kind == "separated" and supply.bonding == "none":
        words = network.told.bench["contacts-none"]
    else:
        own = supply.kind == "separated" and supply.bonding == "non-earthed"
        dashes = {"stroke_dasharray": "10 3"} if own else {}
        network.line(LEFT - 14.0, y, exposed[-1].x + CARD / 2, y, stroke=INK, stroke_width=1.6, **dashes)
        for card in exposed:
            network.line(card.x + CARD / 2, y, card.x + CARD / 2, card.y + CARD_HEIGHT, stroke_width=1.6)
        if not own:
            network.line(LEFT - 34.0, y, LEFT - 14.0, y, stroke_width=1.6)
            put_earth(network.sheet, LEFT - 34.0, y)
        elif band.first:
            network.node(supply.bond, LEFT - 14.0, y)
        words = network.told.bench["contacts-non-earthed" if own else "contacts-earthed"]
    if band.first:
        for at, line in enumerate(wrapped(words, 9.0, LEFT - 60.0)):
            network.sheet.write(line, MARGIN, y - 8.0 + 11.0 * at, font_size=9.0, fill=QUIET)


def _put_card(network: _Network, band: Band, card: Card) -> None:
    item, sheet = card.item, network.sheet
    for x, y in zip(drops(card), (band.l1, band.l2), strict=True):
        network.line(x, y, x, card.y, stroke=LIVE, stroke_width=1.4)
        put(sheet.sheet, "circle", cx=x, cy=y, r=2.6, fill=LIVE)
    put(
        sheet.sheet, "rect", class_="item", x=card.x, y=card.y, width=CARD, height=CARD_HEIGHT, rx=7, fill=TINT,
        stroke=INK, stroke_width=2.0 if network.bench.under_test(item) else 1.0,
    )  # fmt: skip
    lines = wrapped(item.label, 11.5 * 1.1, CARD - 16.0)
    if len(lines) > 2:
        lines = [lines[0], lines[1][:-1] + "…"]
    y = card.y + 4.0
    for line in lines:
        y += 13.5
        sheet.write(line, card.x + 9.0, y, font_size=11.5, font_weight=_BOLD)
    role = "under-test" if network.bench.under_test(item) else "class" if item.role is None else item.role
    words = network.told.bench[role]
    sheet.write(words.format(protection=item.protection_class), card.x + 9.0, y + 13.0, font_size=9.5, fill=QUIET)
    _put_chassis(network, card)
    for at, terminal in enumerate(terminals(item)):
        y = card.y + TERMINAL + STEP * at
        network.node(terminal, card.x + 15.0, y)
        part = network.told.bench["case" if terminal == item.case else "signal-ground"]
        sheet.write(part, card.x + 29.0, y - 2.0, font_size=9.5)
        sheet.write(network.potential(terminal), card.x + 29.0, y + 9.5, font_size=9.5, font_weight=_BOLD)


def _put_chassis(network: _Network, card: Card) -> None:
    """The joint between a pole and a live chassis, beside the card; dashed to both poles where nobody described it."""
    item = card.item
    poles = ("L1", "L2") if item.chassis_open else (item.live_chassis,) if item.live_chassis else ()
    y = card.y + TERMINAL + STEP * terminals(item).index(item.chassis)
    for at, pole in enumerate(poles):
        x, height = drops(card)[0 if pole == "L1" else 1], card.y - 6.0 - 5.0 * at
        side = card.x - 3.0
        style = {"stroke_dasharray": "3 3"} if item.chassis_open else {}
        path = f"M{number(x)} {number(height)}H{number(side)}V{number(y)}H{number(card.x + 15.0)}"
        name = "live-chassis-perhaps" if item.chassis_open else "live-chassis"
        put(network.sheet.sheet, "path", class_=name, d=path, fill="none", stroke=LIVE, stroke_width=1.8, **style)
        put(network.sheet.sheet, "circle", cx=x, cy=height, r=2.6, fill=LIVE)


def _put_feeds(network: _Network) -> None:
    """What feeds the primary of each transformer: a line at the left edge, its arrow at the supply that is fed."""
    heads = {band.supply.id: band.l1 - 17.0 for band in network.layout.bands if band.first}
    fed = [supply for supply in network.bench.supplies if supply.fed_from is not None]
    for at, supply in enumerate(fed):
        x, begin, end = 4.0 + 2.0 * (at % 4), heads[supply.fed_from or supply.id], heads[supply.id]
        group = put(network.sheet.sheet, "g", class_="feed")
        put(group, "title").text = f"{supply.fed_from} \u2192 {supply.id}"
        path = f"M{number(MARGIN - 2.0)} {number(begin)}H{number(x)}V{number(end)}H{number(MARGIN - 5.0)}"
        put(group, "path", d=path, fill="none", stroke=QUIET, stroke_width=1.2)
        put(group, "path", d=f"M{number(MARGIN - 1.0)} {number(end)}l-5 -3v6z", fill=QUIET)


def _put_rail(network: _Network) -> None:
    """Earth below everything."""
    y = network.layout.earth
    network.line(MARGIN + 40.0, y, WIDTH - MARGIN, y, stroke=GREY, stroke_width=3.0)
    put_earth(network.sheet, MARGIN + 24.0, y)
    network.line(MARGIN + 24.0, y, MARGIN + 40.0, y, stroke=GREY, stroke_width=3.0)
    network.sheet.write(network.told.bench["earth"], WIDTH - MARGIN, y + 14.0, font_size=_SMALL, text_anchor="end")


def _put_link(network: _Network, at: int, link: Link, *, planned: bool) -> tuple[tuple[float, float], ...]:
    """A line along the lanes between cards, the planned one dashed; gives its two ends."""
    points = _route(network, at, link.one, link.other)
    ink, thick = (PLANNED, 2.6) if planned else (LIVE, 2.0)
    dashes = {"stroke_dasharray": PLANNED_DASH} if planned else {}
    group = put(network.sheet.sheet, "g", class_="planned-link" if planned else "link", fill="none")
    path = _rounded(points)
    put(group, "path", d=path, stroke=PAPER, stroke_width=thick + 3.2)
    put(group, "path", d=path, stroke=ink, stroke_width=thick, **dashes)
    return points[0], points[-1]


def _route(network: _Network, at: int, one: str, other: str) -> list[tuple[float, float]]:
    """Corners of a link: out to the lane beside each end, and level above the row of the second."""
    if EARTH in (one, other):
        named = other if one == EARTH else one
        x, y, lane, _ = _end(network, named, at)
        return [(x, y), (lane, y), (lane, network.layout.earth)]
    x1, y1, lane1, _ = _end(network, one, at)
    x2, y2, lane2, level = _end(network, other, at)
    if lane1 == lane2:
        return [(x1, y1), (lane1, y1), (lane1, y2), (x2, y2)]
    level += 4.0 * (at % 4)
    return [(x1, y1), (lane1, y1), (lane1, level), (lane2, level), (lane2, y2), (x2, y2)]


def _end(network: _Network, name: str, at: int) -> tuple[float, float, float, float]:
    """Where a link ends, beside the links that end there already; its upright lane, its level one."""
    place = network.layout.places[name]
    taken = network.ends.get(name, 0)
    network.ends[name] = taken + 1
    lane = place.lane + 4.0 * (at % 4 - 1.5)
    if place.lane < place.x or place.lane == place.x:
        return place.x, place.y, place.x, place.level
    inward = -18.0 if name.endswith((".case", ".signal_ground")) else 18.0
    return place.x + inward * taken, place.y, lane, place.level


def _rounded(points: list[tuple[float, float]]) -> str:
    """A path through corners that are rounded off."""
    points = [point for at, point in enumerate(points) if at == 0 or point != points[at - 1]]
    path = f"M{number(points[0][0])} {number(points[0][1])}"
    for before, corner, after in zip(points, points[1:], points[2:], strict=False):
        near, far = (_toward(corner, end, 6.0) for end in (before, after))
        path += f"L{number(near[0])} {number(near[1])}"
        path += f"Q{number(corner[0])} {number(corner[1])} {number(far[0])} {number(far[1])}"
    return path + f"L{number(points[-1][0])} {number(points[-1][1])}"


def _toward(corner: tuple[float, float], end: tuple[float, float], most: float) -> tuple[float, float]:
    """A point a little way from a corner towards an end."""
    across, down = end[0] - corner[0], end[1] - corner[1]
    length = abs(across) + abs(down)
    share = min(most, length / 2.0) / length if length else 0.0
    return corner[0] + across * share, corner[1] + down * share
