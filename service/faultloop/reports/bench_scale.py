"""Contact currents on one logarithmic line, with the lines of the rule set that they are held against."""

from typing import Any

from faultloop.assessment.benches.network import EARTH
from faultloop.reports.bench_symbols import PLANNED, QUIET
from faultloop.reports.lettering import clean, shortened, width
from faultloop.reports.scale import Axis, ampere
from faultloop.reports.sheet import FAINT, GREY, INK, MARGIN, PAPER, PLAIN, Sheet, put
from faultloop.reports.texts import Words

MOST_SHOWN, STEP = 7, 21.0
LEFT, MILLI, LEAST_SHOWN_MA = 360.0, 1e-3, 0.01


def put_scale(sheet: Sheet, answer: dict[str, Any], told: Words) -> None:
    """The contacts that carry most: as found an open mark, with the planned link a filled one."""
    shown = _shown(answer)
    if not shown:
        return
    sheet.y += 10.0
    sheet.lines(told.bench["contacts"], PLAIN, font_weight="bold", after=20.0)
    axis = Axis(-5, 0, LEFT, sheet.width - MARGIN - 30.0 - LEFT, ampere, room=40)
    top, bottom = sheet.y, sheet.y + STEP * len(shown)
    _put_lines(sheet, axis, top, bottom, answer, told)
    for at, contact in enumerate(shown):
        _put_contact(sheet, axis, top + STEP * (at + 0.5), contact, told)
    sheet.y = bottom + 20.0
    if "with_planned_link" in answer:
        sheet.lines(told.bench["contacts-key"], PLAIN)


def _shown(answer: dict[str, Any]) -> list[dict[str, Any]]:
    """The contacts that carry most, at most so many; one of both poles always."""
    judged = "with_planned_link" if "with_planned_link" in answer else "as_found"
    worth = [contact for contact in answer["contacts"] if _greatest(contact) >= LEAST_SHOWN_MA]
    ranked = sorted(worth, key=lambda contact: (-contact[judged]["current_ma"]["greatest"], -_greatest(contact)))
    chosen = ranked[:MOST_SHOWN]
    poles = [contact for contact in ranked if contact["kind"] == "pole-to-pole" and contact not in chosen]
    return chosen + poles[:1]


def _greatest(contact: dict[str, Any]) -> float:
    """The greatest current of a contact in any state that is told [mA]."""
    states = [contact[field] for field in ("as_found", "with_planned_link") if field in contact]
    return float(max(state["current_ma"]["greatest"] for state in states))


def _put_lines(sheet: Sheet, axis: Axis, top: float, bottom: float, answer: dict[str, Any], told: Words) -> None:
    for decade in range(axis.low, axis.high + 1):
        x = axis.at(10.0**decade)
        put(sheet.sheet, "line", x1=x, x2=x, y1=top, y2=bottom, stroke=FAINT, stroke_width=0.8)
        style = {"text_anchor": "middle", "fill": QUIET, "class_": "tick"}
        sheet.write(ampere(10.0**decade), x, bottom + 14.0, font_size=10, **style)
    for at, (name, value) in enumerate(answer["lines_ma"].items()):
        x = axis.at(value * MILLI)
        put(
            sheet.sheet, "line", x1=x, x2=x, y1=top - 4.0, y2=bottom, stroke=INK, stroke_width=1.0,
            stroke_dasharray=("2 3", "6 3", "10 3 2 3")[at],
        )  # fmt: skip
        words = told.bench[f"line-{name}"].format(value=f"{value:g}")
        anchor, aside = (("end", -4.0), ("middle", 0.0), ("start", 4.0))[at]
        sheet.write(words, x + aside, top - 8.0, font_size=9.5, text_anchor=anchor)


def _put_contact(sheet: Sheet, axis: Axis, y: float, contact: dict[str, Any], told: Words) -> None:
    _put_name(sheet, y, [told.bench["earth"] if end == EARTH else end for end in (contact["from"], contact["to"])])
    states = [contact[field]["current_ma"] for field in ("as_found", "with_planned_link") if field in contact]
    places = [axis.at(max(state["greatest"] * MILLI, axis.least)) for state in states]
    put(sheet.sheet, "line", x1=LEFT, x2=axis.start + axis.length, y1=y, y2=y, stroke=FAINT, stroke_width=0.8)
    for state in states:
        least, greatest = (axis.at(max(state[end] * MILLI, axis.least)) for end in ("least", "greatest"))
        if greatest - least > 1.0:
            put(sheet.sheet, "line", x1=least, x2=greatest, y1=y, y2=y, stroke=GREY, stroke_width=5.0)
    if len(places) > 1 and abs(places[1] - places[0]) > 14.0:
        _put_arrow(sheet, places[0], places[1], y)
    put(sheet.sheet, "circle", class_="as-found", cx=places[0], cy=y, r=4.6, fill=PAPER, stroke=INK, stroke_width=1.6)
    if len(places) > 1:
        put(sheet.sheet, "circle", class_="with-planned-link", cx=places[1], cy=y, r=4.0, fill=PLANNED)
    most = states[-1]["greatest"]
    current = f"{most:.3g}\u00a0mA" if most >= LEAST_SHOWN_MA else f"< {LEAST_SHOWN_MA:g}\u00a0mA"
    sheet.write(current, LEFT - 12.0, y + 4.0, font_size=11, font_weight="bold", text_anchor="end")


def _put_name(sheet: Sheet, y: float, ends: list[str]) -> None:
    """The two ends of a contact, shortened to stand clear of its current; in full as its title."""
    room = LEFT - 12.0 - width("< 0.01\u00a0mA", 11 * 1.15) - 8.0 - MARGIN
    full = " – ".join(ends)
    half = (room - width(" – ", 11)) / 2.0
    shown = full if width(full, 11) <= room else " – ".join(_cut(ends, half))
    text = put(sheet.sheet, "text", class_="contact", x=MARGIN, y=y + 4.0, font_size=11)
    text.text = clean(shown)
    if shown != full:
        put(text, "title").text = clean(full)


def _cut(ends: list[str], half: float) -> list[str]:
    """Both ends in the room of two halves, the one with what the other leaves."""
    spare = [max(0.0, half - width(end, 11)) for end in ends]
    return [shortened(end, 11, half + other) for end, other in zip(ends, reversed(spare), strict=True)]


def _put_arrow(sheet: Sheet, begin: float, end: float, y: float) -> None:
    toward = 1.0 if end > begin else -1.0
    tip = end - 6.0 * toward
    put(sheet.sheet, "line", x1=begin, x2=tip, y1=y, y2=y, stroke=PLANNED, stroke_width=1.8)
    head = f"M{tip:.2f} {y:.2f}l{-7.0 * toward:.2f} -3.5v7z"
    put(sheet.sheet, "path", d=head, fill=PLANNED)
