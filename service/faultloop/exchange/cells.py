"""Cells as instruments print them -> a value, a bound, nothing, or a question; never a zero, never converted."""

import re
from typing import Literal, NamedTuple

Decimal = Literal["point", "comma", "either"]
MISSING = {"", "-", "--", "---", "n/a", "na", "n.a.", "nt", "n.t.", "n.m.", "not tested", "not measured", "lim"}
OVER_RANGE = {"ol", "ofl", "o.l", "over", "overrange", "over-range"}
HELD = {"no trip", "not tripped", "nt.", "did not trip"}
# Readings of the path to earth: over range they may mean that there is none.
FAULT_PATH = {
    "earth_fault_loop_impedance_ohm",
    "external_earth_fault_loop_impedance_ohm",
    "line_plus_protective_resistance_ohm",
    "protective_conductor_resistance_ohm",
    "earth_electrode_resistance_ohm",
    "board_earth_fault_loop_impedance_ohm",
}
_NUMBER = re.compile(r"([<>]?)\s*(\d+)(?:([.,])(\d+))?\s*(.*)", re.ASCII | re.DOTALL)
_UNITS = {
    "ohm": {"ohm", "ohms", "Ohm", "Ω", "\u2126"},
    "ms": {"ms"},
    "ma": {"mA"},
    "megohm": {"Mohm", "MΩ", "M\u2126", "megohm"},
    "v": {"V"},
    "a": {"A"},
    "ka": {"kA"},
    "m": {"m"},
    "mm2": {"mm2", "mm²"},
    "kohm": {"kohm", "kOhm", "kΩ", "k\u2126"},
    "nf": {"nF"},
    "hz": {"Hz"},
    "va": {"VA"},
    "percent": {"%"},
}


class Cell(NamedTuple):
    """What a cell says: a value with its bound, or a question that holds the row; neither when it says nothing."""

    value: float | None = None
    bound: str = "exact"
    question: str | None = None
    over_range: bool = False


def unit_of(column: str) -> str:
    """The unit that a column's name ends in."""
    return column.rsplit("_", 1)[-1]


def same_unit(told: str, column: str) -> bool:
    """Whether a unit as written is the column's own."""
    return told in _UNITS.get(unit_of(column), set())


def read_cell(text: str, column: str, decimal: Decimal = "point", header_unit: str | None = None) -> Cell:
    """Read a cell of a number; whatever is not plainly a number in the column's unit is asked about.

    `either` takes a comma or a point where it can only be a decimal mark; `header_unit` is the unit that the
    file's own heading names where it is not the column's.
    """
    told = text.strip()
    match = _NUMBER.fullmatch(told)
    if match is None:
        return _word(told.lower(), column)
    sign, whole, mark, fraction, rest = match.groups()
    if asked := _mark(mark, whole, fraction, decimal):
        return Cell(question=asked)
    unit = unit_of(column)
    if rest and not same_unit(rest, column):
        return Cell(question=f"this unit or mark is not the column's ({unit}): write the number in {unit}")
    if header_unit is not None and not rest:
        return Cell(question=f"the heading's unit is not the column's ({unit}): write the number in {unit}")
    number = float(f"{whole}.{fraction}" if fraction else whole)
    return Cell(number, {">": "above", "<": "below", "": "exact"}[sign])


def _word(told: str, column: str) -> Cell:
    """What a cell says that begins with no number."""
    if told in MISSING:
        return Cell()
    if told in OVER_RANGE and column in FAULT_PATH:
        return Cell(
            question="over range: above which value? write it as >1999; treat the point as having no earth until then",
            over_range=True,
        )
    if told in OVER_RANGE:
        return Cell(question="over range: above which value? write it as > and the end of the range")
    if told in HELD:
        return Cell(question="not tripped: within which time? write it as > and the longest time of the tester")
    return Cell(question="what does this cell mean? a number, >number, <number or an empty cell is expected")


def _mark(mark: str | None, whole: str, fraction: str, decimal: Decimal) -> str | None:
    """What must be asked about a number's comma or point, if anything."""
    if mark is None:
        return None
    if decimal == "either":
        grouped = len(fraction) == 3 and len(whole) <= 3 and not whole.startswith("0")
        told = f"a {'comma' if mark == ',' else 'point'} before three digits"
        return f"{told}: is it a decimal or a thousands mark? say decimal=comma or decimal=point" if grouped else None
    if mark == "," and decimal == "point":
        return "a comma: is it a decimal or a thousands mark? write a decimal point, or say decimal=comma"
    if mark == "." and decimal == "comma":
        return "a point: is it a decimal or a thousands mark? this file's decimals are written with a comma"
    return None
