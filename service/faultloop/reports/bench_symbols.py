"""Marks of the bench drawing, told apart by form and not by colour, and their key."""

from typing import Any

from faultloop.reports.lettering import width
from faultloop.reports.sheet import INK, MARGIN, PAPER, PLAIN, Sheet, put
from faultloop.reports.texts import Words

LIVE, PLANNED, QUIET, TINT = "#17405c", "#7a4a00", "#5f6b73", "#f4f7f9"
PLANNED_DASH = "7 4"


def put_node(sheet: Sheet, x: float, y: float, standing: str, *, dangerous: bool = False) -> None:
    """A filled disc is tied to earth, an open one floats, a dashed one is apart; a ring around it is dangerous."""
    style: dict[str, float | str] = {"fill": INK if standing == "tied" else PAPER, "stroke": INK, "stroke_width": 1.5}
    if standing == "apart":
        style["stroke_dasharray"] = "2 2"
    if dangerous:
        put(sheet.sheet, "circle", class_="dangerous", cx=x, cy=y, r=8.2, fill="none", stroke=INK, stroke_width=1.6)
    put(sheet.sheet, "circle", class_=f"node {standing}", cx=x, cy=y, r=4.6, **style)


def put_earth(sheet: Sheet, x: float, y: float) -> None:
    """The sign of earth."""
    for half, down in ((9.0, 0.0), (6.0, 4.0), (3.0, 8.0)):
        put(sheet.sheet, "line", x1=x - half, x2=x + half, y1=y + down, y2=y + down, stroke=INK, stroke_width=1.6)


def put_number(sheet: Sheet, x: float, y: float, number: int, *, planned: bool) -> None:
    """The number of a link at one of its ends."""
    fill, stroke = (PAPER, PLANNED) if planned else (LIVE, LIVE)
    put(sheet.sheet, "circle", class_="link-end", cx=x, cy=y, r=8.0, fill=fill, stroke=stroke, stroke_width=1.6)
    ink = PLANNED if planned else PAPER
    sheet.write(str(number), x, y + 3.6, font_size=10.5, font_weight="bold", text_anchor="middle", fill=ink)


def volts(ends: dict[str, Any] | None, unknown: str) -> str:
    """A potential as it stands beside a node: the greater end where the two differ."""
    if ends is None:
        return unknown
    least, greatest = ends["least"], ends["greatest"]
    told = _volt(greatest) if _volt(least) == _volt(greatest) else f"{_volt(least)}–{_volt(greatest)}"
    return f"{told}\u00a0V"


def _volt(value: float) -> str:
    return f"{value:.0f}" if value >= 9.95 or value < 0.05 else f"{value:.1f}"


def dangerous(state: dict[str, Any], limit_v: float) -> bool:
    """Whether a node that is tied stands above the rule set's limit of touch voltage."""
    ends = state.get("potential_v")
    return bool(state["standing"] == "tied" and ends is not None and ends["greatest"] > limit_v)


def put_key(sheet: Sheet, answer: dict[str, Any], told: Words) -> None:
    """What the marks mean."""
    x, y = MARGIN + 8.0, sheet.y + 8.0
    for standing, ring in (("tied", False), ("tied", True), ("floating", False), ("apart", False)):
        limit = f"{answer['touch_voltage_limit_v']:g}"
        text = told.bench["key-dangerous" if ring else f"key-{standing}"].format(limit=limit)
        needed = 16.0 + width(text, PLAIN) * 0.92 + 22.0
        if x + needed > sheet.width - MARGIN:
            x, y = MARGIN + 8.0, y + 22.0
        put_node(sheet, x, y, standing, dangerous=ring)
        sheet.write(text, x + 14.0, y + 4.0)
        x += needed
    sheet.y = y + 12.0
    if "with_planned_link" in answer:
        sheet.lines(told.bench["key-arrow"], PLAIN)
