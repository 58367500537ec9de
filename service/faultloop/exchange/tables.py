"""A CSV file of points -> its columns by contract names and its rows of cells, as they came."""

import csv
import io
import re
from collections.abc import Iterator, Sequence
from dataclasses import dataclass, field
from typing import Any

from faultloop.exchange.cells import Decimal, same_unit
from faultloop.exchange.columns import COLUMNS, FileRefused, unknown

Record = list[str] | str
MOST_ROWS = 10_000
_SEPARATORS = (",", ";", "\t")
_WITH_UNIT = re.compile(r"(.*?)\s*(?:\[([^\]]*)\]|\(([^)]*)\))")
_LONGEST_HEADING = 200
_TOLD_SEPARATOR = re.compile(r"sep=([,;\t])\r?\n")
_CASELESS = {name.casefold(): name for name in COLUMNS}


@dataclass(slots=True)
class Table:
    """A file as it was read: its rows of cells, padded to the heading; `faults` says which cannot be read, and why.

    A row's number is the one that a spreadsheet shows: the heading is row 1 and blank rows are counted.
    """

    header: list[str]
    columns: list[str | None]
    separator: str
    decimal: Decimal
    units: dict[str, str] = field(default_factory=dict)
    numbers: list[int] = field(default_factory=list)
    cells: list[list[str]] = field(default_factory=list)
    faults: dict[int, str] = field(default_factory=dict)
    blank_lines: int = 0

    @property
    def ignored(self) -> list[str]:
        """Headings that were passed over because the caller said so."""
        return [name for name, column in zip(self.header, self.columns, strict=True) if column is None]

    def raw(self, at: int) -> dict[str, str]:
        """One row's cells by heading, as they came; cells beyond the heading by their place."""
        cells, width = self.cells[at], len(self.header)
        beyond = {f"column {place}": cell for place, cell in enumerate(cells[width:], start=width + 1)}
        return dict(zip(self.header, cells, strict=False)) | beyond


def decoded(content: bytes) -> str:
    """The text of a file in UTF-8."""
    try:
        return content.decode("utf-8-sig")
    except UnicodeDecodeError as error:
        line = content.count(b"\n", 0, error.start) + 1
        raise FileRefused(f"line {line} is not UTF-8: save the file as CSV in UTF-8") from None


def read_table(text: str, decimal: Decimal | None = None, ignore: Sequence[str] = (), most: int = MOST_ROWS) -> Table:
    """Read a CSV file; a heading that is not known is refused unless the caller says that it may be passed over."""
    text = text.removeprefix("\ufeff")
    told = _TOLD_SEPARATOR.match(text)
    separator = told[1] if told else _separator(text)
    records = _records(text[told.end() :] if told else text, separator)
    begun = 2 if told else 1
    following = iter(records)
    for number, record in enumerate(following, start=begun):
        if not _blank(record):
            table = _headed(record, separator, decimal, ignore)
            _fill(table, following, number, most)
            return table
    raise FileRefused("the file is empty: the first line must name the columns")


def _separator(text: str) -> str:
    """The separator by which the first line names the most columns."""
    first = next((line for line in io.StringIO(text, newline="") if line.strip()), "")
    return max(_SEPARATORS, key=lambda mark: sum(_named(name)[0] is not None for name in first.split(mark)))


def _records(text: str, separator: str) -> Sequence[Record]:
    """Records of the file; one whose quotes cannot be read comes as the words for it, and the next line follows."""
    try:
        return list(csv.reader(io.StringIO(text, newline=""), delimiter=separator, strict=True))
    except csv.Error:
        return list(_one_by_one(csv.reader(io.StringIO(text, newline=""), delimiter=separator, strict=True)))


def _one_by_one(reader: Any) -> Iterator[Record]:
    while True:
        try:
            yield next(reader)
        except StopIteration:
            return
        except csv.Error as error:
            if "end of data" in str(error):
                raise FileRefused(f"line {reader.line_num}: a quotation mark is opened and never closed") from None
            yield f"the quotation marks of this row cannot be read ({error})"


def _blank(record: Record) -> bool:
    return not isinstance(record, str) and next(filter(str.strip, record), None) is None


def _named(told: str) -> tuple[str | None, str | None]:
    """The column that a heading names, and the unit that it says besides."""
    name = told.strip().strip('"').strip()
    unit = None
    if len(name) > _LONGEST_HEADING:
        return None, None
    if match := _WITH_UNIT.fullmatch(name):
        name, unit = match[1], (match[2] or match[3] or "").strip()
    return _CASELESS.get(name.casefold()), unit or None


def _headed(header: Record, separator: str, decimal: Decimal | None, ignore: Sequence[str]) -> Table:
    if isinstance(header, str):
        raise FileRefused(header)
    names = [name.strip() for name in header]
    while names and not names[-1]:
        names.pop()
    # Where the separator is a comma, a comma cannot mark decimals unless the caller says so.
    table = Table(names, [], separator, decimal or ("point" if separator == "," else "either"))
    for at, name in enumerate(names, start=1):
        column, unit = _named(name)
        if name in ignore:
            column = None
        elif column is None:
            raise FileRefused(f"column {at} {unknown(name) if name else 'has no name'}")
        elif unit is not None and not same_unit(unit, column):
            table.units[column] = unit
        table.columns.append(column)
    for at, (name, column) in enumerate(zip(names, table.columns, strict=True), start=1):
        if names.index(name) < at - 1 or (column is not None and table.columns.index(column) < at - 1):
            raise FileRefused(f"column {at} stands twice: which of the two is meant?")
    return table


def _fill(table: Table, records: Iterator[Record], number: int, most: int) -> None:
    width, numbers, cells = len(table.header), table.numbers, table.cells
    for record in records:
        number += 1
        if isinstance(record, str):
            table.faults[len(cells)] = record
            record = []
        elif len(record) != width:
            if _blank(record):
                table.blank_lines += 1
                continue
            if any(cell.strip() for cell in record[width:]):
                table.faults[len(cells)] = "more cells than columns"
            elif len(record) < width:
                # Which cells are missing nobody can tell, and a rule set that goes missing is another rule set.
                table.faults[len(cells)] = "fewer cells than columns: write the empty ones too"
        elif _blank(record):
            table.blank_lines += 1
            continue
        if len(cells) == most:
            raise FileRefused(f"the file has more than {most} rows: send it in parts")
        numbers.append(number)
        cells.append(record if len(record) >= width else record + [""] * (width - len(record)))
