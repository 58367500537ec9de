"""Rows of a batch as they were read, before they are judged.

Rows that differ only in the plain numbers of their readings share one pattern: the words are read,
validated and mapped once for all of them, and only the numbers are put in row by row.
"""

from collections.abc import Callable, Hashable, Mapping, Sequence
from dataclasses import dataclass, field
from typing import Any, NamedTuple

from faultloop.assessment.codes import Number, Reading
from faultloop.digests import json_bytes
from faultloop.exchange.columns import COLUMNS, TIMES, FileRefused, unknown
from faultloop.exchange.mapped_readings import PLAIN_READINGS
from faultloop.exchange.rows import TWICE, Body, Fault, Format, Stored, Told, named_twice, read_body, read_cells
from faultloop.exchange.tables import Table

# Where the mapping puts the number of a cell, untouched; columns not named here belong to a row's pattern.
READING_OF = {
    "earth_fault_loop_impedance_ohm": Reading.LOOP,
    **PLAIN_READINGS,
    "board_line_neutral_loop_impedance_ohm": Reading.ORIGIN_LINE_NEUTRAL,
    "board_earth_fault_loop_impedance_ohm": Reading.BOARD_LOOP,
    "board_prospective_current_ka": Reading.BOARD_CURRENT,
    "residual_operating_time_ms": Reading.TIME_1,
    "residual_operating_time_at_2_ms": Reading.TIME_2,
    "residual_operating_time_at_5_ms": Reading.TIME_5,
}
NUMBER_OF = {"length_m": Number.LENGTH_M}
NAMES = ("point_id", "label", "location")
_NUMBERED = {**READING_OF, **NUMBER_OF}
# Below this no field's bound can refuse a number; what is larger is looked at row by row.
_PLAIN_BELOW = 10_000.0
_NAN = float("nan")
_TIMES = {path[-1]: column for column, path in TIMES.items()}


class Named(NamedTuple):
    """How a row names its point."""

    id: str
    label: str
    location: str


@dataclass(slots=True)
class Rows:
    """Rows read: the pattern of each, and the numbers (nan where the pattern's own stands) by column."""

    numbers: Sequence[int]
    names: list[Named]
    told: list[Told]
    pattern: list[int]
    alone: Callable[[int], Told]
    raw: Callable[[int], Any]
    header: list[str]
    cells: Callable[[int], Sequence[str]]
    values: dict[str, list[float]] = field(default_factory=dict)
    prefix: Callable[[int], str] = field(default=lambda _: "")

    def of(self, at: int) -> Told:
        """What holds, refuses or asks for a row."""
        return self.told[self.pattern[at]]


def refuse_defaults(defaults: Mapping[str, str]) -> None:
    """Refuse a default for a column that is not known."""
    for at, name in enumerate(defaults, start=1):
        if name not in COLUMNS:
            raise FileRefused(f"the column of default {at} {unknown(name)}")


def body_rows(rows: Sequence[Any], defaults: Body, *, marked: bool = False, stored: Stored = None) -> Rows:
    """Rows that are request bodies; `marked` where names that stand twice are marked."""

    def alone(at: int) -> Told:
        twice = marked and named_twice(rows[at])
        return Told(faults=[TWICE]) if twice else read_body(rows[at], defaults, stored)

    parted = [_parted(row) for row in rows] if not marked else [(at, {}) for at in range(len(rows))]
    told, pattern = _patterns([key for key, _ in parted], alone)
    columns = dict.fromkeys(name for _, numbers in parted for name in numbers)
    names = [_named_in(row) for row in rows]
    return Rows(
        numbers=range(1, len(rows) + 1),
        names=names,
        told=told,
        pattern=pattern,
        alone=alone,
        raw=lambda at: rows[at],
        header=list(NAMES),
        cells=lambda at: names[at],
        values={name: [numbers.get(name, _NAN) for _, numbers in parted] for name in columns},
        prefix=lambda at: f"/rows/{at}",
    )


def _parted(row: Any) -> tuple[Hashable, dict[str, float]]:
    """A row without its point's names and the plain numbers of its readings, as a key, and those numbers by column."""
    numbers: dict[str, float] = {}
    if not isinstance(row, dict):
        return json_bytes(row), numbers
    rest, point = dict(row), row.get("point")
    named = isinstance(point, dict) and "label" in point and all(_plain_name(*pair) for pair in point.items())
    if named:
        rest["point"] = None
    if isinstance(readings := row.get("readings"), dict):
        rest["readings"] = kinds = {name: _kept(name, told, numbers) for name, told in readings.items()}
        times = readings.get("residual_operating_time_ms")
        if isinstance(times, dict):
            kinds["residual_operating_time_ms"] = {
                multiple: _kept(_TIMES.get(multiple, ""), told, numbers) for multiple, told in times.items()
            }
    # What was taken out belongs to the key: a row that really says null or true there is another pattern.
    return (json_bytes(rest), named, *numbers), numbers


def _plain_name(name: str, value: Any) -> bool:
    """Whether a name of a point is one that no bound refuses."""
    return (
        name in ("id", "label", "location") and isinstance(value, str) and 0 < len(value) <= 200 and "\x00" not in value
    )


def _kept(column: str, told: Any, numbers: dict[str, float]) -> Any:
    """What a reading says beside its plain number, which is noted; anything else as it is."""
    value = told.get("value") if isinstance(told, dict) else told
    if column not in READING_OF or not isinstance(value, int | float) or isinstance(value, bool):
        return told
    if not 0 <= value < _PLAIN_BELOW:
        return told
    numbers[column] = float(value)
    return {**told, "value": None} if isinstance(told, dict) else None


def _named_in(row: Any) -> Named:
    point = row.get("point") if isinstance(row, dict) else None
    known = point if isinstance(point, dict) else {}
    return Named(*(value if isinstance(value := known.get(name), str) else "" for name in ("id", "label", "location")))


def file_rows(table: Table, defaults: Mapping[str, str], stored: Stored = None) -> Rows:
    """Rows of a file; a column that the file lacks takes its default, a blank cell of one that it has does not."""
    form = Format(table.decimal, table.units)
    at_column = {name: at for at, name in enumerate(table.columns) if name is not None}
    absent = {name: value for name, value in defaults.items() if name not in at_column}
    laid_out = list(zip(*table.cells, strict=False)) or [()] * len(table.columns)
    columns = {name: laid_out[at] for name, at in at_column.items()}

    def alone(at: int) -> Told:
        if at in table.faults:
            return Told(faults=[Fault("", "unreadable-row", table.faults[at])])
        cells = {name: column[at] for name, column in columns.items()}
        return read_cells({**absent, **cells}, table.numbers[at], form, stored)

    kinds, values = _kinds(len(table.cells), columns, form)
    keys: list[Hashable] = list(zip(*kinds, strict=True))
    for at in table.faults:
        keys[at] = at
    told, pattern = _patterns(keys, alone)
    blank = ("",) * len(table.cells)
    names = [Named._make(name) for name in zip(*(map(str.strip, columns.get(n, blank)) for n in NAMES), strict=True)]
    width = len(table.header)
    return Rows(
        numbers=table.numbers,
        names=names,
        told=told,
        pattern=pattern,
        alone=alone,
        raw=table.raw,
        header=table.header,
        cells=lambda at: table.cells[at][:width],
        values=values,
    )


class _Numbers(dict[str, int | str]):
    """What kind a cell of a reading's column is: its bound where it is a plain number, else its own text."""

    def __init__(self, column: str, form: Format) -> None:
        self._column, self._form = column, form
        self.numbers: dict[str, float] = {}

    def __missing__(self, text: str) -> int | str:
        cell = self._form.cell(text, self._column)
        plain = cell.value is not None and cell.value < _PLAIN_BELOW
        bounded = cell.bound != "exact" and self._column not in READING_OF
        kind = text if not plain or bounded else ("exact", "above", "below").index(cell.bound)
        self.numbers[text] = cell.value if plain and cell.value is not None else _NAN
        self[text] = kind
        return kind


def _kinds(
    count: int, columns: Mapping[str, Sequence[str]], form: Format
) -> tuple[list[Sequence[int | str]], dict[str, list[float]]]:
    """For every column the kind of each cell, and the numbers of the columns of readings."""
    kinds: list[Sequence[int | str]] = [[0] * count]
    values: dict[str, list[float]] = {}
    for name, column in columns.items():
        if name in _NUMBERED:
            known = _Numbers(name, form)
            kinds.append([known[text] for text in column])
            values[name] = [known.numbers[text] for text in column]
        elif name in NAMES:
            kinds.append([text if len(text) > 200 or "\x00" in text else 0 for text in column])
        else:
            kinds.append(column)
    # A column that is the same all the way down parts no patterns.
    parting = [kind for kind in kinds[1:] if count and kind.count(kind[0]) < count]
    return [kinds[0], *parting], values


def _patterns(keys: Sequence[Hashable], alone: Callable[[int], Told]) -> tuple[list[Told], list[int]]:
    """Give rows of the same key one pattern, read from the first of them."""
    told: list[Told] = []
    known: dict[Hashable, int] = {}
    pattern: list[int] = []
    for at, key in enumerate(keys):
        which = known.get(key)
        if which is None:
            which = known[key] = len(told)
            told.append(alone(at))
        pattern.append(which)
    return told, pattern
