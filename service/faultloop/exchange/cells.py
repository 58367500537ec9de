"""Cells as instruments print them -> a value, a bound, nothing, or a question; never a zero, never converted."""

import re
from dataclasses import dataclass

MISSING = {"", "-", "--", "---", "n/a", "na", "n.a.", "nt", "n.t.", "not tested", "lim"}
OVER_RANGE = {"ol", "ofl", "o.l", "over", "overrange", "over-range"}
_NUMBER = re.compile(r"([<>]?)\s*(\d+(?:\.\d+)?)\s*(.*)", re.ASCII)
_UNITS = {
    "ohm": {"ohm", "ohms", "Ω"},
    "ms": {"ms"},
    "ma": {"mA"},
    "megohm": {"Mohm", "MΩ", "megohm"},
    "v": {"V"},
}


@dataclass(frozen=True, slots=True)
class Cell:
    """What a cell says: a value with its bound, or a question that holds the row; neither when it says nothing."""

    value: float | None = None
    bound: str = "exact"
    question: str | None = None
    over_range: bool = False


def read_cell(text: str, column: str) -> Cell:
    """Read a cell of a reading's column; whatever is not plainly a number in the column's unit is asked about."""
    told = text.strip()
    if told.lower() in MISSING:
        return Cell()
    if told.lower() in OVER_RANGE:
        return Cell(
            question="over range: above which value? write it as >1999; treat the point as having no earth until then",
            over_range=True,
        )
    if "," in told:
        return Cell(question="a comma: is it a decimal or a thousands mark? write the number with a decimal point")
    match = _NUMBER.fullmatch(told)
    if match is None:
        return Cell(question="what does this cell mean? a number, >number, <number or an empty cell is expected")
    mark, number, rest = match.groups()
    unit = column.rsplit("_", 1)[-1]
    if rest and rest not in _UNITS.get(unit, set()):
        return Cell(question=f"this unit or mark is not the column's ({unit}): write the number in {unit}")
    return Cell(float(number), {">": "above", "<": "below", "": "exact"}[mark])
